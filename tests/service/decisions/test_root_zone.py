"""POST /v1/root-zone against printed examples and sums done apart."""

import numpy as np
import pytest

from tests.published import table
from tests.service.decisions.asking import ask, changed, codes

LIMITS = {"field_capacity": 0.32, "wilting_point": 0.12, "root_depth": 0.8,
          "depletion_fraction": 0.4}  # fmt: skip
DEPTHS, CONTENTS = (0.10, 0.20, 0.40, 0.60, 1.00), (0.18, 0.22, 0.26, 0.28, 0.30)
PROFILE = [{"depth": z, "water_content": theta, "water_content_u": 0.02}
           for z, theta in zip(DEPTHS, CONTENTS, strict=True)]  # fmt: skip
MEAN = {"root_zones": {"water_content": 0.24, "water_content_u": 0.015, **LIMITS}}


def zone(server, more=None, **whole):
    """The answer about one root zone."""
    answer = ask(server, "root-zone", {"root_zones": {**LIMITS, **(more or {})}, **whole})
    return answer["root_zones"]


def test_available_water_is_that_of_fao_56_example_36(server):
    printed = table("fao_56_example_36")
    names = ("field_capacity", "wilting_point", "root_depth", "depletion_fraction")
    rows = zip(*(printed[name].values.tolist() for name in names), strict=True)
    zones = [dict(zip(names, row, strict=True)) | {"water_content": 0.1} for row in rows]
    found = ask(server, "root-zone", {"root_zones": zones})["root_zones"]
    for name, column in (
        ("total_available_water", "total"),
        ("readily_available_water", "readily"),
    ):
        told = np.array([row[name] for row in found])
        assert np.all(np.abs(told - printed[column].values) <= printed[column].tolerance + 1e-9)


def test_depletion_of_a_measured_water_content_is_that_of_equation_87(server):
    """FAO-56 (1998), Eq. 87, from a secondary copy: 28 mm."""
    found = zone(server, {"water_content": 0.11, "field_capacity": 0.15, "wilting_point": 0.06,
                          "root_depth": 0.7})  # fmt: skip
    assert found["depletion"] == pytest.approx(28)


@pytest.mark.parametrize(("rule", "storage"), [("layer", 196.0), ("trapezoid", 197.0)])
def test_storage_by_two_rules(server, rule, storage):
    """Computed apart: 196.000 mm by layers, 197.000 mm by straight lines."""
    found = zone(server, {"profile": PROFILE}, rule=rule)
    assert found["storage"] == pytest.approx(storage, abs=1e-9)
    assert found["water_content"] == pytest.approx(storage / 800)
    assert sum(found["profile"]["storage"]) == pytest.approx(storage)


def test_an_uncertainty_is_shared_by_the_sensors_unless_it_is_said_not_to_be(server):
    """u 0.02 each, computed apart: 16.000 mm shared, 8.3666 mm independent."""
    assert zone(server, {"profile": PROFILE})["storage_u"] == pytest.approx(16.0)
    apart = [sensor | {"water_content_u_shared": 0.0} for sensor in PROFILE]
    assert zone(server, {"profile": apart})["storage_u"] == pytest.approx(8.3666, abs=5e-5)
    body = {"root_zones": {**LIMITS, "profile": PROFILE}}
    assert "shared-by-default" in codes(ask(server, "root-zone", body))
    body["root_zones"]["profile"] = apart
    assert "shared-by-default" not in codes(ask(server, "root-zone", body))


def test_the_gross_depth_holds_leaching_and_losses(server):
    """59 mm, leaching requirement 0.10, efficiency 0.75: 87.407 mm, computed apart."""
    wet = {"water_content": 0.32 - 0.059 / 0.8, "leaching_requirement": 0.10}
    for system in ({"efficiency": 0.75}, {"irrigation": "sprinkler"}):
        found = zone(server, wet | system)
        assert found["depletion"] == pytest.approx(59)
        assert found["gross_refill"] == pytest.approx(87.407, abs=5e-4)
        assert "application" not in found
    found = zone(server, wet | system | {"application_limit": 30})
    assert found["application"] == found["application_upper"] == 30
    assert found["gross_refill"] == pytest.approx(87.407, abs=5e-4)
    assert "above-application-limit" in found["flags"]


def test_without_an_efficiency_there_is_no_gross_depth(server):
    found = zone(server, {"water_content": 0.2})
    assert found["gross_refill"] is None
    assert found["flags"] == ["efficiency-missing"]


