"""Wrong bodies of every decision: an error that names the field and how to mend it."""

import pytest

from tests.service.decisions.asking import changed
from tests.service.estimates.test_estimates_bad_input import told

ZONE = {"root_zones": [{"profile": [{"depth": 0.2, "water_content": 0.2, "water_content_u": 0.02}],
                        "field_capacity": 0.32, "wilting_point": 0.12, "root_depth": 0.2,
                        "depletion_fraction": 0.4}]}  # fmt: skip
FIELD = {"fields": {"water_conductivity": 1.2, "crop": "maize-grain", "evapotranspiration": 800}}
SOIL = {"soils": [{"water_content": 0.24, "bulk_density": 1.6}]}
PLACE = {"coefficients": {"a": 1.0, "b": 8.5},
         "mould": {"apparent_permittivity": 14.7, "total_density": 1.995},
         "places": [{"apparent_permittivity": 13.5}]}  # fmt: skip
ONE = {"method": "one-step", "coefficients": {"a": 1.0, "b": 8.5, "c": 0.1, "d": 1.2},
       "places": [{"apparent_permittivity": 13.5, "standard_conductivity": 0.2}]}  # fmt: skip


def check(server, path, body, sentence, pointer):
    sentences, places = told(server.client.post(f"/v1/{path}", json=body), 422)
    assert sentence in sentences
    assert f"#{pointer}" in places


Z = ("root_zones", 0)
S = (*Z, "profile", 0)


@pytest.mark.parametrize(
    ("place", "value", "sentence", "pointer"),
    [
        ((*S, "water_content"), 20, "looks like %; send 0.2",
         "/root_zones/0/profile/0/water_content"),
        ((*S, "depth"), 20000, "looks like cm; send 200", "/root_zones/0/profile/0/depth"),
        ((*S, "depth"), -0.1, "at least 0", "/root_zones/0/profile"),
        ((*S, "depth"), None, "depth is missing", "/root_zones/0/profile/0/depth"),
        ((*S, "water_content_u_shared"), 0.03, "at most 0.02, found 0.03",
         "/root_zones/0/profile/0/water_content_u_shared"),
        ((*S, "watercontent"), 0.2, "did you mean water_content?",
         "/root_zones/0/profile/0/watercontent"),
        ((*S, "water_content"), "wet", 'a number, found "wet"',
         "/root_zones/0/profile/0/water_content"),
        ((*S, "temperature"), 285, "looks like K; send 11.85",
         "/root_zones/0/profile/0/temperature"),
        ((*Z, "profile"), [], "at least 1 items", "/root_zones/0/profile"),
        ((*Z, "profile"), None, "a mean water_content, found neither",
         "/root_zones/0/water_content"),
        ((*Z, "water_content"), 0.2, "a mean water_content, found both",
         "/root_zones/0/water_content"),
        ((*Z, "field_capacity"), 32, "looks like %; send 0.32", "/root_zones/0/field_capacity"),
        ((*Z, "field_capacity"), 0.1, "above wilting_point, found 0.1",
         "/root_zones/0/field_capacity"),
        ((*Z, "wilting_point"), None, "give wilting_point, or a texture",
         "/root_zones/0/wilting_point"),
        ((*Z, "root_depth"), 20, "looks like cm; send 0.2", "/root_zones/0/root_depth"),
        ((*Z, "root_depth"), 0, "from 0.01 to 10 m", "/root_zones/0/root_depth"),
        ((*Z, "depletion_fraction"), 40, "looks like %; send 0.4",
         "/root_zones/0/depletion_fraction"),
        ((*Z, "depletion_fraction"), None, "such as 0.5, or a crop",
         "/root_zones/0/depletion_fraction"),
        ((*Z, "efficiency"), 75, "looks like %; send 0.75", "/root_zones/0/efficiency"),
        ((*Z, "leaching_requirement"), 1.0, "from 0 to 0.95", "/root_zones/0/leaching_requirement"),
        ((*Z, "crop_evapotranspiration"), -3, "from 0.01 to 25 mm/d",
         "/root_zones/0/crop_evapotranspiration"),
        ((*Z, "crop"), "tomatto", "did you mean tomato?", "/root_zones/0/crop"),
        ((*Z, "texture"), "lome", "did you mean loam?", "/root_zones/0/texture"),
        ((*Z, "irrigation"), "drop", "did you mean drip?", "/root_zones/0/irrigation"),
        ((*Z, "root_depth_u"), -0.1, "at least 0", "/root_zones/0/root_depth_u"),
        (("rule",), "mean", "choose one of layer, trapezoid", "/rule"),
        (("assume", "below_sensors"), True, "expected 'as-deepest', found true",
         "/assume/below_sensors"),
        (("coverage_probability",), 95, "for 95 % send 0.95", "/coverage_probability"),
        (("units",), {"root_depth": "ft"}, "takes m, cm, mm", "/units/root_depth"),
        (("units",), {"rootdepth": "cm"}, "no quantity with a unit", "/units/rootdepth"),
        (("root_zones",), [], "at least 1 items", "/root_zones"),
        (("root_zones",), None, "root_zones is missing", "/root_zones"),
    ],
)  # fmt: skip
def test_a_root_zone_that_cannot_be_used(server, place, value, sentence, pointer):
    check(server, "root-zone", changed(ZONE, place, value), sentence, pointer)


