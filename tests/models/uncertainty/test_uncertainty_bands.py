"""Bands along the gradient: against many draws, in traps, and by their laws."""

import itertools

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal
from scipy.special import ndtri
from scipy.stats import chi2, norm, qmc

from models.errors import ParameterError
from models.uncertainty.distributions import Lognormal, Normal, Rectangular
from models.uncertainty.draws import Draws
from models.uncertainty.monte_carlo import simulate
from models.uncertainty.quantiles import reliability
from models.uncertainty.quantiles.reliability import Method, band

LEVELS = {
    "good": (0.01, 0.3, 0.02, 0.01, 0.2, 0.15),
    "typical": (0.03, 1.0, 0.05, 0.02, 0.4, 0.3),
    "poor": (0.06, 3.0, 0.10, 0.05, 1.0, 0.6),
}
GRID = np.array(
    list(itertools.product((8, 11, 16, 24, 36), (3, 18, 33), (0.02, 0.15), (0.40, 0.52))), float
)


def water(temperature):
    """Malmberg and Maryott (1956), from memory: here only a curved function to try."""
    t = temperature
    return 87.740 - t * (0.40008 - t * (9.398e-4 - t * 1.410e-6))


def cubic(ka):
    return -5.3e-2 + ka * (2.92e-2 + ka * (-5.5e-4 + ka * 4.3e-6))


def refractive(ka, t, phi, solid):
    return (np.sqrt(ka) - (1 - phi) * np.sqrt(solid) - phi) / (np.sqrt(water(t)) - 1)


def inclusions(ka, t, phi, solid):
    host = water(t)
    effect = [(e - host) / (e + 2 * host) for e in (ka, solid, 1.0)]
    return phi - (effect[0] - (1 - phi) * effect[1]) / effect[2]


def pore_water(ka, t, ec, offset):
    return water(t) * ec / (ka - offset)


MEASURANDS = {
    cubic: ("ka",),
    refractive: ("ka", "t", "phi", "solid"),
    inclusions: ("ka", "t", "phi", "solid"),
    pore_water: ("ka", "t", "ec", "offset"),
}
NAMES = ("ka", "t", "ec", "phi", "solid", "offset")


def scenario(level):
    """Sixty scenarios of one level of uncertainty, as columns by name."""
    ka, t, ec, phi = GRID.T
    share_ka, u_t, share_ec, u_phi, u_solid, u_offset = LEVELS[level]
    ones = np.ones(len(GRID))
    values = (ka, t, ec, phi, 4.7 * ones, 4.1 * ones)
    u = (share_ka * ka, u_t * ones, share_ec * ec, u_phi * ones, u_solid * ones, u_offset * ones)
    return {n: Normal(v, w) for n, v, w in zip(NAMES, values, u, strict=True)}


@pytest.fixture(scope="module")
def points():
    """Reference draws, made without this package."""
    sobol = qmc.Sobol(6, rng=np.random.default_rng(20)).random_base2(17)
    return dict(zip(NAMES, ndtri(sobol + 2.0**-31).T, strict=True))


@pytest.mark.parametrize("level", LEVELS)
@pytest.mark.parametrize("measurand", MEASURANDS, ids=lambda f: f.__name__)
def test_ends_are_within_one_per_cent_of_the_half_width(measurand, level, points):
    """Reference: 2^17 scrambled Sobol points, themselves good to about 0.2 % of the half-width."""
    given = {name: scenario(level)[name] for name in MEASURANDS[measurand]}
    found = band(measurand, given)
    for row in range(0, len(GRID), 10 if measurand is cubic else 1):
        at = {name: d.mean[row] + d.width[row] * points[name] for name, d in given.items()}
        lower, upper = np.quantile(measurand(**at), [0.025, 0.975])
        half = 0.5 * (upper - lower)
        assert abs(found.lower[row] - lower) < 0.01 * half
        assert abs(found.upper[row] - upper) < 0.01 * half


def test_the_grid_is_done_without_draws():
    for measurand, names in MEASURANDS.items():
        for level in LEVELS:
            given = {name: scenario(level)[name] for name in names}
            method = band(measurand, given).method
            assert (method != Method.DRAWS).all()
            if measurand is cubic:
                assert (method == Method.EXACT).all()
            elif level == "good" and measurand is not pore_water:
                assert (method == Method.GRADIENT).all()


