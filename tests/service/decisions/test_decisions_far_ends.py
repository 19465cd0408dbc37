"""What bends far, what no soil holds, and sensors that are not where roots are."""

import numpy as np
import pytest

TWO_STEP = {
    "method": "two-step", "coefficients": {"a": 1.0, "b": 8.5},
    "mould": {"apparent_permittivity": 14.68805625, "total_density": 1.995},
}  # fmt: skip


def answered(server, path, body):
    answer = server.client.post(path, json=body)
    assert answer.status_code == 200, answer.text
    return answer.json()


def test_the_leaching_requirement_has_the_ends_of_draws(server):
    """LR = ECw / (5 ECe - ECw), FAO-29 (1985), equation 9: plain draws of both conductivities."""
    field = {"water_conductivity": 3.0, "water_conductivity_u": 0.1,
             "target_extract_conductivity": 2.5, "target_extract_conductivity_u": 0.42,
             "evapotranspiration": 700.0, "evapotranspiration_u": 35.0}  # fmt: skip
    found = answered(server, "/v1/leaching", {"fields": field})["fields"]
    rng = np.random.default_rng(7)
    water, target, used = (rng.normal(field[n], field[f"{n}_u"], 400_000) for n in (
        "water_conductivity", "target_extract_conductivity", "evapotranspiration"))  # fmt: skip
    share = water / (5.0 * target - water)
    for name, drawn in (("leaching_requirement", share), ("applied_water", used / (1.0 - share))):
        ends = np.quantile(drawn, [0.025, 0.975])
        told = [found[f"{name}_lower"], found[f"{name}_upper"]]
        assert told == pytest.approx(ends.tolist(), rel=0.03)


def test_a_water_that_may_be_too_saline_leaves_no_upper_end(server):
    field = {"water_conductivity": 3.0, "target_extract_conductivity": 1.4,
             "target_extract_conductivity_u": 0.3}  # fmt: skip
    found = answered(server, "/v1/leaching", {"fields": field})["fields"]
    assert found["leaching_requirement"] == pytest.approx(3.0 / 4.0)
    assert found["leaching_requirement_upper"] is None
    assert found["flags"] == ["water-perhaps-too-saline"]


def test_salt_at_the_bottom_is_never_below_that_of_the_water(server):
    field = {"water_conductivity": 1.0, "leaching_fraction": 0.05, "leaching_fraction_u": 0.02}
    found = answered(server, "/v1/leaching", {"fields": field})["fields"]
    assert min(found["root_zone_profile"]["soil_water_conductivity_lower"]) >= 1.0 - 1e-9
    assert found["mean_extract_conductivity_lower"] >= 0.5


@pytest.mark.parametrize(("place", "flags"), [
    ({"apparent_permittivity": 13.53651264}, []),
    ({"apparent_permittivity": 30}, ["more-than-the-volume"]),
    ({"apparent_permittivity": 13.53651264, "temperature": -5}, ["frozen-place"]),
], ids=str)  # fmt: skip
def test_a_place_that_no_soil_can_be_is_flagged(server, place, flags):
    found = answered(server, "/v1/in-place-density", TWO_STEP | {"places": place})["places"]
    assert found["flags"] == flags
    assert found["bulk_density"] > 0


def test_a_negative_water_content_is_no_answer(server):
    body = {"method": "one-step", "coefficients": {"a": 1, "b": 8.5, "c": 0.05, "d": 2.5},
            "places": {"apparent_permittivity": 13.5, "standard_conductivity": 0.001}}  # fmt: skip
    found = answered(server, "/v1/in-place-density", body)["places"]
    assert found["gravimetric_water_content"] is None
    assert found["flags"] == ["no-physical-answer"]


def test_sensors_below_the_roots_are_none_of_the_root_zone(server):
    zone = {"profile": [{"depth": 1.5, "water_content": 0.2}], "field_capacity": 0.32,
            "wilting_point": 0.12, "root_depth": 0.8, "depletion_fraction": 0.4}  # fmt: skip
    answer = server.client.post("/v1/root-zone", json={"root_zones": [zone]})
    assert answer.status_code == 422
    (fault,) = answer.json()["errors"]
    assert "the shallowest sensor is at 1.5 m, below the root zone of 0.8 m" in fault["detail"]
    assert fault["pointer"].startswith("#/root_zones/0/profile")


def test_an_own_curve_says_what_is_corrected_before_it(server):
    body = {
        "mixing_model": {"name": "square-root", "slope": 0.12, "intercept": -0.18,
                         "standard_error": 0.01},
        "probe": {"frequency": 1e8, "apparent_permittivity_u": 0.3},
        "readings": [{"apparent_permittivity": 20.3, "bulk_conductivity": 1.0}],
    }  # fmt: skip
    said = {
        one["code"]: one["text"] for one in answered(server, "/v1/estimates", body)["advisories"]
    }
    assert "own-curve-corrected" in said
    assert "slope" not in said.get("no-uncertainty-stated", "")


def test_a_share_below_one_is_not_taken_for_percent(server):
    zone = {"water_content": 0.2, "field_capacity": 0.32, "wilting_point": 0.12,
            "root_depth": 0.8, "depletion_fraction": 0.4, "efficiency": 0.75,
            "leaching_requirement": 0.99}  # fmt: skip
    answer = server.client.post("/v1/root-zone", json={"root_zones": zone})
    assert answer.status_code == 422
    assert "looks like %" not in answer.json()["errors"][0]["detail"]
