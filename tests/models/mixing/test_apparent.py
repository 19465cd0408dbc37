"""Apparent permittivity and the way back are exact."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from models.mixing.apparent import (
    apparent,
    conduction_loss,
    effective_frequency,
    to_apparent,
    to_real,
)

REAL = np.array([1.0, 4.0, 20.0, 80.0])[:, None]
LOSS = np.array([0.0, 1e-8, 0.5, 20.0, 500.0])


def test_it_is_the_square_of_the_real_part_of_the_root():
    expected = np.sqrt(REAL - 1j * LOSS).real ** 2
    assert_allclose(to_apparent(REAL, LOSS), expected, rtol=1e-13)


def test_it_agrees_with_the_loss_tangent_form():
    tangent = LOSS / REAL
    expected = REAL / 2 * (1 + np.sqrt(1 + tangent**2))
    assert_allclose(to_apparent(REAL, LOSS), expected, rtol=1e-13)


def test_without_loss_it_is_the_real_part():
    assert_array_equal(to_apparent(REAL, 0.0), REAL)
    assert_array_equal(to_real(REAL, 0.0), REAL)


def test_there_and_back_is_the_identity():
    real, loss = np.broadcast_arrays(REAL, LOSS)
    assert_allclose(to_real(to_apparent(real, loss), loss), real, rtol=1e-12, atol=1e-12)
    ka = np.repeat([3.0, 16.0, 40.0], 4)
    loss = ka * np.tile([0.0, 0.3, 1.0, 1.9], 3)
    assert_allclose(to_apparent(to_real(ka, loss), loss), ka, rtol=1e-13)


def test_loss_makes_it_larger():
    assert np.all(np.diff(to_apparent(20.0, np.linspace(0, 100, 50))) > 0)


@pytest.mark.parametrize(
    ("ka", "loss", "expected"),
    [(10.0, 20.0, 0.0), (10.0, 20.001, np.nan), (0.0, 0.0, np.nan), (-3.0, 1.0, np.nan)],
)
def test_too_much_loss_leaves_no_real_part(ka, loss, expected):
    assert_allclose(to_real(ka, loss), expected, atol=1e-12)


def test_both_names_are_one_function():
    assert apparent is to_apparent


def test_conduction_loss():
    """17.975104 for 1 S/m at 1 GHz, with CODATA 2018."""
    assert_allclose(conduction_loss(1.0, 1e9), 17.97510358, rtol=1e-9)
    assert_allclose(conduction_loss([0.05, 0.1], 1e8), [8.98755179, 17.97510358], rtol=1e-9)


@pytest.mark.parametrize(
    ("rise_time", "expected"), [(350e-12, 999e6), (1e-9, 350e6), (3e-9, 117e6)]
)
def test_effective_frequency_of_a_rise(rise_time, expected):
    assert_allclose(effective_frequency(rise_time), expected, atol=0.5e6)


def test_effective_frequency_is_that_of_a_single_pole():
    """A pole at f rises from 10 to 90 % in the time its exponential says."""
    frequency = 400e6
    start, end = (-np.log(1 - share) / (2 * np.pi * frequency) for share in (0.1, 0.9))
    assert_allclose(effective_frequency(end - start), frequency, rtol=1e-12)


def test_no_rise_has_no_frequency():
    assert np.all(np.isnan(effective_frequency([0.0, -1e-9, np.nan])))


def test_nan_in_nan_out_and_no_warning():
    odd = np.array([0.0, -1.0, 1e300, np.inf, -np.inf, np.nan])
    effective_frequency(odd)
    for function in (to_apparent, to_real, conduction_loss):
        assert np.isnan(function(np.nan, 1.0))
        assert np.isnan(function(1.0, np.nan))
        assert function(odd[:, None], odd).shape == (6, 6)