def test_defaults_that_the_tables_do_not_have_are_named(server):
    bare = changed(ZONE, (*Z, "field_capacity"), None)
    peat = changed(bare, (*Z, "texture"), "peat")
    check(server, "root-zone", peat, "no defaults for peat: give field_capacity",
          "/root_zones/0/texture")  # fmt: skip
    body = changed(changed(ZONE, (*Z, "root_depth"), None), (*Z, "crop"), "barley")
    check(server, "root-zone", body, "give root_depth in m", "/root_zones/0/root_depth")
    twice = changed(ZONE, (*Z, "profile"), [{"depth": 0.2, "water_content": 0.2}] * 2)
    check(server, "root-zone", twice, "two sensors are at one depth", "/root_zones/0/profile")


@pytest.mark.parametrize(
    ("place", "value", "sentence", "pointer"),
    [
        (("fields", "water_conductivity"), 1200, "looks like uS/cm; send 1.2",
         "/fields/water_conductivity"),
        (("fields", "water_conductivity"), None, "evapotranspiration needs water_conductivity",
         "/fields/water_conductivity"),
        (("fields", "crop"), None, "give crop, or salt_threshold and salt_slope",
         "/fields/target_extract_conductivity"),
        (("fields", "crop"), "squash", "give salt_threshold and salt_slope", "/fields/crop"),
        (("fields", "crop"), "mais", "no crop is called", "/fields/crop"),
        (("fields", "salt_slope"), 12, "looks like %/(dS/m); send 0.12", "/fields/salt_slope"),
        (("fields", "target_yield"), 90, "looks like %; send 0.9", "/fields/target_yield"),
        (("fields", "leaching_fraction"), 15, "looks like %; send 0.15",
         "/fields/leaching_fraction"),
        (("fields", "evapotranspiration"), 0, "from 0.1 to 5000 mm", "/fields/evapotranspiration"),
        (("fields", "salt_threshold_u"), 0.2, "stands without salt_threshold",
         "/fields/salt_threshold_u"),
        (("method",), "drip", "choose one of conventional, high-frequency", "/method"),
        (("salinity_scheme",), "fao", "no salinity scheme is called", "/salinity_scheme"),
        (("fields",), {}, "found neither", "/fields/water_conductivity"),
        (("fields",), {"water_conductivity": 1.0, "salt_threshold": 2.0},
         "needs salt_slope beside it", "/fields/salt_slope"),
    ],
)  # fmt: skip
def test_a_field_that_cannot_be_used(server, place, value, sentence, pointer):
    check(server, "leaching", changed(FIELD, place, value), sentence, pointer)


def test_a_target_yield_that_has_no_meaning_is_refused(server):
    body = changed(FIELD, ("fields", "target_yield"), 0.9) | {"method": "high-frequency"}
    check(server, "leaching", body, "aims at no yield", "/fields/target_yield")