@pytest.mark.parametrize(("rate", "fraction"), [(3, 0.63), (5, 0.55), (7, 0.47), (9, 0.39)])
def test_the_fraction_of_a_crop_follows_its_evapotranspiration(server, rate, fraction):
    """FAO-56 (1998), Table 22, footnote, with p 0.55 of grain maize; computed apart."""
    body = {"water_content": 0.25, "field_capacity": 0.32, "wilting_point": 0.12,
            "crop": "maize-grain", "crop_evapotranspiration": rate}  # fmt: skip
    used = ask(server, "root-zone", {"root_zones": body})["root_zones"]["used"]
    assert used["depletion_fraction"] == pytest.approx(fraction)
    assert used["root_depth"] == 1.0
    assert "maize-grain" in used["sources"]["root_depth"]


def test_a_fraction_that_is_given_stays(server):
    """FAO-56 (1998), Example 37: p 0.40 at 6 mm a day; 64 mm less 40 mm last four days."""
    found = zone(server, {"water_content": 0.27, "crop": "tomato", "crop_evapotranspiration": 6})
    assert found["readily_available_water"] == pytest.approx(64)
    assert found["days_left"] == pytest.approx(4)


def test_defaults_of_a_texture_are_said_three_times_and_wide(server):
    """FAO-56 (1998), Table 19, from a secondary copy: loam 0.20 to 0.30 and 0.07 to 0.17."""
    body = {"water_content": 0.2, "water_content_u": 0.01, "texture": "Loam", "root_depth": 0.8,
            "depletion_fraction": 0.5}  # fmt: skip
    answer = ask(server, "root-zone", {"root_zones": body})
    found = answer["root_zones"]
    assert found["used"]["field_capacity"] == pytest.approx(0.25)
    assert found["used"]["wilting_point"] == pytest.approx(0.12)
    assert found["total_available_water_u"] == pytest.approx(800 * 0.1 / 6**0.5, rel=1e-3)
    assert "texture-default-limits" in found["flags"]
    assert "limits-by-texture" in codes(answer)
    assert "Table 19" in found["used"]["sources"]["wilting_point"]


@pytest.mark.parametrize(
    ("content", "probability", "told"),
    [(0.25, 0.99865, "above"), (0.27, 0.84134, "cannot be told apart"),
     (0.29, 0.15866, "cannot be told apart"), (0.30, 0.02275, "below")],
)  # fmt: skip
def test_depletion_is_compared_and_not_judged(server, content, probability, told):
    """RAW is 0.04 x 0.8 m; the excess is 3, 1, -1 and -2 standard uncertainties: normal tables."""
    found = zone(server, {"water_content": content, "water_content_u": 0.01,
                          "depletion_fraction": 0.2})  # fmt: skip
    assert found["exceedance_probability"] == pytest.approx(probability, abs=5e-6)
    assert found["compared"] == told
    assert found["distinguishable"] == (told != "cannot be told apart")


def test_beyond_both_limits_there_is_a_flag(server):
    zones = [{**LIMITS, "water_content": 0.35}, {**LIMITS, "water_content": 0.1}]
    found = ask(server, "root-zone", {"root_zones": zones})["root_zones"]
    assert [row["depletion"] for row in found] == pytest.approx([0.0, 160.0])
    assert "above-field-capacity" in found[0]["flags"]
    assert "below-wilting-point" in found[1]["flags"]


def test_sensors_that_end_above_the_roots_give_no_depletion_unless_asked(server):
    """Layers of 0.15, 0.15, 0.20 and 0.10 m: 27 + 33 + 52 + 28 mm; 0.20 m more of 0.28: 56 mm."""
    body = {"profile": PROFILE[:4]}
    found = zone(server, body)
    assert found["storage"] == pytest.approx(140.0)
    assert found["profile"]["reached_depth"] == 0.6
    assert found["profile"]["coverage_fraction"] == pytest.approx(0.75)
    assert found["depletion"] is found["compared"] is found["water_content"] is None
    assert "sensors-end-above-root-depth" in found["flags"]
    found = zone(server, body, assume={"below_sensors": "as-deepest"})
    assert found["storage"] == pytest.approx(196.0)
    assert found["depletion"] == pytest.approx(0.32 * 800 - 196.0)
    assert "extended-below-sensors" in found["flags"]


