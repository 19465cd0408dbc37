"""First-order propagation: against a general-purpose library, and by its own laws."""

import numpy as np
import pytest
import uncertainties
from numpy.testing import assert_allclose
from uncertainties import umath

from models.uncertainty.first_order import Input, propagate

X, Y, Z = 17.2, 0.46, 4.7
UX, UY, UZ = 0.3e-4, 0.02e-4, 0.6e-4  # small, so that half-differences are the derivative


def measurand(x, y, z):
    return (np.sqrt(x) - (1 - y) * np.sqrt(z) - y) / 7.9 + y * np.exp(-z)


def test_agrees_with_the_uncertainties_library_on_a_smooth_measurand():
    """Oracle: the `uncertainties` package, linear propagation with exact derivatives."""
    x, y, z = (uncertainties.ufloat(*pair) for pair in ((X, UX), (Y, UY), (Z, UZ)))
    expected = (umath.sqrt(x) - (1 - y) * umath.sqrt(z) - y) / 7.9 + y * umath.exp(-z)
    inputs = [Input("x", np.array([X]), UX), Input("y", Y, 0.0, UY), Input("z", Z, 0.0, UZ)]
    found = propagate(measurand, inputs, measurand(np.array([X]), Y, Z))
    assert_allclose(np.sqrt(found.per_reading + found.shared), expected.std_dev, rtol=1e-9)


def test_splits_the_variance_by_who_shares_the_error():
    value = np.array([3.0, 4.0])
    given = [Input("x", value, 0.3, 0.4)]
    found = propagate(lambda x: 2.0 * x, given, 2.0 * value)
    assert_allclose(found.per_reading, 4 * 0.09)
    assert_allclose(found.shared, 4 * 0.16)


def test_exact_inputs_cost_nothing_and_bring_nothing():
    def fails(x):
        raise AssertionError(f"evaluated at {x}")

    found = propagate(fails, [Input("x", np.ones(3))], np.ones(3))
    assert not found.shared.any()
    assert not found.per_reading.any()
    assert not found.contributions


@pytest.mark.parametrize("x", [0.0, 1.0])
def test_uses_the_side_that_is_inside_the_domain(x):
    """arcsin ends at 1; 0 is inside on both sides."""

    def domain(x):
        with np.errstate(invalid="ignore"):
            return np.arcsin(x)

    value = np.array([x])
    found = propagate(domain, [Input("x", value, 0.01)], domain(value))
    assert np.isfinite(found.per_reading).all()
    assert (found.per_reading > 0).all()


def test_rows_do_not_know_of_their_neighbours():
    values = np.linspace(3, 30, 7)

    def root(x):
        return np.sqrt(x)

    together = propagate(root, [Input("x", values, 0.3)], root(values))
    for row in range(values.size):
        one = values[row : row + 1]
        alone = propagate(root, [Input("x", one, 0.3)], root(one))
        assert together.per_reading[row] == alone.per_reading[0]
