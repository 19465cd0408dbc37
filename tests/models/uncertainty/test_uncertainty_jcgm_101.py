"""The worked examples of JCGM 101 and 102 and two like them, from the engine itself."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.stats import ncx2

from models.uncertainty.correlation import covariance_from
from models.uncertainty.distributions import (
    CurvilinearTrapezoid,
    Normal,
    Rectangular,
    StudentT,
    UShaped,
)
from models.uncertainty.draws import Draws
from models.uncertainty.first_order import Input, propagate
from models.uncertainty.joint import propagate_jointly
from models.uncertainty.monte_carlo import simulate, simulate_jointly
from models.uncertainty.quantiles.reliability import Method, band
from models.uncertainty.second_order import propagate_to_second_order
from models.uncertainty.validation import validate_first_order
from tests.published import table

ROOT_3 = np.sqrt(3.0)
MANY = Draws(2**17)


def total(a, b, c, d):
    return a + b + c + d


SUMS = [
    [Normal(0.0, 1.0)] * 4,
    [Rectangular(0.0, ROOT_3)] * 4,
    [Rectangular(0.0, ROOT_3)] * 3 + [Rectangular(0.0, 10 * ROOT_3)],
]


@pytest.mark.parametrize("row", [0, 1, 2])
def test_sums_of_four(row):
    printed = table("jcgm_101_sums")
    inputs = dict(zip("abcd", SUMS[row], strict=True))
    drawn = simulate(total, inputs, draws=MANY)
    assert_allclose(drawn.standard_uncertainty, printed["u"].values[row], atol=0.05)
    for end, sign in ((drawn.upper, 1), (drawn.lower, -1)):
        assert_allclose(end, sign * printed["drawn_upper"].values[row], atol=0.02)
    first = validate_first_order(total, inputs, draws=MANY)
    upper = printed["first_order_upper"]
    assert_allclose(first.upper, upper.values[row], atol=upper.tolerance[row])
    fast = band(total, inputs)
    assert_allclose([fast.lower, fast.upper], [drawn.lower, drawn.upper], rtol=4e-3)


def test_sum_of_four_rectangles_has_its_exact_limit():
    """2 root 3 (2 - (3/5)^(1/4)): algebra."""
    drawn = simulate(total, dict(zip("abcd", SUMS[1], strict=True)), draws=MANY)
    assert_allclose(drawn.upper, 2 * ROOT_3 * (2 - 0.6**0.25), rtol=1e-3)


def mass(weight, difference, air, density, reference):
    """9.3: deviation of the conventional mass from 100 g, mg."""
    return (weight + difference) * (1 + (air - 1.2) * (1 / density - 1 / reference)) - 1e5


MASS = {
    "weight": Normal(100_000.0, 0.050),
    "difference": Normal(1.234, 0.020),
    "air": Rectangular(1.20, 0.10),
    "density": Rectangular(8000.0, 1000.0),
    "reference": Rectangular(8000.0, 50.0),
}
MASS_INPUTS = [Input(name, d.mean, d.standard_uncertainty) for name, d in MASS.items()]


def test_mass_from_draws_and_on_the_fast_way():
    printed = table("jcgm_101_mass")
    drawn = simulate(mass, MASS, draws=Draws(2**18), interval="shortest")
    assert_allclose(drawn.value, printed["value"].values[0], atol=2e-4)
    assert_allclose(drawn.standard_uncertainty, printed["u"].values[0], atol=3e-4)
    width = printed["upper"].values[0] - printed["lower"].values[0]
    assert_allclose(drawn.upper - drawn.lower, width, atol=5e-4)
    assert_allclose(drawn.lower, printed["lower"].values[0], atol=4e-3)  # a flat minimum
    fast = band(mass, MASS)
    # Symmetric interval, computed apart from this package.
    assert_allclose([fast.lower[0], fast.upper[0]], [1.0845, 1.3835], atol=1.5e-3)
    assert fast.method[0] == Method.DRAWS


def test_mass_to_first_and_second_order():
    """All sensitivities to the densities vanish: only the second order sees them."""
    printed = table("jcgm_101_mass")
    value = np.array([mass(*(each.value for each in MASS_INPUTS))])
    first = np.sqrt(propagate(mass, MASS_INPUTS, value).per_reading)
    second = propagate_to_second_order(mass, MASS_INPUTS, value).standard_uncertainty
    for row, u in ((1, first), (2, second)):
        assert_allclose(value, printed["value"].values[row], atol=5e-5)
        assert_allclose(u, printed["u"].values[row], atol=5e-5)
        assert_allclose(value - 1.96 * u, printed["lower"].values[row], atol=1e-4)
        assert_allclose(value + 1.96 * u, printed["upper"].values[row], atol=1e-4)


def loss(x1, x2):
    """9.4: comparison loss of a microwave power meter."""
    return x1**2 + x2**2


def lost(x1, correlation, **how):
    return simulate(
        loss,
        {"x1": Normal(np.array([x1]), 0.005), "x2": Normal(0.0, 0.005)},
        correlation=[[1.0, correlation], [correlation, 1.0]],
        draws=MANY,
        **how,
    )


@pytest.mark.parametrize("row", range(6))
def test_comparison_loss(row):
    printed = {name: col.values[row] for name, col in table("jcgm_101_loss").items()}
    drawn = lost(printed["x1"], printed["correlation"])
    assert_allclose(1e6 * drawn.value, printed["mean"], atol=1)
    assert_allclose(1e6 * drawn.standard_uncertainty, printed["u"], atol=1)


@pytest.mark.parametrize("row", range(4))
def test_shortest_interval_of_a_loss_starts_at_none(row):
    printed = {name: col.values[row] for name, col in table("jcgm_101_loss_intervals").items()}
    drawn = lost(printed["x1"], printed["correlation"], interval="shortest")
    assert_allclose(1e6 * drawn.lower, printed["lower"], atol=2)
    assert_allclose(1e6 * drawn.upper, printed["upper"], atol=3)


def test_symmetric_interval_of_a_loss_is_that_of_the_non_central_chi_square():
    """Oracle: scipy.stats.ncx2; Y / u^2 has two degrees of freedom and centre (x1 / u)^2."""
    x1 = np.array([0.0, 0.010, 0.050, 0.5])
    exact = ncx2(2, (x1 / 0.005) ** 2)
    expected = 0.005**2 * np.array([exact.ppf(0.025), exact.ppf(0.975)])
    half = (expected[1] - expected[0]) / 2
    found = band(loss, {"x1": Normal(x1, 0.005), "x2": Normal(0.0, 0.005)}, draws=MANY)
    assert (np.abs(found.lower - expected[0]) < 0.01 * half).all()
    assert (np.abs(found.upper - expected[1]) < 0.01 * half).all()
    assert list(found.method) == [Method.DRAWS, Method.DRAWS, Method.CURVATURE, Method.GRADIENT]


def test_gauge_block_with_seven_kinds_of_input():
    def deviation(standard, loop, random, systematic, expansion, mean, cycle, other, between):  # noqa: PLR0913, PLR0917
        shift = other * (mean + cycle) + expansion * between
        return standard + loop + random + systematic - standard * shift - 50_000_000.0

    printed = table("jcgm_101_gauge_block")
    drawn = simulate(
        deviation,
        {
            "standard": StudentT(50_000_623.0, 25.0, 18),
            "loop": StudentT(215.0, 6.0, 24),
            "random": StudentT(0.0, 4.0, 5),
            "systematic": StudentT(0.0, 7.0, 8),
            "expansion": Rectangular(11.5e-6, 2e-6),
            "mean": Normal(-0.1, 0.2),
            "cycle": UShaped(0.0, 0.5),
            "other": CurvilinearTrapezoid(0.0, 1e-6, 0.1),
            "between": CurvilinearTrapezoid(0.0, 0.050, 0.5),
        },
        draws=MANY,
        probability=0.99,
        interval="shortest",
    )
    for found, name in ((drawn.value, "value"), (drawn.standard_uncertainty, "u")):
        assert_allclose(found, printed[name].values[0], atol=0.5)
    assert_allclose(drawn.upper - drawn.lower, 187, atol=2)
    assert_allclose(drawn.lower, printed["lower"].values[0], atol=3)


def polar(real, imaginary):
    return np.hypot(real, imaginary), np.arctan2(imaginary, real)


@pytest.mark.parametrize("row", range(3))
def test_magnitude_and_phase_of_a_small_reflection(row):
    """To first order its phase is known to 10 rad, which is no phase at all."""
    columns = table("jcgm_102_polar")
    printed = {name: col.values[row] for name, col in columns.items()}
    matrix = [[1.0, printed["correlation"]], [printed["correlation"], 1.0]]
    first = propagate_jointly(
        polar,
        {"real": printed["real"], "imaginary": 0.0},
        covariance_from([0.010, 0.010], matrix),
    )
    for output, name in enumerate(("first_magnitude_u", "first_phase_u")):
        assert_allclose(first.standard_uncertainty[0, output], printed[name], atol=5e-4)
    drawn = simulate_jointly(
        polar,
        {"real": Normal(printed["real"], 0.010), "imaginary": Normal(0.0, 0.010)},
        correlation=matrix,
        draws=MANY,
    )
    u = np.sqrt(np.diagonal(drawn.covariance[0]))
    assert_allclose(drawn.value[0], [printed["magnitude"], printed["phase"]], atol=6e-4)
    assert_allclose(u, [printed["magnitude_u"], printed["phase_u"]], atol=6e-4)


def test_complex_reflection_coefficient():
    size, u_size = [0.24776, 0.49935, 0.24971, 0.49952], [0.00337, 0.0034, 0.0017, 0.0034]
    phase, u_phase = [4.88683, 4.78595, 4.85989, 4.79054], [0.01392, 0.00835, 0.00842, 0.00835]
    names = [f"{part}_{port}" for part in ("size", "phase") for port in ("22", "12", "23", "13")]

    def reflection(**at):
        s22, s12, s23, s13 = (
            at[f"size_{port}"] * np.exp(1j * at[f"phase_{port}"])
            for port in ("22", "12", "23", "13")
        )
        return s22 - s12 * s23 / s13

    found = propagate_jointly(
        reflection,
        dict(zip(names, size + phase, strict=True)),
        covariance_from(u_size + u_phase, np.eye(8)),
    )
    printed = table("nist_1900_reflection")
    for figure, name in (
        (found.value[0, 0], "real"),
        (found.value[0, 1], "imaginary"),
        (found.correlation[0, 0, 1], "correlation"),
    ):
        assert_allclose(figure, printed[name].values[0], atol=printed[name].tolerance[0])


def logarithm(x):
    return np.log(x)


def test_logarithm_of_a_rectangle():
    """Only draws see that no value is above ln 1.1."""
    printed = {name: col.values[0] for name, col in table("npl_logarithm").items()}
    given = Rectangular(0.6, 0.5)
    covariance = np.square(given.standard_uncertainty)[None, None]
    first = propagate_jointly(logarithm, {"x": given.mean}, covariance)
    value, u = first.value[0, 0], first.standard_uncertainty[0, 0]
    assert_allclose([value, u], [printed["first_value"], printed["first_u"]], atol=5e-4)
    assert_allclose(value + 1.96 * u, printed["first_upper"], atol=1e-3)
    drawn = simulate(logarithm, {"x": given}, draws=MANY, interval="shortest")
    for found, name in ((drawn.value, "value"), (drawn.standard_uncertainty, "u")):
        assert_allclose(found, printed[name], atol=5e-4)
    for found, name in ((drawn.lower, "lower"), (drawn.upper, "upper")):
        assert_allclose(found, printed[name], atol=5e-3)