def test_frozen_sensors_and_gaps_give_no_number(server):
    frozen = zone(server, changed({"profile": PROFILE}, ("profile", 0, "temperature"), -0.5))
    assert "frozen-root-zone" in frozen["flags"]
    empty = {"depth": 0.4, "water_content": None}
    gap = zone(server, {"profile": [*PROFILE[:2], empty, *PROFILE[3:]]})
    assert "no-water-content" in gap["flags"]
    for found in (frozen, gap):
        assert found["storage"] is found["depletion"] is found["storage_upper"] is None
    deeper = zone(server, changed({"profile": PROFILE}, ("profile", 4, "temperature"), -0.5))
    assert deeper["storage"] == pytest.approx(196.0)  # below the roots: it does not count


def test_more_water_than_pores_gives_no_number(server):
    """0.47 to 0.01 is three standard uncertainties above pores of 0.44, 0.45 is one."""
    for content, flagged in ((0.47, True), (0.45, False)):
        wet = {"water_content": content, "water_content_u": 0.01}
        for body in (wet, {"profile": [{"depth": 0.8, **wet}]}):
            found = zone(server, {**body, "porosity": 0.44})
            assert ("root-zone-above-pores" in found["flags"]) == flagged
            assert (found["storage"] is None) == flagged


SALTY = {"profile": [
    {"depth": 0.1, "water_content": 0.25, "pore_water_conductivity": 3},
    {"depth": 0.3, "water_content": 0.30, "pore_water_conductivity": 5},
    {"depth": 0.7, "water_content": 0.28, "pore_water_conductivity": 7},
], "root_depth": 1.0}  # fmt: skip


def test_salt_of_three_layers(server):
    """Layers of 0.2, 0.3 and 0.5 m, computed apart: 1.0112 kg/m2, 280.0 mm, 5.64286 dS/m."""
    below = {"below_sensors": "as-deepest"}
    found = zone(server, SALTY, assume=below)
    assert found["salt_storage"] == pytest.approx(1.0112)
    assert found["profile"]["salt_storage"] == pytest.approx([0.096, 0.288, 0.6272])
    assert found["storage"] == pytest.approx(280.0)
    assert found["pore_water_conductivity"] == pytest.approx(5.64286, abs=5e-6)
    assert found["salt_storage_u"] == pytest.approx(1.0112 * 0.2 / 3**0.5)
    answer = ask(server, "root-zone", {"root_zones": {**LIMITS, **SALTY}, "assume": below,
                                       "units": {"salt_storage": "t/har"}})  # fmt: skip
    assert answer["root_zones"]["salt_storage"] == pytest.approx(10.112)
    assert answer["units"]["salt_storage"] == "t/har"
    assert {"salt-by-conductivity", "salinity-limits"} <= codes(answer)


def test_salt_with_a_gap_is_no_number(server):
    body = changed(SALTY, ("profile", 1, "pore_water_conductivity"), None)
    found = zone(server, body, assume={"below_sensors": "as-deepest"})
    assert found["salt_storage"] is None
    assert "no-pore-water-conductivity" in found["flags"]
    assert found["storage"] == pytest.approx(280.0)


def test_units_of_the_caller_go_in_and_come_out(server):
    metres = zone(server, {"water_content": 0.24, "crop_evapotranspiration": 6})
    body = {"root_zones": {**LIMITS, "water_content": 24, "root_depth": 80,
                           "crop_evapotranspiration": 6},
            "units": {"water_content": "%", "root_depth": "cm", "depletion": "cm",
                      "days_left": "h"}}  # fmt: skip
    answer = ask(server, "root-zone", body)
    found = answer["root_zones"]
    assert found["depletion"] == pytest.approx(metres["depletion"] / 10)
    assert found["days_left"] == pytest.approx(metres["days_left"] * 24)
    assert found["used"]["root_depth"] == pytest.approx(80)
    assert (answer["units"]["depletion"], answer["units"]["storage"]) == ("cm", "mm")


def test_what_was_used_gives_the_same_numbers_again(server):
    body = {"water_content": 0.2, "water_content_u": 0.01, "texture": "loam", "crop": "tomato",
            "crop_evapotranspiration": 7, "irrigation": "drip"}  # fmt: skip
    found = zone(server, body)
    used = {name: value for name, value in found["used"].items() if name != "sources"}
    again = zone(server, used)
    for name, value in found.items():
        if isinstance(value, float):
            assert again[name] == pytest.approx(value, rel=1e-12)
