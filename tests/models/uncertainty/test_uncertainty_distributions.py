"""Distributions of inputs: against scipy's, against their own densities, and what is refused."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy import stats
from scipy.integrate import quad

from models.errors import ParameterError
from models.uncertainty.distributions import (
    CurvilinearTrapezoid,
    Lognormal,
    Normal,
    Rectangular,
    StudentT,
    Triangular,
    UShaped,
    as_normal,
    rows_of,
)
from models.uncertainty.first_order import Input

MEAN, WIDTH = 17.2, 0.3
LOG = np.log1p((WIDTH / MEAN) ** 2)
ORACLES = [
    (Normal(MEAN, WIDTH), stats.norm(MEAN, WIDTH)),
    (Rectangular(MEAN, WIDTH), stats.uniform(MEAN - WIDTH, 2 * WIDTH)),
    (Triangular(MEAN, WIDTH), stats.triang(0.5, MEAN - WIDTH, 2 * WIDTH)),
    (UShaped(MEAN, WIDTH), stats.arcsine(MEAN - WIDTH, 2 * WIDTH)),
    (StudentT(MEAN, WIDTH, 4), stats.t(4, MEAN, WIDTH)),
    (StudentT(MEAN, WIDTH, 18.5), stats.t(18.5, MEAN, WIDTH)),
    (Lognormal(MEAN, WIDTH), stats.lognorm(np.sqrt(LOG), scale=MEAN * np.exp(-LOG / 2))),
]
SHAPES = [given for given, _ in ORACLES] + [
    CurvilinearTrapezoid(MEAN, WIDTH, blur) for blur in (0.0, 0.2, 0.5, 1.0)
]


def name_of(case):
    return type(case).__name__ if not hasattr(case, "dist") else ""


@pytest.mark.parametrize(("given", "oracle"), ORACLES, ids=name_of)
def test_quantiles_and_deviation_are_those_of_scipy(given, oracle):
    """Oracle: scipy.stats."""
    probability = np.array([1e-6, 0.001, 0.025, 0.3, 0.5, 0.7, 0.975, 0.999])
    assert_allclose(given.quantile(probability), oracle.ppf(probability), rtol=1e-9)
    assert_allclose(given.standard_uncertainty, oracle.std(), rtol=1e-12)
    assert_allclose(given.mean, oracle.mean(), rtol=1e-12)


@pytest.mark.parametrize("blur", [0.1, 0.5, 0.9])
def test_curvilinear_trapezoid_follows_its_density(blur):
    """The density of JCGM 101, 6.4.3.2, integrated numerically, from memory."""

    def density(x):
        x = abs(x)
        if x >= 1 + blur:
            return 0.0
        return np.log((1 + blur) / max(x, 1 - blur)) / (4 * blur)

    given = CurvilinearTrapezoid(0.0, 1.0, blur)
    for probability in (0.55, 0.8, 0.95, 0.999):
        end = float(given.quantile(probability))
        held = quad(density, 0, end, points=[min(1 - blur, end)], epsabs=1e-12)[0]
        assert held == pytest.approx(probability - 0.5, abs=1e-9)
    square = 2 * quad(lambda x: x * x * density(x), 0, 1 + blur, points=[1 - blur])[0]
    assert given.standard_uncertainty == pytest.approx(np.sqrt(square), rel=1e-8)


def test_curvilinear_trapezoid_without_blur_is_a_rectangle():
    z = np.linspace(-5, 5, 11)
    blurred = CurvilinearTrapezoid(MEAN, WIDTH, 0.0)
    assert_allclose(blurred.from_normal(z), Rectangular(MEAN, WIDTH).from_normal(z), rtol=1e-8)


@pytest.mark.parametrize("given", SHAPES, ids=name_of)
def test_rises_with_the_standard_normal_variable_and_ends_nowhere_in_nan(given):
    x = given.from_normal(np.linspace(-8, 8, 401))
    assert np.isfinite(x).all()
    assert (np.diff(x) >= 0).all()
    assert given.from_normal(0.0) == pytest.approx(float(given.quantile(0.5)))


@pytest.mark.parametrize("given", SHAPES, ids=name_of)
def test_standard_uncertainty_is_that_of_its_own_quantiles(given):
    middles = (np.arange(2**18) + 0.5) / 2**18
    x = given.quantile(middles)
    assert np.std(x) == pytest.approx(float(given.standard_uncertainty), rel=2e-3)
    assert np.mean(x) == pytest.approx(MEAN, rel=1e-6)


@pytest.mark.parametrize("width", [-0.1, np.nan, np.inf, np.array([0.1, -1e-9])])
@pytest.mark.parametrize("shape", [Normal, Rectangular, Triangular, UShaped, Lognormal])
def test_refuses_an_uncertainty_that_is_negative_or_no_number(shape, width):
    with pytest.raises(ParameterError, match="width"):
        shape(MEAN, width)


@pytest.mark.parametrize("nu", [2, 1.5, 0, -1, np.nan])
def test_refuses_so_few_degrees_of_freedom_that_there_is_no_variance(nu):
    with pytest.raises(ParameterError, match="degrees_of_freedom"):
        StudentT(MEAN, WIDTH, nu)


def test_refuses_a_blur_beyond_the_width():
    with pytest.raises(ParameterError, match="blur"):
        CurvilinearTrapezoid(MEAN, WIDTH, 1.1)


def test_a_mean_that_is_no_number_gives_none():
    x = Normal(np.array([np.nan, 1.0]), WIDTH).from_normal(1.0)
    assert np.isnan(x[0])
    assert x[1] == pytest.approx(1.3)
    assert np.isnan(Lognormal(np.array([0.0, -1.0, np.nan]), WIDTH).from_normal(0.3)).all()


def test_takes_rows_of_columns_and_leaves_scalars_alone():
    given = StudentT(np.arange(5.0), 0.1, 7)
    some = given.take(np.array([3, 1]))
    assert_allclose(some.mean, [3.0, 1.0])
    assert some.width == 0.1
    assert given.rows == 5
    assert given.take(np.s_[1:3, None]).from_normal(np.zeros(4)).shape == (2, 4)
    assert rows_of([given, Normal(1.0, 0.2)]) == 5


def test_both_parts_of_a_first_order_input_come_together():
    found = as_normal([Input("x", np.ones(2), 0.3, 0.4), Input("y", 2.0)])
    assert_allclose(found["x"].standard_uncertainty, 0.5)
    assert found["y"].exact
