"""Yield, leaching and crops: published examples and tables, ends, bands."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.stats import norm

from models.decisions import CROPS, applied_water, leaching, relative_yield, require_leaching
from models.decisions import yield_response as response
from models.decisions.outcome import exceedance, within
from tests.published import table

DS_M = 0.1


def test_the_line_of_threshold_and_slope():
    printed = table("maas_hoffman_line")
    found = relative_yield(DS_M * printed["conductivity"].values, threshold=0.4, slope=2.0)
    assert_allclose(found.value, printed["relative_yield"].values, atol=1e-12)


@pytest.mark.parametrize(
    ("column", "share"), [("at_100", 1), ("at_90", 0.9), ("at_75", 0.75), ("at_50", 0.5)]
)
def test_conductivities_at_shares_of_the_yield(column, share):
    printed = table("fao_29_table_4")
    a, b = printed["threshold"].values * DS_M, printed["slope"].values / 100 / DS_M
    found = response.conductivity_at(share, a, b) / DS_M
    assert np.all(np.abs(found - printed[column].values) <= printed[column].tolerance + 1e-9)
    assert_allclose(relative_yield(found * DS_M, threshold=a, slope=b).value, share)


def test_the_crops_hold_what_the_table_prints():
    printed = table("fao_29_table_4")
    names = ("barley", "cotton", "sorghum", "wheat", "bermuda-grass", "soybean", "rice", "tomato",
             "cucumber", "alfalfa", "maize-grain", "potato", "sugarcane", "orange", "pepper-sweet",
             "bean", "zucchini")  # fmt: skip
    assert [CROPS[name].threshold_ds_m for name in names] == printed["threshold"].values.tolist()
    assert [CROPS[name].slope_percent for name in names] == printed["slope"].values.tolist()


@pytest.mark.parametrize("crop", CROPS.values(), ids=lambda crop: crop.key)
def test_every_crop_is_whole(crop):
    assert (crop.threshold is None) == (crop.slope is None)
    assert (crop.root_depth is None) == (crop.readily_available is None)
    assert crop.threshold is not None or crop.root_depth is not None
    if crop.root_depth is not None:
        assert 0 < crop.root_depth[0] < crop.root_depth[1] <= 2
        assert 0.2 <= crop.depletion_fraction <= 0.65
    assert set(crop.from_memory) <= {"root_depth", "depletion_fraction", "slope_percent"}


def test_the_yield_of_a_crop_has_a_band_from_what_the_tables_leave_open():
    """Tomato at 3.51 dS/m: 90 %; threshold 2.5 to 17 %, slope 9.9 % per dS/m to 10 %."""
    tomato = CROPS["tomato"]
    found = relative_yield(0.351, threshold=tomato.threshold, slope=tomato.slope)
    assert_allclose(found.value, 0.9, atol=1e-4)
    u = np.hypot(0.099 * 0.17 * 2.5, 0.1 * 0.099 * 1.01)
    assert_allclose(found.value - found.lower, 1.96 * u, rtol=1e-3)


def test_the_smooth_curve_from_threshold_and_slope():
    printed = table("steppuhn_2005")
    half, steepness = response.curve_parameters(
        printed["threshold"].values * DS_M, printed["slope"].values / DS_M
    )
    apart = np.abs(half / DS_M - printed["half"].values)
    assert np.all(apart <= 1.01 * printed["half"].tolerance)
    assert_allclose(steepness * DS_M, printed["steepness"].values, atol=5e-6)
    assert_allclose(response.curved_yield(half, half, steepness), 0.5)
    c = np.linspace(0, 3, 50)[:, np.newaxis]
    assert np.all(np.diff(response.curved_yield(c, half, steepness), axis=0) < 0)


def test_a_yield_far_below_the_threshold_is_whole_and_sure():
    found = relative_yield((np.array([0.05, 0.4]), 0.02), threshold=0.4, slope=2.0)
    assert found.value[0] == found.lower[0] == found.upper[0] == 1.0
    assert found.standard_uncertainty[0] < 1e-12
    assert 0 < found.lower[1] < found.upper[1] == 1.0


@pytest.mark.parametrize("true", [0.2, 0.38, 0.42, 0.6, 0.88, 0.95])
def test_the_band_of_the_yield_holds_the_truth(true):
    rng = np.random.default_rng(5)
    n = 40_000
    truth = np.clip(1 - 2.0 * (true - 0.4), 0, 1)
    found = relative_yield((rng.normal(true, 0.05, n), 0.05),
                           threshold=(rng.normal(0.4, 0.03, n), 0.03), slope=2.0)  # fmt: skip
    inside = (found.lower <= truth + 1e-12) & (truth - 1e-12 <= found.upper)
    assert 0.94 < inside.mean() <= 1.0


@pytest.mark.parametrize(
    ("value", "u"), [(0.5, 0.1), (0.98, 0.1), (1.3, 0.2), (-0.05, 0.3), (0.4, 2)]
)
def test_the_uncertainty_of_what_has_ends_is_that_of_draws(value, u):
    draws = np.clip(norm(value, u).ppf((np.arange(200_000) + 0.5) / 200_000), 0, 1)
    found = within(np.array([value]), np.array([u]), low=0.0, high=1.0)
    expected = np.sqrt(np.mean((draws - np.clip(value, 0, 1)) ** 2))
    assert_allclose(found.standard_uncertainty, expected, rtol=1e-3, atol=1e-6)
    assert_allclose([found.lower[0], found.upper[0]], np.quantile(draws, [0.025, 0.975]), atol=1e-3)


def test_without_ends_the_uncertainty_is_its_own():
    found = within(np.array([2.0, np.nan]), np.array([0.3, 0.1]))
    assert_allclose(found.standard_uncertainty[0], 0.3)
    assert np.isnan([found.value[1], found.lower[1], found.standard_uncertainty[1]]).all()


def test_exceedance_of_a_limit():
    """Limit 0.35, u 0.015: computed apart."""
    theta = np.array([0.33, 0.34, 0.35, 0.36, 0.37])
    found = exceedance(theta - 0.35, np.full(5, 0.015))
    assert_allclose(found, [0.09121, 0.25249, 0.5, 0.74751, 0.90879], atol=5e-6)
    assert exceedance(np.array([-1.0, 0.0, 1.0]), np.zeros(3)).tolist() == [0.0, 0.5, 1.0]


def test_the_leaching_requirement_of_maize():
    """FAO-29 rev. 1, Example 2 (from memory): 0.16 at 1.7 dS/m, 0.10 (0.106 unrounded) at 2.5."""
    found = require_leaching(0.12, np.array([0.17, 0.25])).requirement
    assert_allclose(found.value, [0.164384, 0.106195], atol=5e-7)
    assert_allclose(found.value[0], 0.16, atol=0.005)
    applied = applied_water(0.8, np.array([0.10, 0.106195]))
    assert_allclose(applied.value, [0.888889, 0.89505], atol=5e-6)


def test_bookkeeping_of_manual_71():
    """100 mm used, leaching requirement 0.2: 125 mm applied, 25 mm drained."""
    assert_allclose(applied_water(0.100, 0.2).value, 0.125)


def test_two_methods_give_two_answers():
    """Tomato with water of 3 dS/m by equation 9: 0.31579; frequent, 1 dS/m: 0.0384615; apart."""
    assert_allclose(leaching.requirement(0.3, 0.25), 0.31579, atol=5e-6)
    found = leaching.requirement(0.1, 1.3, method=leaching.FREQUENT)
    assert_allclose(found, 0.0384615, atol=5e-8)


def test_water_too_saline_for_the_target_has_no_requirement():
    found = require_leaching(np.array([0.9, 0.5, 0.49, np.nan]), 0.1)
    assert found.too_saline.tolist() == [True, True, True, False]
    assert np.isnan(found.requirement.value).all()
    assert not require_leaching(0.2, 0.1).too_saline[0]


def test_salt_down_the_root_zone():
    """40-30-20-10, leaching fraction 0.15: computed apart, and printed to a digit less."""
    profile = leaching.root_zone_profile(1.0, 0.15)
    assert_allclose(profile, [1.0, 1.51515, 2.46914, 4.25532, 6.66667], atol=5e-6)
    assert_allclose(profile.mean(), 3.18125, atol=5e-6)
    assert_allclose(profile, [1.0, 1.5, 2.5, 4.2, 6.7], atol=0.06)


def test_without_leaching_salt_at_the_bottom_has_no_end():
    profile = leaching.root_zone_profile(np.array([1.0, 0.0]), 0.0)
    assert np.isinf(profile[0, -1])
    assert np.isnan(profile[1, -1])


def test_the_concentration_factor():
    printed = table("fao_29_table_3")
    found = leaching.concentration_factor(printed["leaching_fraction"].values)
    assert_allclose(found, printed["factor"].values, atol=0.055)
    exact = [3.249, 2.053, 1.591, 1.331, 1.161, 1.039, 0.871, 0.761, 0.681, 0.620, 0.572]
    assert_allclose(found, exact, atol=1e-3)
