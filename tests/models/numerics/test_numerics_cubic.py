"""Cubics that rise everywhere have one inverse, and it is closed."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from models.numerics.cubic import IncreasingCubic
from models.numerics.power import power, root, square


@settings(max_examples=200, deadline=None)
@given(
    constant=st.floats(-10, 10),
    inflection=st.floats(-50, 50),
    least_slope=st.floats(1e-3, 1e2),
    cubic=st.floats(1e-6, 1e2),
    x=st.floats(-100, 100),
)
def test_there_and_back_is_the_identity(constant, inflection, least_slope, cubic, x):
    quadratic = -3 * cubic * inflection
    curve = IncreasingCubic(constant, least_slope + 3 * cubic * inflection**2, quadratic, cubic)
    slope = least_slope + 3 * cubic * (x - inflection) ** 2
    size = max(abs(constant), cubic * (abs(x) + abs(inflection)) ** 3, least_slope * abs(x), 1e-300)
    assert abs(curve.inverse(curve(x)) - x) <= 1e-14 * (size / slope + abs(x) + abs(inflection))


def test_agrees_with_the_roots_of_the_polynomial():
    curve = IncreasingCubic(-5.3e-2, 2.92e-2, -5.5e-4, 4.3e-6)
    for value in (-1.0, 0.0, 0.3, 2.0):
        roots = np.roots([curve.cubic, curve.quadratic, curve.linear, curve.constant - value])
        real = roots[np.abs(roots.imag) < 1e-9].real
        assert curve.inverse(value) == pytest.approx(real[0], rel=1e-10)
        assert len(real) == 1


def test_known_cubic_is_solved():
    assert_allclose(IncreasingCubic(0, 1, 0, 1).inverse([-10, 0, 2, 30]), [-2, 0, 1, 3], atol=1e-15)


@pytest.mark.parametrize(
    "coefficients", [(0, 1, 0, 0), (0, 1, 0, -1), (0, 1, 2, 1), (0, 0, 0, 1), (0, -1, 0, 1)]
)
def test_cubic_with_more_than_one_inverse_is_refused(coefficients):
    with pytest.raises(ValueError, match="does not increase everywhere"):
        IncreasingCubic(*coefficients)


def test_cubic_is_written_as_people_write_it():
    assert IncreasingCubic(-0.5, 2, -0.25, 1).written("x") == "-0.5 + 2 x - 0.25 x^2 + 1 x^3"


def test_no_number_in_no_number_out_and_the_shape_is_kept():
    curve = IncreasingCubic(0, 1, 0, 1)
    assert np.isnan(curve(np.nan))
    assert np.isnan(curve.inverse(np.nan))
    assert curve.inverse(np.zeros((2, 3))).shape == (2, 3)


def test_powers_are_no_number_below_zero():
    values = [-1.0, 0.0, 4.0, np.nan]
    assert_allclose(root(values), [np.nan, 0.0, 2.0, np.nan])
    assert_allclose(square(values), [np.nan, 0.0, 16.0, np.nan])
    assert_allclose(power(values, 1.5), [np.nan, 0.0, 8.0, np.nan])
