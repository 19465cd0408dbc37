"""Numbers in another unit than they should be: what was found, expected, and probably meant."""

import copy

import pytest

from tests.models.reflection.tdr_records import request
from tests.service.estimates.test_estimates_bad_input import told

LONG = request("long", "long_moist_loam")
TRACE = LONG["waveforms"][0]
LENGTH, IMPEDANCE = LONG["probe"]["probe_length"], LONG["probe"]["probe_impedance"]


def asked(probe=None, wave=None, **changes):
    body = copy.deepcopy({**LONG, **changes})
    body["probe"] |= probe or {}
    body["waveforms"][0] |= wave or {}
    return body


def window(scale):
    return {"start": scale * TRACE["start"], "window": scale * TRACE["window"]}


@pytest.mark.parametrize(("body", "sentences", "pointer"), [
    (asked(wave=window(1e3)), ["looks like mm", '"axis_unit": "mm"'], "/waveforms/0/window"),
    (asked(wave=window(1e2)), ["rods of 0.3 m", "looks like cm"], "/waveforms/0/window"),
    (asked(wave=window(6.67e-9)), ["looks like s"], "/waveforms/0/window"),
    (asked({"probe_length": 300}), ["looks like mm; send 0.3"], "/probe/probe_length"),
    (asked({"probe_length": 30}), ["looks like cm; send 0.3"], "/probe/probe_length"),
    (asked({"probe_impedance": IMPEDANCE / 1e3}), ["10 to 1000 Ohm", "found 0.178631",
     "looks like kOhm: send 178.631"], "/probe/probe_impedance"),
    (asked({"rise_time": 150}), ["looks like ps: send 0.15"], "/probe/rise_time"),
    (asked({"probe_offset": 70}), ["looks like mm: send 0.07"], "/probe/probe_offset"),
    (asked({"cable": {"length": 3000}}), ["looks like cm: send 30"], "/probe/cable/length"),
    (asked({"head": {"length": 40}}), ["looks like mm: send 0.04"], "/probe/head/length"),
    (asked({"rods": {"count": 3, "diameter": 4.75, "spacing": 22}}),
     ["send 0.00475", "send 0.022"], "/probe/rods/spacing"),
    (asked(method="whole-trace", frequency=1), ["looks like GHz: send 1e+09"], "/frequency"),
    (asked(method="whole-trace", frequency=1000), ["looks like MHz"], "/frequency"),
    (asked(method="whole-trace", inserted_length=200), ["in mm? send 0.2"], "/inserted_length"),
    (asked(wave={"propagation_velocity_factor": 66}), ["for 66 % send 0.66"],
     "/waveforms/0/propagation_velocity_factor"),
    (asked(units={"probe_ofset": "mm"}), ["did you mean probe_offset?"], "/units/probe_ofset"),
    (asked(units={"probe_offset": "Hz"}), ["it takes m, cm, mm"], "/units/probe_offset"),
])  # fmt: skip
def test_another_unit_is_named_with_the_number_to_send(server, body, sentences, pointer):
    text, places = told(server.client.post("/v1/waveforms", json=body), 422)
    for sentence in sentences:
        assert sentence in text
    assert f"#{pointer}" in places


def test_lengths_and_frequency_come_in_the_units_a_request_names(server):
    plain = {"probe_offset": 0.069, "probe_offset_u": 0.001}
    scaled = {"probe_offset": 69.0, "probe_offset_u": 1.0, "probe_length": 1e3 * LENGTH}
    one = server.client.post("/v1/waveforms", json=asked(plain, calibration={})).json()
    units = {"probe_offset": "mm", "probe_length": "mm"}
    other = server.client.post("/v1/waveforms", json=asked(scaled, calibration={}, units=units))
    assert other.status_code == 200, other.text
    for name in ("apparent_permittivity", "apparent_permittivity_u"):
        assert other.json()["waveforms"][0][name] == pytest.approx(one["waveforms"][0][name])
    whole = asked(method="whole-trace", frequency=0.5, units={"frequency": "GHz"})
    found = server.client.post("/v1/waveforms", json=whole).json()
    assert found["waveforms"][0]["frequency"] == pytest.approx(0.5)
    assert found["units"]["frequency"] == "GHz"


@pytest.mark.parametrize("path", ["waveforms", "reflections", "scattering", "spectra"])
@pytest.mark.parametrize(("body", "status", "sentences"), [
    (b"", 400, ["empty", "expected an object such as"]),
    (b"[]", 422, ["expected an object such as", "found a list"]),
    (b"null", 422, ["found null"]),
    (b'{"frequency": [1.0, NaN]}', 400, ["found NaN", "JSON has no NaN"]),
    (b'{"frequency": -Infinity}', 400, ["found -Infinity", "no Infinity"]),
    (b'{"frequency": [1, 2,,]}', 400, ["not JSON"]),
])  # fmt: skip
def test_a_body_that_is_no_object_is_told_what_to_send(server, path, body, status, sentences):
    headers = {"Content-Type": "application/json"}
    answer = server.client.post(f"/v1/{path}", content=body, headers=headers)
    assert answer.status_code == status
    for sentence in sentences:
        assert sentence in answer.json()["detail"]
    assert "JSON has no NaN" not in answer.text or b"N" in body or b"I" in body


@pytest.mark.parametrize("scale", [1e-12, 1e-6, 1e6])
def test_no_axis_takes_more_memory_than_its_points(server, scale):
    """A window of picometres once asked for a smoothing over 1e9 points."""
    assert server.client.post("/v1/waveforms", json=asked(wave=window(scale))).status_code == 422
    mixed = asked(wave=window(scale), calibration={})
    assert server.client.post("/v1/waveforms", json=mixed).status_code == 422
    fine = {"axis_unit": "ps", "start": 20000.0, "window": 1200.0, "points": None}
    fine["reflection_coefficient"] = TRACE["reflection_coefficient"]
    answer = server.client.post("/v1/waveforms", json=asked(wave=fine))
    assert answer.status_code in {200, 422}
