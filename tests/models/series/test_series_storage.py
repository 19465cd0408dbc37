"""Water stored over a depth: worked examples of two rules, and laws."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from models.errors import ParameterError, UnknownName
from models.series import STORAGE_RULES, Profile, layers_of, store_water

DEPTH = np.array([0.10, 0.20, 0.40, 0.60, 1.00])
THETA = np.array([0.18, 0.22, 0.26, 0.28, 0.30])


def mm(metres):
    return 1000 * metres


def test_the_layer_rule_of_the_worked_profile():
    """Layers of 150 150 200 300 0 mm, 196.000 mm; computed apart from this package."""
    found = store_water(Profile(DEPTH, THETA, 0.02, 0.0), to_depth=0.80)
    assert_allclose(mm(found.thickness), [150, 150, 200, 300, 0], atol=1e-9)
    assert_allclose(mm(found.value), 196.000, atol=5e-4)
    assert found.rule == "layer"


def test_the_trapezoid_of_the_worked_profile():
    """197.000 mm, computed apart from this package."""
    found = store_water(Profile(DEPTH, THETA, 0.02, 0.0), to_depth=0.80, rule="trapezoid")
    assert_allclose(mm(found.value), 197.000, atol=5e-4)


def test_sensors_calibrated_apart_and_together():
    """sqrt(sum (w u)^2) = 8.3666 mm and sum w u = 16.000 mm, computed apart."""
    apart = store_water(Profile(DEPTH, THETA, 0.02, 0.0), to_depth=0.80)
    together = store_water(Profile(DEPTH, THETA, 0.02, 0.02), to_depth=0.80)
    assert_allclose(mm(apart.standard_uncertainty), 8.3666, atol=5e-5)
    assert_allclose(mm(together.standard_uncertainty), 16.000, atol=5e-4)
    assert_allclose(mm(apart.shared), 0.0)
    assert_allclose(mm(together.shared), 16.000, atol=5e-4)
    assert_allclose(mm(together.upper - together.value), 1.959964 * 16, rtol=1e-5)


def test_two_calibrations_share_within_themselves():
    sources = np.array([0, 0, 1, 1, 1])
    found = store_water(Profile(DEPTH, THETA, 0.02, 0.02, sources), to_depth=0.80)
    assert_allclose(mm(found.standard_uncertainty), 0.02 * np.hypot(300, 500))


@pytest.mark.parametrize("rule", STORAGE_RULES)
@pytest.mark.parametrize("to_depth", [0.05, 0.1, 0.33, 0.6, 0.8, 1.0, 1.7])
def test_an_even_profile_stores_its_content_times_the_depth_reached(rule, to_depth):
    found = store_water(Profile(DEPTH, np.full(5, 0.25), 0.02, 0.01), to_depth=to_depth, rule=rule)
    assert_allclose(found.value, 0.25 * min(to_depth, 1.0))
    assert found.reached == min(to_depth, 1.0)
    assert_allclose(found.thickness.sum(), found.reached)
    assert found.coverage_fraction == min(to_depth, 1.0) / to_depth


@pytest.mark.parametrize("to_depth", [0.05, 0.15, 0.47, 0.8, 1.0, 2.0])
def test_the_trapezoid_is_the_integral_of_the_lines(to_depth):
    """Oracle: a fine grid."""
    z = np.linspace(0, min(to_depth, 1.0), 400_001)
    expected = np.trapezoid(np.interp(z, DEPTH, THETA), z)
    found = store_water(Profile(DEPTH, THETA, 0.0, 0.0), to_depth=to_depth, rule="trapezoid")
    assert_allclose(found.value, expected, rtol=1e-8)


@pytest.mark.parametrize("rule", STORAGE_RULES)
def test_the_order_of_the_sensors_does_not_matter_to_the_last_digit(rule):
    order = np.array([3, 0, 4, 2, 1])
    u = np.array([0.02, 0.03, 0.01, 0.02, 0.05])
    one = store_water(Profile(DEPTH, THETA, u, 0.01), to_depth=0.9, rule=rule)
    other = store_water(Profile(DEPTH[order], THETA[order], u[order], 0.01),
                        to_depth=0.9, rule=rule)  # fmt: skip
    for name in ("value", "standard_uncertainty", "lower", "depth", "thickness", "by_sensor"):
        assert_array_equal(getattr(one, name), getattr(other, name))


@pytest.mark.parametrize("rule", STORAGE_RULES)
def test_the_uncertainty_is_that_of_the_full_covariance_matrix(rule):
    u, shared = np.array([0.02, 0.03, 0.025, 0.02, 0.04]), np.array([0.01, 0.03, 0.02, 0, 0.01])
    weights = layers_of(DEPTH, to_depth=0.95, rule=rule)
    covariance = np.outer(shared, shared) + np.diag(u**2 - shared**2)
    found = store_water(Profile(DEPTH, THETA, u, shared), to_depth=0.95, rule=rule)
    assert_allclose(found.standard_uncertainty, np.sqrt(weights @ covariance @ weights))


def test_profiles_of_several_times_are_reckoned_at_once():
    content = np.stack([THETA, THETA + 0.01, THETA])
    found = store_water(Profile(DEPTH, content, 0.02, 0.02), to_depth=0.80)
    assert_allclose(mm(found.value), [196, 204, 196])
    assert found.by_sensor.shape == (3, 5)
    assert_allclose(found.by_sensor.sum(axis=1), found.value)


def test_a_sensor_without_a_number_leaves_no_sum_for_that_time_only():
    content = np.stack([THETA, THETA])
    content[0, 2] = np.nan
    u = np.where(np.isnan(content), np.nan, 0.02)
    found = store_water(Profile(DEPTH, content, u, u), to_depth=0.80)
    for column in (found.value, found.standard_uncertainty, found.lower, found.upper):
        assert np.isnan(column).tolist() == [True, False]


def test_a_sensor_below_the_depth_asked_for_need_not_have_a_number():
    content = np.append(THETA[:4], np.nan)
    found = store_water(Profile(DEPTH, content, 0.02, 0.02), to_depth=0.80)
    assert_allclose(mm(found.value), 196)


def test_nothing_is_stored_below_the_deepest_sensor():
    found = store_water(Profile([0.1, 0.3], [0.2, 0.2], 0.0, 0.0), to_depth=0.6)
    assert_allclose([found.value[0], found.coverage_fraction], [0.06, 0.5])


def test_one_sensor_stands_for_the_soil_above_it():
    for rule in STORAGE_RULES:
        found = store_water(Profile([0.3], [0.2], 0.02, 0.0), to_depth=0.2, rule=rule)
        assert_allclose(found.value, 0.04)


def test_a_sensor_at_the_surface_is_taken():
    assert_allclose(layers_of([0.0, 0.2], to_depth=0.2), [0.1, 0.1])
    assert_allclose(layers_of([0.0, 0.2], to_depth=0.2, rule="trapezoid"), [0.1, 0.1])


def test_the_band_stays_between_no_water_and_full_pores():
    wet = store_water(Profile([0.5], [0.45], 0.05, 0.05), to_depth=0.5, high=0.46)
    dry = store_water(Profile([0.5], [0.01], 0.05, 0.05), to_depth=0.5)
    assert wet.upper[0] <= 0.46 * 0.5
    assert dry.lower[0] == 0.0


@pytest.mark.parametrize(("depth", "to_depth", "said"), [
    ([0.1, 0.1], 0.5, "one depth"), ([-0.1, 0.1], 0.5, "at least 0"),
    ([0.1, np.nan], 0.5, "at least 0"), ([0.1, 0.2], 0.0, "to_depth above 0"),
    ([0.1, 0.2], np.inf, "to_depth"), ([], 0.5, "depth of each"),
])  # fmt: skip
def test_refuses_depths_that_make_no_profile(depth, to_depth, said):
    with pytest.raises(ParameterError, match=said):
        store_water(Profile(depth, np.full(len(depth), 0.2), 0.02, 0.0), to_depth=to_depth)


def test_refuses_contents_that_do_not_fit_and_rules_that_are_none():
    with pytest.raises(ParameterError, match="one for each of 5 sensors"):
        store_water(Profile(DEPTH, THETA[:3], 0.02, 0.0), to_depth=0.8)
    with pytest.raises(UnknownName, match="layer, trapezoid"):
        store_water(Profile(DEPTH, THETA, 0.02, 0.0), to_depth=0.8, rule="spline")
