"""POST /v1/leaching against printed examples and numbers computed apart."""

import numpy as np
import pytest

from tests.published import table
from tests.service.decisions.asking import ask, codes


def field(server, more, **whole):
    """The answer about one field."""
    return ask(server, "leaching", {"fields": more, **whole})["fields"]


@pytest.mark.parametrize(
    ("target", "printed", "exact"), [(1.7, 0.16, 0.164384), (2.5, 0.10, 0.106195)]
)
def test_the_requirement_of_maize(server, target, printed, exact):
    """FAO-29 (1985), Example 2, from memory; the second is printed cut to 0.10."""
    found = field(server, {"water_conductivity": 1.2, "target_extract_conductivity": target,
                           "evapotranspiration": 800})  # fmt: skip
    assert found["leaching_requirement"] == pytest.approx(printed, abs=0.007)
    assert found["leaching_requirement"] == pytest.approx(exact, abs=5e-7)
    assert found["applied_water"] == pytest.approx(800 / (1 - exact), rel=1e-6)


def test_the_target_is_that_of_90_percent_and_with_saline_water_of_all(server):
    """FAO-29 (1985), Table 4: maize 1.7 and 2.5 dS/m; the rule from a secondary copy."""
    crop = {"crop": "maize-grain"}
    mild = field(server, {"water_conductivity": 1.5, **crop})["used"]
    saline = field(server, {"water_conductivity": 1.6, **crop})["used"]
    half = field(server, {"water_conductivity": 1.6, "target_yield": 0.5, **crop})["used"]
    assert mild["target_extract_conductivity"] == pytest.approx(2.5, abs=0.05)
    assert saline["target_extract_conductivity"] == pytest.approx(1.7)
    assert half["target_extract_conductivity"] == pytest.approx(5.9, abs=0.05)
    assert "yield of 0.9" in mild["sources"]["target_extract_conductivity"]


def test_the_high_frequency_method_aims_at_no_yield(server):
    """Tomato, water of 1 dS/m: 0.0384615 with 13 dS/m at no yield, computed apart."""
    tomato = {"water_conductivity": 1.0, "crop": "tomato"}
    found = field(server, tomato, method="high-frequency")
    assert found["used"]["target_extract_conductivity"] == pytest.approx(12.6, abs=0.01)
    found = field(server, tomato | {"target_extract_conductivity": 13}, method="high-frequency")
    assert found["leaching_requirement"] == pytest.approx(0.0384615, abs=5e-8)


@pytest.mark.parametrize("conductivity", [5.0, 7.5, 9.0])
def test_water_too_saline_for_the_target_has_no_number(server, conductivity):
    """Half of 5 x 1.5 - EC or less: 3.75 dS/m is where the share is 1."""
    found = field(server, {"water_conductivity": conductivity, "evapotranspiration": 500,
                           "target_extract_conductivity": 1.5})  # fmt: skip
    for name in ("leaching_requirement", "leaching_requirement_upper", "applied_water",
                 "mean_extract_conductivity"):  # fmt: skip
        assert found[name] is None
    assert found["flags"] == ["water-too-saline"]


def test_salt_down_the_root_zone(server):
    """FAO-29 (1985), section 2.4, from memory, to a digit; computed apart to five."""
    found = field(server, {"water_conductivity": 1.0, "leaching_fraction": 0.15})
    nodes = found["root_zone_profile"]["soil_water_conductivity"]
    assert nodes == pytest.approx([1.0, 1.5, 2.5, 4.2, 6.7], abs=0.06)
    assert nodes == pytest.approx([1.0, 1.51515, 2.46914, 4.25532, 6.66667], abs=5e-6)
    assert found["mean_extract_conductivity"] == pytest.approx(1.59063, abs=5e-6)
    assert "leaching_requirement" not in found


def test_the_concentration_factor_is_that_of_table_3(server):
    """FAO-29 (1985), Table 3, from memory."""
    printed = table("fao_29_table_3")
    fields = [{"water_conductivity": 2.0, "leaching_fraction": share}
              for share in printed["leaching_fraction"].values]  # fmt: skip
    found = ask(server, "leaching", {"fields": fields})["fields"]
    told = np.array([row["concentration_factor"] for row in found])
    assert np.all(np.abs(told - printed["factor"].values) <= 0.055)


def test_without_a_fraction_the_profile_is_that_of_the_requirement(server):
    asked = {"water_conductivity": 1.0, "water_conductivity_u": 0.1,
             "target_extract_conductivity": 2.5}  # fmt: skip
    found = field(server, asked)
    share = found["leaching_requirement"]
    own = field(server, asked | {"leaching_fraction": share})
    nodes = ("root_zone_profile", "soil_water_conductivity")
    assert found[nodes[0]][nodes[1]] == pytest.approx(own[nodes[0]][nodes[1]])
    assert nodes[1] + "_u" in found[nodes[0]]


