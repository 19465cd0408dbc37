"""Newton's method in a bracket: finds every root of increasing functions, row by row."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from models.numerics.newton import increasing_root

FUNCTIONS = {
    "cube": (lambda x: x**3, lambda x: 3 * x**2),
    "exponential": (np.exp, np.exp),
    "arctangent": (np.arctan, lambda x: 1 / (1 + x * x)),
    "steep then flat": (lambda x: np.tanh(20 * x), lambda x: 20 / np.cosh(20 * x) ** 2),
}


@pytest.mark.parametrize("name", FUNCTIONS)
@given(root=st.floats(-3, 3))
def test_finds_the_root_whatever_the_curvature(name, root):
    function, slope = FUNCTIONS[name]
    target = function(np.array([root]))
    found = increasing_root(
        lambda x, rows: (function(x) - target[rows], slope(x)), np.array([-4.0]), np.array([4.0])
    )
    assert_allclose(function(found), target, rtol=1e-12, atol=1e-14)


def test_a_row_does_not_know_of_its_neighbours():
    targets = np.linspace(0.1, 8.0, 41)

    def roots(wanted):
        return increasing_root(
            lambda x, rows: (x**3 - wanted[rows], 3 * x**2),
            np.zeros(wanted.size),
            np.full(wanted.size, 2.0),
        )

    together = roots(targets)
    assert_allclose(together**3, targets, rtol=1e-14)
    for row in range(0, 41, 5):
        assert roots(targets[row : row + 1])[0] == together[row]


def test_nan_in_nan_out_and_the_others_are_found():
    wanted = np.array([1.0, np.nan, 4.0])
    found = increasing_root(
        lambda x, rows: (x * x - wanted[rows], 2 * x), np.zeros(3), np.full(3, 3.0)
    )
    assert_allclose(found, [1.0, np.nan, 2.0])
