"""A change of unit leaves the decimal number that was meant."""

import numpy as np
import pytest
from numpy.testing import assert_array_equal

from models.numerics.digits import without_rounding


@pytest.mark.parametrize(
    ("left", "offset", "meant"),
    [
        (285.1 - 273.15, 273.15, 11.95),
        (0.0238 / 0.1, 0.0, 0.238),
        (273.15 - 273.15, 273.15, 0.0),
        (1.1 * 3, 0.0, 3.3),
        (-0.1 * 3, 0.0, -0.3),
    ],
)
def test_what_binary_arithmetic_left_behind_is_gone(left, offset, meant):
    assert float(without_rounding(left, offset)) == meant


def test_what_has_no_digits_to_lose_stays():
    values = np.array([np.nan, np.inf, 1e300, 1e-30, 0.0, 1.0e9])
    assert_array_equal(without_rounding(values), values)


def test_numbers_of_a_logger_are_left_alone():
    values = np.random.default_rng(1).integers(0, 10**9, 1000) / 1e6
    assert_array_equal(without_rounding(values, 273.15), values)