TRAPS = {
    "product of inputs the value does not depend on": lambda x, y, w, c: x + c * y * w,
    "slope that depends on another input": lambda x, y, w, c: x * (1 + c * y) + 0 * w,
    "curvature to one side across the gradient": lambda x, y, w, c: x + c * y * y + 0 * w,
    "curvatures that cancel": lambda x, y, w, c: x + c * (y * y - w * w),
    "odd in every input": lambda x, y, w, c: sum(v + c * v**3 / 3 for v in (x, y, w)),
    "exponential": lambda x, y, w, c: sum(np.exp(c * v) for v in (x, y, w)),
    "an edge of the domain": lambda x, y, w, c: np.sqrt(1 + 2 * c * x) + 0.1 * (y + w),
    "a pole": lambda x, y, w, c: np.where(1 + c * y > 0, (1 + 0.1 * (x + w)) / (1 + c * y), np.nan),
    "distance": lambda x, y, w, c: np.hypot(1 / c + x, y + w),
}


@pytest.mark.parametrize("trap", TRAPS)
def test_measurands_whose_curvature_hides(trap):
    """Ends within 1 % of the half-width, of rows that need draws within 2 %, at any strength.

    The reference is 2^17 draws. Next to a pole the interval has all but no upper end: left out.
    """
    strength = np.array([0.02, 0.05, 0.1, 0.15, 0.2, 0.3, 0.5])
    given = {name: Normal(0.0, 1.0) for name in "xyw"} | {"c": Normal(strength, 0.0)}
    with np.errstate(all="ignore"):
        found = band(TRAPS[trap], given)
        expected = simulate(TRAPS[trap], given, draws=Draws(2**17, seed=9))
    half = 0.5 * (expected.upper - expected.lower)
    share = np.where(found.method == Method.DRAWS, 0.02, 0.01)
    allowed = np.where(half > 1e3 * half[0], np.inf, share * half)
    assert (np.abs(found.lower - expected.lower) < allowed).all()
    assert (np.abs(found.upper - expected.upper) < allowed).all()
    assert found.method[0] != Method.DRAWS


def test_one_monotone_input_is_exact():
    ka = np.linspace(3, 40, 9)
    found = band(cubic, {"ka": Normal(ka, 0.05 * ka)}, probability=0.9)
    z = norm.ppf(0.95)
    assert_allclose(found.lower, cubic(ka * (1 - 0.05 * z)), rtol=1e-14)
    assert_allclose(found.upper, cubic(ka * (1 + 0.05 * z)), rtol=1e-14)
    falling = band(lambda x: 1 / x, {"x": Lognormal(3.0, 0.4)})
    assert falling.lower[0] < 1 / 3 < falling.upper[0]
    assert falling.method[0] == Method.EXACT


def square(x):
    return x * x


def test_one_input_that_is_not_monotone_takes_draws():
    """Oracle: scipy.stats, chi-square with one degree of freedom."""
    found = band(square, {"x": Normal(np.array([0.0, 100.0]), 1.0)})
    assert_allclose([found.lower[0], found.upper[0]], chi2(1).ppf([0.025, 0.975]), atol=0.02)
    assert list(found.method) == [Method.DRAWS, Method.EXACT]


def test_rows_that_leave_the_domain_take_draws_and_say_how_many_were_outside():
    x = np.array([0.1, 1.0, 100.0])
    found = band(lambda x, y: np.sqrt(x) + y, {"x": Normal(x, 1.0), "y": Normal(0.0, 0.1)})
    assert list(found.method) == [Method.DRAWS, Method.DRAWS, Method.GRADIENT]
    assert found.outside[2] == 0
    assert_allclose(found.outside[:2] / 16_384, norm.cdf(-x[:2]), atol=1e-3)


