"""POST /v1/calibrations over a real server: the curve, and that estimates take it as it is."""

import numpy as np
import pytest

from tests.service.calibrations.asking import (
    COLUMNS,
    LEVELS,
    PERMITTIVITY,
    ROWS,
    WATER,
    asked,
    with_pairs,
)
from tests.service.conftest import command

STATED = {**COLUMNS, "apparent_permittivity_u": 0.25, "water_content_u": 0.006}
WEIGHED = {
    "pairs": {
        "apparent_permittivity": PERMITTIVITY,
        "gravimetric_water_content": [water / 1.4 for water in WATER],
        "level": LEVELS,
    },
    "bulk_density": 1.4, "bulk_density_u": 0.02, "gravimetric_water_content_u": 0.003,
    "apparent_permittivity_u": 0.25,
}  # fmt: skip


def codes(answer):
    return {said["code"] for said in answer["advisories"]}


def half_widths(rows):
    return np.array([(row["water_content_upper"] - row["water_content_lower"]) / 2 for row in rows])


def test_pairs_without_uncertainty_are_a_line_by_least_squares(server):
    answer = asked(server, {**COLUMNS, "form": "square-root"})
    slope, intercept = np.polyfit(np.sqrt(PERMITTIVITY), WATER, 1)
    _, covariance = np.polyfit(np.sqrt(PERMITTIVITY), WATER, 1, cov=True)

    assert answer["coefficients"]["slope"] == pytest.approx(slope)
    assert answer["coefficients"]["intercept"] == pytest.approx(intercept)
    assert answer["covariance"]["of"] == ["intercept", "slope"]
    assert np.array(answer["covariance"]["values"]) == pytest.approx(covariance[::-1, ::-1])
    assert answer["fit"]["degrees_of_freedom"] == 10
    assert "calibration-unstated" in codes(answer)


@pytest.mark.parametrize("body", [COLUMNS, STATED])
def test_rows_and_columns_get_the_same_answer(server, body):
    as_rows = {**body, "pairs": ROWS["pairs"]}
    assert asked(server, as_rows) == asked(server, body)


@pytest.mark.parametrize(
    "body",
    [
        {**COLUMNS, "form": "square-root"},
        {**COLUMNS, "form": "polynomial", "degree": 3},
        STATED,
        {**STATED, "coverage_probability": 0.9},
        WEIGHED,
    ],
)
def test_estimates_take_the_answer_and_give_its_band_back(server, body):
    answer = asked(server, body)
    probability = body.get("coverage_probability", 0.95)
    rows = [row for row in answer["bands"] if 5 < row["apparent_permittivity"] < 26]
    readings = [
        {name: row[name] for name in ("apparent_permittivity", "apparent_permittivity_u")}
        | {"temperature": 20}
        for row in rows
    ]
    told = server.client.post(
        "/v1/estimates",
        json={"mixing_model": answer["mixing_model"], "readings": readings,
              "coverage_probability": probability},
    ).json()  # fmt: skip

    given = [row["water_content"] for row in told["estimates"]]
    assert given == pytest.approx([row["water_content"] for row in rows], abs=1e-9)
    assert half_widths(told["estimates"]) == pytest.approx(half_widths(rows), rel=0.12)
    mean = half_widths(told["estimates"]).mean() / half_widths(rows).mean()
    assert mean == pytest.approx(1.0, abs=0.05)


def test_a_stored_soil_holds_the_answer(tmp_path):
    with command(tmp_path) as service:
        model = asked(service, STATED)["mixing_model"]
        soil = {"texture": "loam", "mixing_model": model}
        assert service.client.put("/v1/soils/field-loam", json=soil).status_code == 201
        request = {"readings": [{"apparent_permittivity": 15.0, "temperature": 20}]}
        stored = service.client.post("/v1/estimates", json={"soil": "field-loam", **request})
        named = service.client.post("/v1/estimates", json={
            "soil": {"texture": "loam"}, "mixing_model": model, **request})  # fmt: skip
    assert stored.status_code == 200, stored.text
    assert stored.json()["estimates"] == named.json()["estimates"]


def test_percent_may_be_named(server):
    percent = with_pairs(water_content=[100 * water for water in WATER])
    answer = asked(server, {**percent, "units": {"water_content": "%"}})
    plain = asked(server, COLUMNS)

    assert answer["mixing_model"] == pytest.approx(plain["mixing_model"])
    assert answer["units"]["water_content"] == "%"
    for name in ("residual_standard_deviation", "leave_one_out_error", "soil_scatter"):
        assert answer["fit"][name] == pytest.approx(100 * plain["fit"][name])
    for name in ("water_content", "water_content_lower", "mean_upper", "water_content_u"):
        assert answer["bands"][3][name] == pytest.approx(100 * plain["bands"][3][name])


