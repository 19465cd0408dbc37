"""Wrong waveforms of every kind: an error that names the field and how to mend it."""

import copy

import pytest

from tests.models.reflection.tdr_records import request, stored
from tests.service.estimates.test_estimates_bad_input import told

BODY = request("short", "short_wet_loam")
POINTS = len(BODY["waveforms"][0]["reflection_coefficient"])


def changed(place, value):
    """The body with one thing changed, or left out where the value is None."""
    body = copy.deepcopy(BODY)
    here = body
    for step in place[:-1]:
        here = here.setdefault(step, {}) if isinstance(here, dict) else here[step]
    if value is None:
        del here[place[-1]]
    else:
        here[place[-1]] = value
    return body


WAVE = ("waveforms", 0)


@pytest.mark.parametrize(
    ("place", "value", "sentence", "pointer"),
    [
        ((*WAVE, "points"), POINTS + 1, f"reflection_coefficient has {POINTS}",
         "/waveforms/0/points"),
        ((*WAVE, "start"), None, "start is missing", "/waveforms/0/start"),
        ((*WAVE, "window"), -2.0, "greater than 0", "/waveforms/0/window"),
        ((*WAVE, "axis"), [1.0] * POINTS, "found both", "/waveforms/0/axis"),
        ((*WAVE, "axis_unit"), "ft", "'m'", "/waveforms/0/axis_unit"),
        ((*WAVE, "propagation_velocity_factor"), 66, "at most 1",
         "/waveforms/0/propagation_velocity_factor"),
        ((*WAVE, "reflection_coefficient"), None, "found neither",
         "/waveforms/0/reflection_coefficient"),
        ((*WAVE, "reflection_coefficient"), [0.0] * 5, "points says",
         "/waveforms/0/points"),
        ((*WAVE, "reflection_coefficient", 3), 178.6, "send ohm, volt or counts as level",
         "/waveforms/0/reflection_coefficient"),
        ((*WAVE, "reflection_coefficient", 3), "open", 'a number, found "open"',
         "/waveforms/0/reflection_coefficient/3"),
        ((*WAVE, "level"), [1.0] * POINTS, "found both", "/waveforms/0/reflection_coefficient"),
        ((*WAVE, "reflection_coeficient"), [0.0], "did you mean reflection_coefficient",
         "/waveforms/0/reflection_coeficient"),
        ((*WAVE, "long_record", "window"), None, "window is missing",
         "/waveforms/0/long_record/window"),
        (("calibration", "water", "temperature"), None, "temperature is missing",
         "/calibration/water/temperature"),
        (("calibration", "water", "temperature"), 293.0, "looks like K",
         "/calibration/water/temperature"),
        (("calibration", "air", "reflection_coefficient"), [0.0] * POINTS, "no end reflection",
         "/calibration/air"),
        (("calibration", "oil"), {}, "unknown key", "/calibration/oil"),
        (("probe", "probe_length"), None, "probe_length is missing", "/probe/probe_length"),
        (("probe", "probe_length"), 30.0, "at", "/probe/probe_length"),
        (("probe", "rods"), {"count": 2, "diameter": 0.02, "spacing": 0.01}, "exceed the diameter",
         "/probe/rods/spacing"),
        (("method",), "guess", "travel-time", "/method"),
        (("relaxations",), 2, "is for whole-trace", "/relaxations"),
        (("sections",), 2, "is for whole-trace", "/sections"),
        (("waveforms",), [], "expected 1 to", "/waveforms"),
        (("waveforms",), 3, "expected", "/waveforms"),
        (("units",), {"bulk_conductivity": "m"}, "cannot be in 'm'", "/units/bulk_conductivity"),
        (("coverage_probability",), 95, "at most 0.999", "/coverage_probability"),
    ],
)  # fmt: skip
def test_a_request_that_cannot_be_used_says_how_to_mend_it(server, place, value, sentence, pointer):
    body = changed(place, value)
    if place[-1] == "rods":
        del body["probe"]["probe_impedance"]
    text, places = told(server.client.post("/v1/waveforms", json=body), 422)
    assert sentence in text
    assert f"#{pointer}" in places


