"""Available water, depletion and stress: published examples, ends, and bands that hold."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.decisions import RootZone, deplete
from models.decisions import allen_1998 as fao
from models.errors import ParameterError
from tests.published import table

MM = 1e-3
MM_A_DAY = 1e-3 / 86_400


def zone(**more):
    return RootZone(**{"water_content": 0.24, "field_capacity": 0.32, "wilting_point": 0.12,
                       "root_depth": 0.8, "depletion_fraction": 0.4, **more})  # fmt: skip


def test_available_water_of_fao_56_example_36():
    printed = table("fao_56_example_36")
    given = {name: printed[name].values for name in
             ("field_capacity", "wilting_point", "root_depth", "depletion_fraction")}  # fmt: skip
    found = deplete(RootZone(water_content=0.1, **given))
    for name, answer in (("total", found.total_available_water),
                         ("readily", found.readily_available_water)):  # fmt: skip
        apart = np.abs(answer.value / MM - printed[name].values)
        assert np.all(apart <= printed[name].tolerance + 1e-9)


def test_ten_dry_days_of_fao_56_example_37():
    printed = table("fao_56_example_37")
    total = fao.total_available_water(0.32, 0.12, 0.8)
    assert_allclose([total, fao.readily_available_water(total, 0.4)], [0.160, 0.064])
    depleted = 0.055
    for stress, after in zip(printed["stress"].values, printed["depletion"].values, strict=True):
        factor = np.clip(fao.stress_coefficient(depleted, total, 0.4), 0.0, 1.0)
        depleted = fao.next_depletion(depleted, factor * 0.006)
        assert_allclose(factor, stress, atol=0.005)
        assert_allclose(depleted / MM, after, atol=0.06)


def test_salt_and_water_together_of_fao_56_example_38():
    printed = table("fao_56_example_38")
    water = np.clip(fao.stress_coefficient(printed["depletion"].values, 110, 0.4), 0, 1)
    salt = fao.salt_stress_coefficient(0.15, threshold=0.10, slope=1.9, response=1.15)
    assert_allclose(water, printed["without_salt"].values, atol=0.005)
    # the last row is printed as the product of rounded factors, 0.76 x 0.92
    assert_allclose(water * salt, printed["with_salt"].values, atol=0.00501)


def test_depletion_from_a_measured_water_content():
    """FAO-56, Eq. 87: 0.15 - 0.11 over 0.7 m is 28 mm."""
    found = deplete(
        zone(water_content=0.11, field_capacity=0.15, wilting_point=0.06, root_depth=0.7)
    )
    assert_allclose(found.depletion.value, 28 * MM)


@pytest.mark.parametrize(("tabulated", "rate", "expected"), [
    (0.50, 5, 0.50), (0.50, 8, 0.38), (0.55, 3, 0.63), (0.55, 7, 0.47), (0.55, 9, 0.39),
    (0.7, 0, 0.8), (0.2, 9, 0.1),
])  # fmt: skip
def test_the_depletion_fraction_follows_the_evapotranspiration(tabulated, rate, expected):
    assert_allclose(fao.depletion_fraction(tabulated, rate * MM_A_DAY), expected)


def test_the_gross_depth_holds_leaching_and_losses():
    """59 mm, leaching requirement 0.10, efficiency 0.75: 87.407 mm, computed apart."""
    found = deplete(zone(water_content=0.32 - 0.059 / 0.8, efficiency=0.75,
                         leaching_requirement=0.10))  # fmt: skip
    assert_allclose(found.depletion.value / MM, 59)
    assert_allclose(found.gross_refill.value / MM, 87.407, atol=5e-4)


def test_above_field_capacity_nothing_is_missing_and_that_is_said():
    found = deplete(zone(water_content=np.array([0.35, 0.30, 0.10])))
    assert found.above_field_capacity.tolist() == [True, False, False]
    assert found.below_wilting_point.tolist() == [False, False, True]
    assert_allclose(found.depletion.value, [0.0, 0.016, 0.160])
    assert_allclose(found.stress_coefficient.value, [1.0, 1.0, 0.0])


def test_uncertainty_of_the_available_water():
    """sqrt(2) 0.02 over 0.8 m: 22.6 mm, computed apart."""
    found = deplete(zone(field_capacity=(0.32, 0.02), wilting_point=(0.12, 0.02)))
    assert_allclose(found.total_available_water.standard_uncertainty / MM, 22.6, atol=0.05)


def test_days_until_the_readily_available_water_is_used():
    """64 mm - 40 mm at 6 mm a day."""
    found = deplete(zone(water_content=0.27, crop_evapotranspiration=6 * MM_A_DAY))
    assert_allclose(found.time_left.value / 86_400, 4.0)
    assert deplete(zone()).time_left is None


def test_the_probability_of_exceedance_knows_that_field_capacity_is_in_both():
    """Oracle: draws of every input."""
    rng = np.random.default_rng(3)
    n = 400_000
    theta, fc, wp, p = (
        rng.normal(mean, u, n)
        for mean, u in ((0.25, 0.015), (0.32, 0.02), (0.12, 0.02), (0.4, 0.04))
    )
    expected = np.mean((fc - theta) * 0.8 > p * (fc - wp) * 0.8)
    found = deplete(zone(water_content=(0.25, 0.015), field_capacity=(0.32, 0.02),
                         wilting_point=(0.12, 0.02), depletion_fraction=(0.4, 0.04)))  # fmt: skip
    assert_allclose(found.exceedance, expected, atol=0.01)
    assert not found.told_apart[0]


def test_a_sure_answer_is_told_apart():
    found = deplete(zone(water_content=(np.array([0.31, 0.15]), 0.005)))
    assert_allclose(found.exceedance, [0.0, 1.0], atol=1e-6)
    assert found.told_apart.all()


def test_exact_inputs_give_exact_answers():
    found = deplete(zone())
    assert found.depletion.standard_uncertainty[0] == 0.0
    assert found.depletion.lower[0] == found.depletion.upper[0] == found.depletion.value[0]
    assert found.exceedance[0] == 0.5  # 64 mm of 64 mm


@pytest.mark.parametrize("theta", [0.15, 0.25, 0.31, 0.33])
def test_the_band_of_the_depletion_holds_the_truth(theta):
    rng = np.random.default_rng(9)
    n, u, u_fc = 40_000, 0.02, 0.015
    truth = np.clip((0.32 - theta) * 0.8, 0.0, 0.160)
    found = deplete(zone(water_content=(rng.normal(theta, u, n), u),
                         field_capacity=(rng.normal(0.32, u_fc, n), u_fc)))  # fmt: skip
    inside = (found.depletion.lower <= truth + 1e-12) & (truth - 1e-12 <= found.depletion.upper)
    assert 0.94 < inside.mean() <= 1.0


@pytest.mark.parametrize("theta", [0.06, 0.12, 0.15, 0.25, 0.33])
def test_the_band_of_the_depletion_holds_the_truth_where_limits_are_wide(theta):
    """Depletion is at most the available water, and that is uncertain as well."""
    rng = np.random.default_rng(10)
    n, u = 40_000, 0.02
    truth = np.clip(min(0.32 - theta, 0.20) * 0.8, 0.0, None)
    found = deplete(zone(water_content=(rng.normal(theta, u, n), u),
                         field_capacity=(rng.normal(0.32, u, n), u),
                         wilting_point=(rng.normal(0.12, u, n), u))).depletion  # fmt: skip
    inside = (found.lower <= truth + 1e-12) & (truth - 1e-12 <= found.upper)
    assert 0.94 < inside.mean() <= 1.0
    assert np.all((found.lower <= found.value) & (found.value <= found.upper))
    assert np.all(found.standard_uncertainty > 0.0) or theta > 0.3


def test_what_is_applied_ends_at_the_limit_of_the_system():
    found = deplete(zone(water_content=(np.array([0.12, 0.28]), 0.01), application_limit=0.04))
    assert_allclose(found.application.value, [0.04, 0.032])
    assert_allclose(found.application.upper, [0.04, 0.04])
    assert found.application.standard_uncertainty[0] == 0.0
    assert_allclose(found.gross_refill.value, [0.16, 0.032])


def test_no_water_content_gives_no_number():
    found = deplete(zone(water_content=(np.array([np.nan, 0.2]), 0.02)))
    assert np.isnan(found.depletion.value).tolist() == [True, False]
    assert np.isnan(found.depletion.upper).tolist() == [True, False]
    assert np.isnan(found.exceedance).tolist() == [True, False]


@pytest.mark.parametrize(("name", "value"), [
    ("field_capacity", 0.10), ("root_depth", 0.0), ("depletion_fraction", 1.0), ("efficiency", 0.0),
    ("efficiency", 1.1), ("leaching_requirement", 1.0), ("crop_evapotranspiration", 0.0),
])  # fmt: skip
def test_refuses_a_root_zone_that_cannot_be(name, value):
    with pytest.raises(ParameterError, match=name):
        deplete(zone(**{name: value}))
