"""Several outputs and correlated inputs: against a general-purpose library, and by their laws."""

import numpy as np
import pytest
import uncertainties
from numpy.testing import assert_allclose
from uncertainties import umath

from models.errors import ParameterError
from models.uncertainty.correlation import covariance_from
from models.uncertainty.distributions import Normal
from models.uncertainty.draws import Draws
from models.uncertainty.joint import propagate_jointly
from models.uncertainty.monte_carlo import simulate_jointly

MEASURANDS = [
    lambda m, x, y, z: (m.sqrt(x) - (1 - y) * m.sqrt(z) - y, x / (y + z)),
    lambda m, x, y, z: (m.exp(-y) * x + m.log(z), x * y * z, x**3 - z**2),
    lambda m, x, y, z: (m.sin(x) * m.cos(y) / z, m.atan(x / z)),
    lambda m, x, y, z: ((x - y) / (x + 2 * y) * z, x**y, m.log(x * z)),
]


def random_inputs(rng, size):
    """Values, and a covariance whose standard uncertainties are 0.001 to 5 % of them."""
    values = rng.uniform(1.0, 4.0, 3)
    u = values * 10 ** rng.uniform(-5, np.log10(size), 3)
    root = rng.standard_normal((3, 3))
    spread = root @ root.T
    scale = np.sqrt(np.diag(spread))
    return values, covariance_from(u, spread / np.outer(scale, scale))


@pytest.mark.parametrize("measurand", range(len(MEASURANDS)))
@pytest.mark.parametrize("correlated", [True, False])
def test_agrees_with_the_uncertainties_library(measurand, correlated):
    """Oracle: the `uncertainties` package, linear propagation with exact derivatives."""
    function = MEASURANDS[measurand]
    rng = np.random.default_rng(measurand)
    for _ in range(20):
        values, covariance = random_inputs(rng, 0.05)
        if not correlated:
            covariance = np.diag(np.diag(covariance))
        known = uncertainties.correlated_values(values, covariance)
        expected = np.array(uncertainties.covariance_matrix(function(umath, *known)))
        at = dict(zip("xyz", values, strict=True))
        found = propagate_jointly(lambda **x: function(NumpyNames, **x), at, covariance)
        u = np.sqrt(np.diag(expected))
        assert_allclose(found.standard_uncertainty[0], u, rtol=1e-9)
        assert_allclose(found.covariance[0], expected, rtol=0, atol=1e-9 * np.outer(u, u).max())
        assert_allclose(found.covariance[0] / np.outer(u, u), expected / np.outer(u, u), atol=2e-9)


class NumpyNames:
    """The functions of `umath` under their names, for arrays."""

    sqrt, exp, log, sin, cos, atan = np.sqrt, np.exp, np.log, np.sin, np.cos, np.arctan


def test_every_row_has_its_own_covariance():
    rng = np.random.default_rng(7)
    drawn = [random_inputs(rng, 0.05) for _ in range(6)]
    values = np.array([v for v, _ in drawn])
    covariances = np.array([c for _, c in drawn])

    def outputs(x, y, z):
        return x * y, y - z

    at = dict(zip("xyz", values.T, strict=True))
    together = propagate_jointly(outputs, at, covariances)
    assert together.covariance.shape == (6, 2, 2)
    for row, (one, covariance) in enumerate(drawn):
        alone = propagate_jointly(outputs, dict(zip("xyz", one, strict=True)), covariance)
        assert_allclose(together.covariance[row], alone.covariance[0], rtol=1e-12)


def test_a_difference_of_fully_correlated_inputs_is_exact():
    covariance = covariance_from([0.3, 0.3], np.ones((2, 2)))
    found = propagate_jointly(lambda x, y: x - y, {"x": 5.0, "y": 3.0}, covariance)
    assert_allclose(found.standard_uncertainty, 0.0, atol=1e-12)


def test_complex_column_is_two_outputs():
    """A known rotation turns the covariance of two parts as a matrix does."""
    turn = np.exp(0.7j)
    covariance = np.array([[4.0, 1.0], [1.0, 9.0]]) * 1e-4
    found = propagate_jointly(
        lambda re, im: (re + 1j * im) * turn, {"re": 0.3, "im": -0.2}, covariance
    )
    matrix = np.array([[turn.real, -turn.imag], [turn.imag, turn.real]])
    assert_allclose(found.covariance[0], matrix @ covariance @ matrix.T, rtol=1e-9)


def test_exact_inputs_bring_nothing_and_no_number_stays_none():
    covariance = np.diag([0.01, 0.0])
    found = propagate_jointly(
        lambda x, y: x * y, {"x": np.array([2.0, np.nan]), "y": 3.0}, covariance
    )
    assert_allclose(found.covariance[0, 0, 0], 0.09, rtol=1e-9)
    assert np.isnan(found.value[1]).all()
    assert np.isnan(found.covariance[1]).all()


def test_refuses_a_covariance_of_nothing():
    with pytest.raises(ParameterError, match="eigenvalue"):
        propagate_jointly(lambda x, y: x + y, {"x": 1.0, "y": 1.0}, [[1.0, 2.0], [2.0, 1.0]])


def test_draws_agree_for_outputs_that_are_nearly_linear():
    matrix = np.array([[1.0, 0.6], [0.6, 1.0]])
    x, y = np.array([2.0, 3.0, 4.0]), np.array([1.0, 1.5, 0.5])

    def outputs(x, y):
        return x * y, np.log(x) - y

    first = propagate_jointly(outputs, {"x": x, "y": y}, covariance_from([0.01, 0.02], matrix))
    drawn = simulate_jointly(
        outputs,
        {"x": Normal(x, 0.01), "y": Normal(y, 0.02)},
        correlation=matrix,
        draws=Draws(2**14),
    )
    assert_allclose(drawn.covariance, first.covariance, rtol=5e-3)
    assert_allclose(drawn.value, first.value, atol=3e-4)
