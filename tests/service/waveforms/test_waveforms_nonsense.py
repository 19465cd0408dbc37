"""Calibration traces mistaken for one another, and waveforms that are none, over the wire."""

import copy

import pytest

from tests.models.reflection.tdr_records import request, stored
from tests.service.estimates.test_estimates_bad_input import told

BODY = request("long", "long_moist_loam")
METHODS = ("travel-time", "whole-trace")


def trace(name):
    return copy.deepcopy(stored(f"long_{name}")["waveform"])


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize(
    ("calibration", "sentence", "pointer"),
    [
        ({"short": trace("air")}, "this is an open end; shorted rods end near -1", "short"),
        ({"short": trace("water")}, "shorted rods end near -1", "short"),
        ({"air": trace("short"), "short": trace("air")}, "ends near +1; this is a short", "air"),
        ({"water": trace("moist_loam") | {"temperature": 20.0}}, "effective length", "water"),
        ({"water": trace("air") | {"temperature": 20.0}}, "no later in the water", "water"),
    ],
)  # fmt: skip
def test_a_mistaken_calibration_trace_is_named(server, method, calibration, sentence, pointer):
    body = copy.deepcopy(BODY) | {"method": method}
    body["calibration"] |= calibration
    text, places = told(server.client.post("/v1/waveforms", json=body), 422)
    assert sentence in text
    assert f"#/calibration/{pointer}" in places


def test_a_lone_short_that_is_open_is_named_too(server):
    body = copy.deepcopy(BODY)
    body["calibration"] = {"short": trace("air")}
    text, places = told(server.client.post("/v1/waveforms", json=body), 422)
    assert "open end" in text
    assert "#/calibration/short" in places


@pytest.mark.parametrize("method", METHODS)
def test_a_waveform_unlike_its_calibration_has_no_number_and_the_answer_says_why(server, method):
    body = copy.deepcopy(BODY) | {"method": method}
    wave = body["waveforms"][0]
    other = copy.deepcopy(wave) | {"start": wave["start"] / 2, "window": wave["window"] / 2}
    body["waveforms"] = [wave, other]
    answer = server.client.post("/v1/waveforms", json=body)
    assert answer.status_code == 200, answer.text
    good, strange = answer.json()["waveforms"]
    assert good["flags"] == []
    assert good["apparent_permittivity"] == pytest.approx(13.2, rel=0.03)
    assert strange["flags"] == ["no-end-reflection"]
    assert strange["apparent_permittivity"] is None
    assert strange["bulk_conductivity"] is None
    advice = {said["code"]: said["text"] for said in answer.json()["advisories"]}
    assert advice["unlike-calibration"].startswith("1 waveforms")
    assert "30." in advice["unlike-calibration"]
    assert "probe-constant-missing" not in advice


@pytest.mark.parametrize("method", METHODS)
def test_nothing_but_zeros_on_a_described_line_is_no_measurement(server, method):
    body = copy.deepcopy(BODY) | {"method": method, "calibration": {}}
    body["probe"] |= {
        "head": {"impedance": 150, "permittivity": 3, "length": 0.04},
        "cable": {"length": 3.0},
    }
    wave = body["waveforms"][0]
    wave["reflection_coefficient"] = [0.0] * len(wave["reflection_coefficient"])
    del wave["long_record"]
    answer = server.client.post("/v1/waveforms", json=body)
    assert answer.status_code == 200, answer.text
    (row,) = answer.json()["waveforms"]
    assert row["flags"] == ["no-end-reflection"]
    assert row["bulk_conductivity"] is None
    assert "whole_trace" not in row


def test_calibration_traces_that_no_line_explains_are_told(server):
    body = copy.deepcopy(BODY) | {"method": "whole-trace"}
    good = server.client.post("/v1/waveforms", json=body).json()
    assert "calibration-misfit" not in {said["code"] for said in good["advisories"]}
    body["calibration"]["water"]["temperature"] = 60.0
    found = server.client.post("/v1/waveforms", json=body).json()
    assert "calibration-misfit" in {said["code"] for said in found["advisories"]}


@pytest.mark.parametrize("name", ["dry_sand", "air"])
def test_a_plain_end_without_a_known_begin_is_told_how_to_be_found(server, name):
    body = request("long", f"long_{name}") | {"calibration": {}}
    answer = server.client.post("/v1/waveforms", json=body).json()
    assert answer["waveforms"][0]["flags"] == ["no-end-reflection"]
    advice = {said["code"]: said["text"] for said in answer["advisories"]}
    assert "probe_offset" in advice["probe-not-calibrated"]
    body["probe"] = body["probe"] | {"probe_offset": 0.069}
    (row,) = server.client.post("/v1/waveforms", json=body).json()["waveforms"]
    assert row["flags"] == []
    assert row["apparent_permittivity"] == pytest.approx(
        stored(f"long_{name}")["truth"]["apparent_permittivity_at_1_ghz"], rel=0.02
    )
