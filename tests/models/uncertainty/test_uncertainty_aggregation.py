"""Means and sums of estimates: what averages out, and what does not."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.errors import ParameterError
from models.uncertainty.aggregation import weighted_mean, weighted_sum

CONTENT = [0.18, 0.22, 0.26, 0.28, 0.30]
LAYERS = [150.0, 150.0, 200.0, 300.0, 0.0]
"""mm that each sensor stands for, to a depth of 0.8 m."""


def test_stored_water_of_sensors_calibrated_apart():
    """sqrt(sum of (w u)^2), computed apart from this package."""
    found = weighted_sum(CONTENT, 0.02, 0.0, weights=LAYERS)
    assert_allclose(found.value, 196.0, atol=5e-4)
    assert_allclose(found.standard_uncertainty, 8.3666, atol=5e-5)
    assert_allclose(found.shared, 0.0)


def test_stored_water_of_sensors_with_one_calibration():
    """Sum of w u."""
    found = weighted_sum(CONTENT, 0.02, 0.02, weights=LAYERS)
    assert_allclose(found.standard_uncertainty, 16.000, atol=5e-4)
    assert_allclose(found.shared, 16.000, atol=5e-4)


def test_both_parts_add_as_squares():
    """Oracle: w' C w with the full covariance matrix of the five estimates."""
    u, shared = np.array([0.02, 0.03, 0.025, 0.02, 0.04]), np.array([0.01, 0.03, 0.02, 0.0, 0.01])
    covariance = np.outer(shared, shared) + np.diag(u**2 - shared**2)
    weights = np.array(LAYERS) + 10.0
    found = weighted_sum(CONTENT, u, shared, weights=weights)
    assert_allclose(found.standard_uncertainty, np.sqrt(weights @ covariance @ weights))


def test_two_calibrations_share_less_than_one():
    sources = np.array([0, 0, 1, 1, 1])
    found = weighted_sum(CONTENT, 0.02, 0.02, weights=LAYERS, sources=sources)
    assert_allclose(found.standard_uncertainty, 0.02 * np.hypot(300.0, 500.0))


def test_a_missing_layer_leaves_no_sum():
    found = weighted_sum([0.2, np.nan, 0.3], [0.02, np.nan, 0.02], [0.0, np.nan, 0.0])
    assert np.isnan([found.value[0], found.standard_uncertainty[0]]).all()


def test_the_shared_part_of_a_mean_does_not_shrink():
    n = 288
    found = weighted_mean(np.full(n, 0.25), np.hypot(0.01, 0.02), 0.02)
    assert_allclose(found.value, 0.25)
    assert_allclose(found.shared, 0.02)
    assert_allclose(found.standard_uncertainty, np.hypot(0.02, 0.01 / np.sqrt(n)))


def test_means_by_group_leave_out_what_is_no_number_and_say_how_many_there_were():
    value = [0.1, np.nan, 0.3, 0.4, np.nan]
    found = weighted_mean(value, 0.02, 0.01, groups=np.array([0, 0, 0, 1, 2]))
    assert_allclose(found.value, [0.2, 0.4, np.nan])
    assert list(found.count) == [2, 1, 0]
    own = np.sqrt(3e-4)
    assert_allclose(found.standard_uncertainty[:2], [np.sqrt(own**2 / 2 + 1e-4), 0.02])
    assert np.isnan(found.standard_uncertainty[2])


def test_a_mean_over_time_is_weighted_by_the_time_each_reading_stands_for():
    """Hours 0 1 2 3 9 10, by the trapezoid rule through the gap: 0.25550, computed apart."""
    hours = np.array([0.0, 1, 2, 3, 9, 10])
    content = np.array([0.30, 0.30, 0.29, 0.29, 0.20, 0.20])
    gaps = np.diff(hours)
    stands_for = 0.5 * (np.append(gaps, 0) + np.insert(gaps, 0, 0))
    assert_allclose(weighted_mean(content, 0.02, 0.0, weights=stands_for).value, 0.25550, atol=5e-6)
    assert_allclose(weighted_mean(content, 0.02, 0.0).value, 0.26333, atol=5e-6)


def test_a_sum_of_daily_means_is_the_mean_of_all():
    rng = np.random.default_rng(2)
    value, u = rng.uniform(0.1, 0.4, 30), rng.uniform(0.02, 0.03, 30)
    days = np.repeat(np.arange(3), 10)
    daily = weighted_mean(value, u, 0.015, groups=days)
    found = weighted_mean(daily.value, daily.standard_uncertainty, daily.shared)
    whole = weighted_mean(value, u, 0.015)
    assert_allclose(found.value, whole.value)
    assert_allclose(found.standard_uncertainty, whole.standard_uncertainty)


@pytest.mark.parametrize("shared", [0.03, -0.01])
def test_refuses_a_part_that_exceeds_the_whole(shared):
    with pytest.raises(ParameterError, match="part"):
        weighted_sum(CONTENT, 0.02, shared)


@pytest.mark.parametrize("groups", [[0, 1], [0, 1, -1, 0, 0], [0.0, 1.0, 0.0, 0.0, 1.0]])
def test_refuses_labels_that_do_not_fit(groups):
    with pytest.raises(ParameterError, match="labels"):
        weighted_sum(CONTENT, 0.02, 0.0, groups=np.array(groups))