def test_axes_that_do_not_go_up_evenly_are_refused(server):
    even = [4.15 + 0.005 * k for k in range(POINTS)]
    back, uneven = [*even[:50], *even[49:-1]], [*even[:-1], even[-1] + 1.0]
    for axis, sentence in ((back, "point 50 does not"), (uneven, "even steps"),
                           (even[:-1], f"{POINTS - 1} points")):  # fmt: skip
        body = copy.deepcopy(BODY)
        wave = body["waveforms"][0]
        del wave["start"], wave["window"], wave["points"]
        wave["axis"] = axis
        text, places = told(server.client.post("/v1/waveforms", json=body), 422)
        assert sentence in text
        assert "#/waveforms/0/axis" in places


def test_levels_need_both_of_their_marks(server):
    body = copy.deepcopy(BODY)
    wave = body["waveforms"][0]
    wave["level"] = wave.pop("reflection_coefficient")
    text, places = told(server.client.post("/v1/waveforms", json=body), 422)
    assert "level_matched and level_open" in text
    assert "#/waveforms/0/level_matched" in places


def test_a_whole_trace_without_its_line_names_what_is_missing(server):
    body = copy.deepcopy(BODY) | {"method": "whole-trace"}
    body["calibration"] = {}
    body["probe"] = {"probe_length": 0.1}
    _, places = told(server.client.post("/v1/waveforms", json=body), 422)
    assert {"#/probe/probe_impedance", "#/probe/head", "#/probe/cable"} <= set(places)


@pytest.mark.parametrize("sent", [b"{", b"[1]", b'{"waveforms": NaN}', b""])
def test_what_is_no_request_is_refused(server, sent):
    answer = server.client.post(
        "/v1/waveforms", content=sent, headers={"Content-Type": "application/json"}
    )
    assert answer.status_code in {400, 422}
    assert answer.headers["Content-Type"] == "application/problem+json"


def test_another_media_type_is_told_what_is_read(server):
    answer = server.client.post("/v1/waveforms", content=b"x", headers={"Content-Type": "text/csv"})
    assert answer.status_code == 415
    assert answer.headers["Accept"] == "application/json"


@pytest.mark.parametrize("value", [0.0, 1.0, -1.0, 0.5])
def test_a_flat_trace_has_no_number_and_no_error(server, value):
    body = changed((*WAVE, "reflection_coefficient"), [value] * POINTS)
    row = server.client.post("/v1/waveforms", json=body).json()["waveforms"][0]
    assert row["apparent_permittivity"] is None
    assert row["flags"] == ["no-end-reflection"]
    body["method"] = "whole-trace"
    assert server.client.post("/v1/waveforms", json=body).status_code == 200


WAVEFORM = stored("short_wet_loam")["waveform"]
SETTINGS = {"waveform": {"probe": BODY["probe"], "calibration": BODY["calibration"]}}


@pytest.mark.parametrize(
    ("reading", "changes", "sentence", "pointer"),
    [
        ({"waveform": WAVEFORM}, {"raw_records": {}}, "needs its probe", "/raw_records/waveform"),
        ({"waveform": 3}, {}, "expected an object", "/readings/0/waveform"),
        ({"waveform": {**WAVEFORM, "start": None}}, {}, "start is missing",
         "/readings/0/waveform/start"),
        ({"waveform": {**WAVEFORM, "points": 1}}, {}, "at least", "/readings/0/waveform/points"),
        ({"waveform": WAVEFORM, "apparent_permittivity": 17.0}, {}, "found both",
         "/readings/0/apparent_permittivity"),
        ({"apparent_permittivity": 17.0}, {}, "no reading carries a waveform",
         "/raw_records/waveform"),
        ({"waveform": WAVEFORM}, {"raw_records": {"wavefrom": {}}}, "did you mean waveform?",
         "/raw_records/wavefrom"),
        ({"waveform": WAVEFORM}, {"raw_records": 4}, "expected an object", "/raw_records"),
        ({"waveform": WAVEFORM}, {"raw_records": {"waveform": {"probe": {}}}},
         "probe_length is missing", "/raw_records/waveform/probe/probe_length"),
        ({"wavefrm": WAVEFORM}, {}, "unknown key", "/readings/0/wavefrm"),
    ],
)  # fmt: skip
def test_a_raw_record_that_cannot_be_used_says_so_in_its_place(
    server, reading, changes, sentence, pointer
):
    body = {"mixing_model": "topp-1980", "raw_records": SETTINGS, "readings": [reading]}
    if "wavefrm" in reading:
        del body["raw_records"]
    text, places = told(server.client.post("/v1/estimates", json=body | changes), 422)
    assert sentence in text
    assert f"#{pointer}" in places
