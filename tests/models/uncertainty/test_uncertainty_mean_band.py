"""Bands of means from the bands of readings: arm by arm, shared error shared."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from models.uncertainty.aggregation import mean_band, weighted_mean

RNG = np.random.default_rng(20260504)


def readings(n):
    """Values in a lopsided band of their own, and uncertainties of which some is shared."""
    value = RNG.uniform(0.05, 0.45, n)
    lower, upper = value * RNG.uniform(0.0, 1.0, n), value + RNG.uniform(0.0, 0.3, n)
    u = RNG.uniform(0.001, 0.1, n)
    return (lower, upper), value, u, u * RNG.uniform(0.0, 1.0, n)


def test_the_mean_of_one_has_the_band_of_that_one():
    ends, value, u, shared = readings(200)
    lower, upper = mean_band(ends, value, u, shared, groups=np.arange(200))
    assert_array_equal(lower, np.maximum(lower, ends[0]))
    assert_allclose(lower, ends[0], rtol=0, atol=1e-15)
    assert_allclose(upper, ends[1], rtol=0, atol=1e-15)


@pytest.mark.parametrize("sources", [None, np.arange(300) % 3])
def test_no_end_leaves_the_range_of_the_readings(sources):
    ends, value, u, shared = readings(300)
    groups = np.arange(300) // 10
    lower, upper = mean_band(ends, value, u, shared, groups=groups, sources=sources)
    for group in range(30):
        own = groups == group
        assert ends[0][own].min() <= lower[group] <= value[own].mean()
        assert value[own].mean() <= upper[group] <= ends[1][own].max()


def test_arms_by_hand():
    """Shared arms average, own ones shrink: 0.03 and 0.04 make an arm of 0.05, f = 0.6."""
    value, arm = np.full(4, 0.30), 0.05
    ends = (value - arm, value + 2 * arm)
    lower, upper = mean_band(ends, value, 0.02, 0.6 * 0.02)
    expected = np.sqrt(0.03**2 + 4 * 0.04**2 / 4**2)
    assert_allclose(0.30 - lower, expected, rtol=1e-12)
    assert_allclose(upper - 0.30, 2 * expected, rtol=1e-12)


def test_with_arms_of_k_u_the_band_is_k_times_the_uncertainty_of_the_mean():
    _, value, u, shared = readings(50)
    lower, upper = mean_band((value - 1.96 * u, value + 1.96 * u), value, u, shared)
    mean = weighted_mean(value, u, shared)
    assert_allclose(mean.value - lower, 1.96 * mean.standard_uncertainty, rtol=1e-9)
    assert_allclose(upper - mean.value, 1.96 * mean.standard_uncertainty, rtol=1e-9)


def test_an_empty_upper_end_makes_that_of_the_mean_empty_and_no_other():
    value = np.array([0.3, 0.4, 0.5])
    ends = (value - 0.1, np.array([0.4, np.nan, 0.6]))
    lower, upper = mean_band(ends, value, 0.05, 0.04, groups=np.array([0, 0, 1]))
    assert np.isfinite(lower).all()
    assert_array_equal(np.isnan(upper), [True, False])


def test_readings_without_a_number_count_for_nothing():
    value = np.array([np.nan, 0.3])
    lower, upper = mean_band((value - 0.1, value + 0.2), value, 0.05, 0.04)
    assert_allclose([lower[0], upper[0]], [0.2, 0.5])
