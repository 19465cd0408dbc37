"""Waveforms and probes that are not what they are sent as, over the wire."""

import copy

import pytest

from tests.models.reflection.tdr_records import request
from tests.service.estimates.test_estimates_bad_input import told

BODY = request("long", "long_moist_loam")
PER_METRE = 1 / 0.149896229
"""Two-way nanoseconds along a metre of air."""


def ask(server, body):
    answer = server.client.post("/v1/waveforms", json=body)
    assert answer.status_code == 200, answer.text
    return answer.json()


def said(answer):
    return {one["code"]: one["text"] for one in answer["advisories"]}


def in_nanoseconds(wave):
    turned = copy.deepcopy(wave)
    turned |= {name: PER_METRE * wave[name] for name in ("start", "window")}
    if "long_record" in wave:
        turned["long_record"] |= {
            name: PER_METRE * wave["long_record"][name] for name in ("start", "window")
        }
    return turned


def test_a_record_in_order_raises_no_doubt(server):
    assert ask(server, BODY)["advisories"] == []


def test_calibration_traces_in_nanoseconds_are_told_the_unit(server):
    body = copy.deepcopy(BODY)
    body["calibration"] = {name: in_nanoseconds(one) for name, one in body["calibration"].items()}
    text, places = told(server.client.post("/v1/waveforms", json=body), 422)
    assert 'in ns the traces show the rods: send "axis_unit": "ns"' in text
    assert places == ["#/calibration/air"]


def test_a_waveform_in_nanoseconds_is_asked_about(server):
    body = copy.deepcopy(BODY) | {"calibration": {}}
    body["waveforms"] = [in_nanoseconds(wave) for wave in body["waveforms"]]
    answer = ask(server, body)
    assert answer["waveforms"][0]["apparent_permittivity"] is None
    assert '"axis_unit": "ns"' in said(answer)["axis-unit-suspected"]
    for wave in body["waveforms"]:
        wave["axis_unit"] = wave["long_record"]["axis_unit"] = "ns"
    right = ask(server, body)
    assert right["waveforms"][0]["apparent_permittivity"] == pytest.approx(13.2, rel=0.05)
    assert "axis-unit-suspected" not in said(right)


def test_a_waveform_elsewhere_than_its_calibration_is_told_with_both_times(server):
    body = copy.deepcopy(BODY)
    body["waveforms"] = [in_nanoseconds(wave) for wave in body["waveforms"]]
    text = said(ask(server, body))["unlike-calibration"]
    assert "at 30.36 ns" in text
    assert "the first of them: at 202.5 ns" in text


@pytest.mark.parametrize("method", ["travel-time", "whole-trace"])
def test_a_probe_impedance_of_another_probe_is_told_beside_that_of_the_traces(server, method):
    body = copy.deepcopy(BODY) | {"method": method}
    body["probe"] = body["probe"] | {"probe_impedance": 17.86}
    answer = ask(server, body)
    text = said(answer)["probe-constant-contradicted"]
    assert "a probe constant of 0.158 1/m" in text
    assert "rods of 178.6 Ohm" in text
    used = "The one as described" if method == "travel-time" else "the line that these traces tell"
    assert used in text
    (row,) = answer["waveforms"]
    assert row["bulk_conductivity_lower"] < 0.3 < row["bulk_conductivity_upper"]


def test_triangles_are_no_trace_and_the_answer_says_so(server):
    body = copy.deepcopy(BODY) | {"calibration": {}}
    (wave,) = body["waveforms"]
    del wave["long_record"]
    count = len(wave["reflection_coefficient"])
    wave["reflection_coefficient"] = [abs(place % 400 - 200) / 400 for place in range(count)]
    answer = ask(server, body)
    assert "no-end-reflection" in answer["waveforms"][0]["flags"]
    assert answer["waveforms"][0]["bulk_conductivity"] is None
    assert "neither its slope nor a swept sine" in said(answer)["no-steps"]


def test_levels_in_volts_are_told_with_the_level(server):
    body = copy.deepcopy(BODY)
    body["calibration"] = {"air": body["calibration"]["air"]}
    everything = [*body["waveforms"], body["calibration"]["air"]]
    for part in [*everything, *(one["long_record"] for one in everything)]:
        part["reflection_coefficient"] = [0.8 * rho for rho in part["reflection_coefficient"]]
    text = said(ask(server, body))["level-suspected"]
    assert "the trace in air ends at +0.8" in text
    assert "level_matched" in text


def test_what_is_wrong_with_a_calibration_is_placed_in_raw_records(server):
    calibration = BODY["calibration"] | {"short": BODY["calibration"]["air"]}
    settings = {"probe": BODY["probe"], "calibration": calibration}
    body = {"mixing_model": "topp-1980", "raw_records": {"waveform": settings},
            "readings": [{"waveform": BODY["waveforms"][0]}]}  # fmt: skip
    text, places = told(server.client.post("/v1/estimates", json=body), 422)
    assert "shorted rods end near -1" in text
    assert places == ["#/raw_records/waveform/calibration/short"]


def test_lengths_of_raw_waveforms_come_in_the_units_of_the_request(server):
    probe = BODY["probe"] | {"probe_length": 30.0, "cable": {"length": 300.0}}
    body = {"mixing_model": "topp-1980", "readings": [{"waveform": BODY["waveforms"][0]}],
            "raw_records": {"waveform": {"probe": probe}},
            "units": {"probe_length": "cm", "length": "cm"}}  # fmt: skip
    scaled = server.client.post("/v1/estimates", json=body)
    assert scaled.status_code == 200, scaled.text
    plain = BODY["probe"] | {"cable": {"length": 3.0}}
    body |= {"raw_records": {"waveform": {"probe": plain}}, "units": {}}
    whole = server.client.post("/v1/estimates", json=body).json()
    for name in ("water_content", "bulk_conductivity"):
        found, expected = (answer["estimates"][0][name] for answer in (scaled.json(), whole))
        assert found == pytest.approx(expected, rel=1e-9)
    assert "probe-not-calibrated" in said(whole)


def test_a_waveform_cut_off_and_a_long_record_of_another_soil_are_told(server):
    body = copy.deepcopy(BODY)
    wave = body["waveforms"][0]
    wave["reflection_coefficient"] = [max(rho, -0.2) for rho in wave["reflection_coefficient"]]
    other = request("long", "long_saline_loam")["waveforms"][0]
    body["waveforms"].append(wave | {"long_record": other["long_record"]})
    told_of = said(ask(server, body))
    assert "2 waveforms lie exactly" in told_of["waveform-clipped"]
    assert "long records of 1 waveforms" in told_of["long-record-contradicted"]


def test_what_a_whole_trace_lacks_is_placed_in_raw_records(server):
    body = {
        "mixing_model": "topp-1980",
        "readings": [{"waveform": BODY["waveforms"][0]}],
        "raw_records": {"waveform": {"probe": {"probe_length": 0.3}, "method": "whole-trace"}},
    }
    text, places = told(server.client.post("/v1/estimates", json=body), 422)
    assert "a whole trace needs it" in text
    assert "#/raw_records/waveform/probe/head" in places