def test_no_number_and_nothing_uncertain():
    x = np.array([np.nan, 2.0])
    found = band(lambda x, y: x * y, {"x": Normal(x, 0.0), "y": Normal(3.0, 0.0)})
    assert list(found.method) == [Method.NO_NUMBER, Method.EXACT]
    assert np.isnan([found.lower[0], found.upper[0]]).all()
    assert (found.lower[1], found.upper[1]) == (6.0, 6.0)


def test_a_very_narrow_band_is_not_lost_in_rounding():
    given = {"x": Normal(np.array([20.0, 3.0]), 1e-11), "y": Normal(2.0, 1e-12)}
    found = band(lambda x, y: x * y, given)
    u = np.hypot(1e-12 * given["x"].mean, 2e-11)
    assert list(found.method) == [Method.GRADIENT] * 2
    assert_allclose(found.upper - found.value, norm.ppf(0.975) * u, rtol=0.01)


def test_infinite_values_are_no_numbers():
    x = np.array([0.0, 1e-9, 4.0])
    found = band(lambda x, y: y / x, {"x": Normal(x, 0.0), "y": Normal(1.0, 0.1)})
    assert found.method[0] == Method.NO_NUMBER
    assert np.isnan([found.value[0], found.lower[0], found.upper[0]]).all()
    assert_allclose(found.upper[1:] * x[1:], 1 + 0.1 * norm.ppf(0.975), rtol=1e-9)


def test_correlated_inputs():
    """A sum of normal inputs, exactly: u^2 = 4 + 1 + 2 r 2."""
    r = -0.4
    given = {"x": Normal(np.zeros(3), 2.0), "y": Normal(1.0, 1.0)}
    found = band(lambda x, y: x + y, given, correlation=[[1.0, r], [r, 1.0]])
    reach = norm.ppf(0.975) * np.sqrt(4 + 1 + 4 * r)
    assert_allclose(found.upper, 1 + reach, rtol=1e-9)
    together = band(lambda x, y: x - y, given, correlation=np.ones((2, 2)))
    assert_allclose(together.upper - together.lower, 2 * norm.ppf(0.975), rtol=1e-9)
    with pytest.raises(ParameterError, match="eigenvalue"):
        band(lambda x, y: x + y, given, correlation=[[1.0, 1.1], [1.1, 1.0]])


def test_correlated_curved_inputs_agree_with_draws():
    matrix = [[1.0, 0.6], [0.6, 1.0]]
    given = {"x": Normal(np.array([8.0, 16.0]), 0.8), "y": Normal(4.1, 0.4)}

    def ratio(x, y):
        return 1 / (x - y)

    found = band(ratio, given, correlation=matrix)
    drawn = simulate(ratio, given, correlation=matrix, draws=Draws(2**17))
    half = 0.5 * (drawn.upper - drawn.lower)
    assert (np.abs(found.upper - drawn.upper) < 0.01 * half).all()
    assert (np.abs(found.lower - drawn.lower) < 0.01 * half).all()


def test_a_row_does_not_know_its_neighbours_nor_the_block_it_is_in(monkeypatch):
    given = {name: scenario("poor")[name] for name in MEASURANDS[pore_water]}
    given["ka"] = Normal(np.linspace(5.5, 40, 60), given["ka"].width)
    whole = band(pore_water, given)
    assert {Method.DRAWS, Method.CURVATURE} <= set(whole.method)
    monkeypatch.setattr(reliability, "BLOCK", 7)
    cut = band(pore_water, given)
    order = np.random.default_rng(4).permutation(60)
    mixed = band(pore_water, {name: d.take(order) for name, d in given.items()})
    for name in ("value", "lower", "upper", "method", "outside"):
        assert_array_equal(getattr(whole, name), getattr(cut, name))
        assert_array_equal(getattr(whole, name)[order], getattr(mixed, name))


def test_shapes_other_than_normal():
    found = band(lambda x, y: x + y, {"x": Rectangular(np.zeros(2), 0.01), "y": Normal(0.0, 1.0)})
    assert_allclose(found.upper, norm.ppf(0.975), rtol=1e-3)


def test_no_rows_are_no_rows():
    given = {"x": Normal(np.empty(0), 1.0), "y": Normal(1.0, 0.1)}
    assert band(lambda x, y: x * y, given).lower.shape == (0,)