def test_the_line_of_threshold_and_slope(server):
    """Course notes on ASCE Manual 71, read there: threshold 4, slope 20 % per dS/m."""
    printed = table("maas_hoffman_line")
    line = {"salt_threshold": 4, "salt_slope": 0.2}
    fields = [line | {"saturation_extract_conductivity": c}
              for c in printed["conductivity"].values.tolist()]  # fmt: skip
    found = ask(server, "leaching", {"fields": fields})["fields"]
    told = [row["relative_yield"] for row in found]
    assert told == pytest.approx(printed["relative_yield"].values.tolist())


@pytest.mark.parametrize(("crop", "half"), [("wheat", 12.6337), ("maize-grain", 5.54427),
                                            ("bean", 3.33600), ("barley", 17.5320),
                                            ("tomato", 7.20790)])  # fmt: skip
def test_the_curve_gives_half_the_yield_where_it_should(server, crop, half):
    """Steppuhn and others (2005), equation from the abstract; computed apart."""
    found = field(server, {"saturation_extract_conductivity": half, "crop": crop})
    assert found["curved_yield"] == pytest.approx(0.5, abs=5e-6)


def test_a_yield_has_a_band_from_what_the_tables_leave_open(server):
    """Tomato at 3.51 dS/m: 0.9; threshold 2.5 to 17 %, slope to 10 %, in quadrature."""
    found = field(server, {"saturation_extract_conductivity": 3.51, "crop": "tomato"})
    u = np.hypot(0.099 * 0.17 * 2.5, 0.1 * 0.099 * 1.01)
    assert found["relative_yield"] == pytest.approx(0.9, abs=1e-4)
    assert found["relative_yield_lower"] == pytest.approx(0.9 - 1.96 * u, abs=1e-3)
    assert found["curved_yield_lower"] < found["curved_yield"] < found["curved_yield_upper"]


@pytest.mark.parametrize(
    ("conductivity", "scheme", "name"),
    [(1.99, "handbook-60", "non-saline"), (2.0, "handbook-60", "slightly saline"),
     (8.0, "handbook-60", "strongly saline"), (16.5, "handbook-60", "very strongly saline"),
     (0.7, "fao-2006", "not salty"), (0.75, "fao-2006", "slightly salty"),
     (8.0, "fao-2006", "very strongly salty")],
)  # fmt: skip
def test_a_class_holds_its_lower_edge_and_names_its_scheme(server, conductivity, scheme, name):
    """Edges from secondary copies: 2, 4, 8, 16 and 0.75, 2, 4, 8, 15 dS/m."""
    extract = "saturation_extract_conductivity"
    asked = {extract: conductivity, f"{extract}_u": 0.5}
    found = field(server, asked, salinity_scheme=scheme)
    told = found["salinity_class"]
    assert (told["scheme"], told["class"]) == (scheme, name)
    assert sum(one["probability"] for one in told["classes"]) == pytest.approx(1.0)


def test_a_class_comes_with_the_probability_of_each(server):
    """3.5 to 0.25 dS/m: two standard uncertainties below 4; normal tables."""
    found = field(server, {"saturation_extract_conductivity": 3.5,
                           "saturation_extract_conductivity_u": 0.25})  # fmt: skip
    shares = [one["probability"] for one in found["salinity_class"]["classes"]]
    assert shares == pytest.approx([0.0, 0.97725, 0.02275, 0.0, 0.0], abs=5e-6)


@pytest.mark.parametrize(
    ("conductivity", "name"), [(0.69, "none"), (0.7, "slight to moderate"), (3.0, "severe")]
)
def test_the_class_of_a_water(server, conductivity, name):
    """FAO-29 (1985), Table 1, from a secondary copy: 0.7 and 3.0 dS/m."""
    found = field(server, {"water_conductivity": conductivity, "leaching_fraction": 0.2})
    assert (found["water_class"]["scheme"], found["water_class"]["class"]) == ("fao-29", name)


def test_low_salinity_is_never_called_good(server):
    """FAO-29 (1985), Table 1: water below 0.7 dS/m may not enter a sodic soil."""
    low = ask(server, "leaching", {"fields": {"water_conductivity": 0.3, "crop": "tomato"}})
    high = ask(server, "leaching", {"fields": {"water_conductivity": 1.3, "crop": "tomato"}})
    assert "low-salinity" in codes(low)
    assert "low-salinity" not in codes(high)


def test_rice_under_water_is_another_conductivity(server):
    asked = {"saturation_extract_conductivity": 4.0, "crop": "rice"}
    assert "submerged-rice" in codes(ask(server, "leaching", {"fields": asked}))


def test_a_slope_in_percent_is_named_by_its_unit(server):
    asked = {"saturation_extract_conductivity": 5.0, "salt_threshold": 4, "salt_slope": 20}
    found = field(server, asked, units={"salt_slope": "%/(dS/m)"})
    assert found["relative_yield"] == pytest.approx(0.8)
    in_other = asked | {"saturation_extract_conductivity": 500}
    units = {"salt_slope": "%/(dS/m)", "saturation_extract_conductivity": "mS/m"}
    found = field(server, in_other, units=units)
    assert found["relative_yield"] == pytest.approx(0.8)
    assert found["salinity_class"]["classes"][0]["below"] == 200.0