@pytest.mark.parametrize(
    ("place", "value", "sentence", "pointer"),
    [
        (("soils", 0, "bulk_density"), 1600, "looks like kg/m3; send 1.6", "/soils/0/bulk_density"),
        (("soils", 0, "bulk_density"), None, "bulk_density is missing", "/soils/0/bulk_density"),
        (("soils", 0, "water_content"), 24, "looks like %; send 0.24", "/soils/0/water_content"),
        (("soils", 0, "largest_bulk_density"), 1750, "send 1.75", "/soils/0/largest_bulk_density"),
        (("soils", 0, "dry_density"), 1.6, "unknown key", "/soils/0/dry_density"),
        (("soils", 0, "water_content_u"), 2, "at most 1 m3/m3", "/soils/0/water_content_u"),
        (("soils", 0, "name"), 4, "expected text, found 4", "/soils/0/name"),
    ],
)  # fmt: skip
def test_a_soil_that_cannot_be_used(server, place, value, sentence, pointer):
    check(server, "soil-state", changed(SOIL, place, value), sentence, pointer)


@pytest.mark.parametrize(
    ("body", "place", "value", "sentence", "pointer"),
    [
        (PLACE, ("mould",), None, "two-step needs the mould", "/mould"),
        (PLACE, ("mould", "total_density"), 1995, "send 1.995", "/mould/total_density"),
        (PLACE, ("mould", "temperature"), 293, "looks like K", "/mould/temperature"),
        (PLACE, ("coefficients", "a"), None, "a is missing", "/coefficients/a"),
        (PLACE, ("coefficients", "b"), 0, "greater than 0", "/coefficients/b"),
        (PLACE, ("places", 0, "apparent_permittivity"), 0.5, "from 1 to 200",
         "/places/0/apparent_permittivity"),
        (PLACE, ("soil_kind",), "cohesiv", "did you mean cohesive?", "/soil_kind"),
        (PLACE, ("method",), "three-step", "'two-step'", "/method"),
        (PLACE, ("largest_bulk_density",), 1750, "send 1.75", "/largest_bulk_density"),
        (ONE, ("coefficients", "d"), None, "one-step needs d", "/coefficients/d"),
        (ONE, ("places", 0, "standard_conductivity"), None, "of every place",
         "/places/0/standard_conductivity"),
        (ONE, ("mould",), PLACE["mould"], "a mould is for two-step", "/mould"),
    ],
)  # fmt: skip
def test_a_place_that_cannot_be_used(server, body, place, value, sentence, pointer):
    check(server, "in-place-density", changed(body, place, value), sentence, pointer)


@pytest.mark.parametrize(("path", "noun"), [("root-zone", "root_zones"), ("leaching", "fields"),
                                            ("soil-state", "soils"),
                                            ("in-place-density", "places")])  # fmt: skip
def test_what_is_no_json_object_is_refused_with_an_example(server, path, noun):
    for content, status in ((b"", 400), (b"{", 400), (b"[1]", 422)):
        answer = server.client.post(
            f"/v1/{path}", content=content, headers={"Content-Type": "application/json"}
        )
        sentences, _ = told(answer, status)
        assert noun in sentences or status == 400
    answer = server.client.post(f"/v1/{path}", content=b"a,b", headers={"Content-Type": "text/csv"})
    told(answer, 415)
    assert answer.headers["accept"] == "application/json"


def test_too_many_are_refused_with_the_number_that_would_do(server):
    check(server, "soil-state", {"soils": SOIL["soils"] * 1001}, "at most 1000 items, found 1001",
          "/soils")  # fmt: skip
    sensors = [{"depth": 0.01 * k, "water_content": 0.2} for k in range(1, 202)]
    check(server, "root-zone", changed(ZONE, (*Z, "profile"), sensors), "at most 200 items",
          "/root_zones/0/profile")  # fmt: skip
    many = changed(ZONE, (*Z, "profile"), sensors[:200])["root_zones"] * 101
    check(server, "root-zone", {"root_zones": many}, "at most 20000 sensors in all profiles",
          "/root_zones")  # fmt: skip


def test_a_thousand_faults_make_a_short_answer(server):
    wet = {"soils": [{"water_content": 24, "bulk_density": 1600}] * 1000}
    answer = server.client.post("/v1/soil-state", json=wet)
    told(answer, 422)
    assert answer.json()["errors_not_shown"] == 1980