def test_weighed_water_is_brought_to_volume_and_one_density_is_shared(server):
    answer = asked(server, WEIGHED)
    volumes = [row["water_content"] for row in answer["pairs"]]
    assert volumes == pytest.approx(WATER)
    assert answer["pairs"][0]["water_content_u"] == pytest.approx(1.4 * 0.003)
    assert answer["shared"]["errors"]["bulk_density"]["by_at_most"] == pytest.approx(
        0.427 / 1.4 * 0.02
    )
    assert answer["shared"]["water_density"] == 1.0
    exact = {name: value for name, value in WEIGHED.items() if name != "bulk_density_u"}
    assert "calibration-density-exact" in codes(asked(server, exact))
    assert "calibration-density-exact" not in codes(answer)
    assert answer["mixing_model"]["slope_u"] > 0


def test_densities_of_each_pair_are_its_own(server):
    each = with_pairs(
        {"pairs": dict(WEIGHED["pairs"])}, bulk_density=[1.4] * 12, bulk_density_u=0.02
    )
    answer = asked(server, {**each, "gravimetric_water_content_u": 0.003})
    assert answer["shared"]["errors"] == {}
    assert answer["pairs"][8]["water_content_u"] == pytest.approx(
        np.hypot(1.4 * 0.003, 0.416 / 1.4 * 0.02)
    )
    kilograms = {**each, "units": {"bulk_density": "kg/m3"}}
    kilograms["pairs"] = {**each["pairs"], "bulk_density": [1400] * 12, "bulk_density_u": 20}
    brought = asked(server, {**kilograms, "gravimetric_water_content_u": 0.003})
    assert brought["coefficients"] == pytest.approx(answer["coefficients"])


def test_a_shared_error_widens_the_band_and_moves_no_coefficient(server):
    own = asked(server, STATED)
    both = asked(server, {**STATED, "water_content_u_shared": 0.01})
    assert both["coefficients"]["slope"] == own["coefficients"]["slope"]
    for alone, wide in zip(own["bands"], both["bands"], strict=True):
        assert wide["mean_u"] == pytest.approx(np.hypot(alone["mean_u"], 0.01))


def test_levels_are_left_out_together_and_told_back(server):
    answer = asked(server, with_pairs(STATED, level=LEVELS))
    assert answer["fit"]["left_out"] == "level"
    assert answer["fit"]["levels"] == 5
    assert [row["level"] for row in answer["pairs"]] == LEVELS
    assert asked(server, STATED)["fit"]["left_out"] == "pair"


def test_the_form_is_chosen_and_said(server):
    answer = asked(server, COLUMNS)
    assert answer["form"]["name"] == "square-root"
    assert {one["form"] for one in answer["forms"]} == {
        "square-root", "polynomial-1", "polynomial-2", "polynomial-3"
    }  # fmt: skip
    assert "calibration-form" in codes(answer)
    asked_for = asked(server, {**COLUMNS, "form": "polynomial", "degree": 3})
    assert asked_for["form"] | {"equation": ""} == {
        "name": "polynomial", "degree": 3, "equation": ""
    }  # fmt: skip
    assert "forms" not in asked_for


def test_a_form_that_fits_badly_is_answered_and_a_better_one_named(server):
    answer = asked(server, {**COLUMNS, "form": "polynomial"})
    assert answer["form"]["degree"] == 1
    said = [a["text"] for a in answer["advisories"] if a["code"] == "calibration-other-form"]
    assert said[0].startswith("square-root goes through these pairs much better than polynomial-1")


def test_a_curve_that_turns_before_water_makes_no_mixing_model(server):
    answer = asked(server, {**COLUMNS, "form": "polynomial", "degree": 2})
    assert answer["mixing_model"] is None
    said = next(a["text"] for a in answer["advisories"] if a["code"] == "calibration-unusable")
    assert "increase over permittivity 1 to 81" in said
    assert answer["coefficients"]["quadratic"] < 0


def test_bands_where_they_are_asked_for(server):
    at = {"apparent_permittivity": [2, 10, 50], "apparent_permittivity_u": [0.1, 0.2, 1.0]}
    answer = asked(server, {**STATED, "at": at})
    assert [row["apparent_permittivity_u"] for row in answer["bands"]] == [0.1, 0.2, 1.0]
    assert [row["extrapolated"] for row in answer["bands"]] == [True, False, True]
    assert "calibration-extrapolated" in codes(answer)
    for row in answer["bands"]:
        assert row["water_content_lower"] < row["mean_lower"] < row["water_content"]
    assert "calibration-extrapolated" not in codes(asked(server, STATED))


def test_a_real_permittivity_counts_as_that_without_loss(server):
    real = {"pairs": {"real_permittivity": PERMITTIVITY, "water_content": WATER}}
    assert asked(server, real)["coefficients"] == asked(server, COLUMNS)["coefficients"]


def test_cautions_are_always_there(server):
    for body in (COLUMNS, STATED, WEIGHED):
        assert {
            "calibration-scope", "indirect-measurement", "numbers-not-verdicts"
        } <= codes(asked(server, body))  # fmt: skip


def test_every_advisory_of_a_calibration_is_in_the_catalogue(server):
    known = {entry["name"] for entry in server.client.get("/v1/flags").json()["flags"]}
    assert codes(asked(server, WEIGHED)) <= known
