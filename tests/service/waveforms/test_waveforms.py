"""POST /v1/waveforms over HTTP: one trace or many, both methods, units, and what is echoed."""

import json

import numpy as np
import pytest

from service.formats.raw_records import RAW_RECORDS
from service.schemas.estimates import RAW
from tests.models.reflection.tdr_records import request, stored, truth

ACCURACY = {"long_dry_sand": 0.02, "long_moist_loam": 0.02, "long_wet_loam": 0.02,
            "long_tap_water": 0.02}  # fmt: skip


def ask(server, body):
    answer = server.client.post("/v1/waveforms", json=body)
    assert answer.status_code == 200, answer.text
    return answer.json()


def test_many_traces_have_permittivity_and_conductivity_with_bands(server):
    answer = ask(server, request("long", *ACCURACY))
    for row, (name, within) in zip(answer["waveforms"], ACCURACY.items(), strict=True):
        right, sigma = truth(name)
        assert row["apparent_permittivity"] == pytest.approx(right, rel=within)
        lower, upper = (row[f"apparent_permittivity_{end}"] for end in ("lower", "upper"))
        assert lower < right < upper
        assert row["bulk_conductivity"] == pytest.approx(10 * sigma, rel=0.01)
        assert row["bulk_conductivity_u_shared"] <= row["bulk_conductivity_u"]
        assert 1e8 < row["frequency"] < 3e9
        assert row["read_from"]["start_by_tangents"] < row["read_from"]["end_by_tangents"]
        assert row["flags"] == []
    assert answer["probe"]["effective_length"] == pytest.approx(0.3, rel=0.02)
    assert answer["probe"]["series_resistance"] == pytest.approx(0.22, abs=0.02)
    assert answer["units"]["bulk_conductivity"] == "dS/m"
    assert answer["advisories"] == []


def test_one_trace_is_answered_as_one(server):
    body = request("short", "short_wet_loam")
    many = ask(server, body)["waveforms"]
    (body["waveforms"],) = body["waveforms"]
    assert ask(server, body)["waveforms"] == many[0]


def test_no_end_reflection_is_null_and_a_flag_and_the_whole_trace_tells(server):
    row = ask(server, request("long", "long_saline_loam"))["waveforms"][0]
    assert row["apparent_permittivity"] is None
    assert row["apparent_permittivity_upper"] is None
    assert row["frequency"] is None
    assert row["flags"] == ["no-end-reflection"]
    assert row["bulk_conductivity"] == pytest.approx(2.0, rel=0.01)
    answer = ask(server, request("long", "long_saline_loam", method="whole-trace"))
    row = answer["waveforms"][0]
    assert row["apparent_permittivity"] == pytest.approx(truth("long_saline_loam")[0], rel=0.01)
    assert row["frequency"] == 1e9
    assert 0.8 < row["read_from"]["reduced_chi_square"] < 1.2
    found = row["whole_trace"]
    assert np.shape(found["covariance"]) == (len(found["parameters"]),) * 2
    assert found["sections"][0]["length"] == pytest.approx(0.3)
    assert answer["probe"]["line"]["head_impedance"] == pytest.approx(86.6, rel=0.01)
    assert row["flags"] == []


def test_traces_with_other_axes_keep_their_places(server):
    names = ["long_moist_loam_coarse", "long_wet_loam", "long_moist_loam_coarse", "long_dry_sand"]
    rows = ask(server, request("long", *names))["waveforms"]
    for row, name in zip(rows, names, strict=True):
        assert row["apparent_permittivity"] == pytest.approx(truth(name)[0], rel=0.02)


def test_every_way_to_write_an_axis_and_a_level_is_the_same_trace(server):
    plain = stored("long_moist_loam")["waveform"]
    rho = np.array(plain["reflection_coefficient"])
    distance = plain["start"] + np.linspace(0, plain["window"], rho.size)
    late = {"long_record": plain["long_record"]}
    others = [
        {"axis": distance.tolist(), "reflection_coefficient": rho.tolist()},
        {"axis": (100 * distance).tolist(), "axis_unit": "cm",
         "reflection_coefficient": rho.tolist()},
        {"start": 2 * plain["start"] / 0.299792458, "window": 2 * plain["window"] / 0.299792458,
         "axis_unit": "ns", "reflection_coefficient": rho.tolist()},
        {"start": 0.66 * plain["start"], "window": 0.66 * plain["window"],
         "propagation_velocity_factor": 0.66, "reflection_coefficient": rho.tolist()},
        {"start": plain["start"], "window": plain["window"], "level": (0.25 * (1 + rho)).tolist(),
         "level_matched": 0.25, "level_open": 0.5, "averages": 50},
    ]  # fmt: skip
    body = request("long", "long_moist_loam")
    body["waveforms"] += [other | late for other in others]
    rows = ask(server, body)["waveforms"]
    for row in rows[1:]:
        for name in ("apparent_permittivity", "bulk_conductivity", "frequency"):
            assert row[name] == pytest.approx(rows[0][name], rel=1e-6)


def test_units_time_and_depth_are_the_callers(server):
    body = request("long", "long_moist_loam", units={"bulk_conductivity": "mS/m",
                                                     "frequency": "MHz"})  # fmt: skip
    body["waveforms"][0] |= {"time": "2026-05-04T06:00:00Z", "depth": 0.3}
    answer = ask(server, body)
    row = answer["waveforms"][0]
    assert row["bulk_conductivity"] == pytest.approx(30.0, rel=0.01)
    assert row["frequency"] < 3000
    assert (row["time"], row["depth"]) == ("2026-05-04T06:00:00Z", 0.3)
    assert answer["units"]["bulk_conductivity"] == "mS/m"


def test_what_was_assumed_of_a_probe_is_said(server):
    body = request("long", "long_moist_loam")
    body["calibration"] = {}
    body["probe"] = {"probe_length": 0.3, "probe_offset": 0.0693}
    answer = ask(server, body)
    codes = {said["code"] for said in answer["advisories"]}
    assert codes == {"probe-not-calibrated", "series-resistance-assumed", "probe-constant-missing"}
    row = answer["waveforms"][0]
    assert row["bulk_conductivity"] is None
    assert row["apparent_permittivity"] == pytest.approx(13.18, rel=0.05)
    body["probe"]["rods"] = {"count": 3, "diameter": 0.00475, "spacing": 0.022}
    row = ask(server, body)["waveforms"][0]
    assert row["bulk_conductivity"] == pytest.approx(0.3, rel=0.02)


def test_partly_inserted_rods_and_sections_are_asked_for(server):
    body = request("long", "long_moist_loam", method="whole-trace", inserted_length=0.3)
    assert len(ask(server, body)["waveforms"][0]["whole_trace"]["sections"]) == 1
    body = request("long", "long_moist_loam", method="whole-trace", sections=2)
    sections = ask(server, body)["waveforms"][0]["whole_trace"]["sections"]
    assert sum(section["length"] for section in sections) == pytest.approx(0.3)


def test_a_thousand_traces_fit_in_one_request(server):
    body = request("short", "short_wet_loam")
    del body["waveforms"][0]["long_record"]
    body["waveforms"] = body["waveforms"] * 1000
    rows = ask(server, body)["waveforms"]
    assert len({json.dumps(row) for row in rows}) == 1
    assert len(rows) == 1000


READING = {"time": "2026-05-04T06:00:00Z", "temperature": 20.0}


def estimate(server, readings, **changes):
    asked = request("long")
    body = {
        "mixing_model": "crim",
        "soil": {"texture": "loam", "porosity": 0.45},
        "raw_records": {"waveform": {name: asked[name] for name in ("probe", "calibration")}},
        "readings": readings,
    }
    return server.client.post("/v1/estimates", json=body | changes)


def test_a_trace_becomes_water_content_and_salinity_in_one_call(server):
    """The loam was made with 0.25 m3/m3 of water."""
    wave = {name: stored(name)["waveform"] for name in ("long_moist_loam", "long_saline_loam")}
    readings = [
        {**READING, "waveform": wave["long_moist_loam"]},
        {**READING, "waveform": wave["long_saline_loam"]},
        {**READING, "apparent_permittivity": 13.11},
    ]
    answer = estimate(server, readings)
    assert answer.status_code == 200, answer.text
    wet, saline, plain = answer.json()["estimates"]
    assert wet["water_content_lower"] < 0.25 < wet["water_content_upper"]
    assert wet["water_content"] == pytest.approx(0.25, abs=0.01)
    assert wet["apparent_permittivity"] == pytest.approx(13.18, rel=0.02)
    assert wet["pore_water_conductivity"] is not None
    assert wet["bulk_conductivity"] == pytest.approx(0.3, rel=0.01)
    assert wet["water_content_u"] > plain["water_content_u"]
    assert saline["water_content"] is None
    assert saline["flags"] == ["no-end-reflection"]
    assert plain["water_content"] == pytest.approx(wet["water_content"], abs=0.003)
    assert answer.json()["raw_records"]["waveform"]["probe"]["probe_length"] == 0.3


@pytest.mark.parametrize("method", ["travel-time", "whole-trace"])
def test_what_traces_of_a_probe_share_stays_in_the_mean_over_them(server, method):
    """The same numbers typed in are independent of one another: their mean is narrower."""
    asked = request("long")
    raw = {"waveform": {"method": method, **{k: asked[k] for k in ("probe", "calibration")}}}
    wave = stored("long_moist_loam")["waveform"]
    exact = {"name": "crim", "standard_error": 0.0}
    found = estimate(server, [{**READING, "waveform": wave}], raw_records=raw,
                     mixing_model=exact, budget=True).json()  # fmt: skip
    (told,) = found["estimates"]
    typed = {name: told[name] for name in ("apparent_permittivity", "apparent_permittivity_u",
                                           "frequency", "bulk_conductivity")}  # fmt: skip
    answer = estimate(server, [{**READING, **typed}], raw_records={}, mixing_model=exact)
    (plain,) = answer.json()["estimates"]
    assert told["water_content"] == pytest.approx(plain["water_content"], abs=2e-4)
    assert told["water_content_u"] == pytest.approx(plain["water_content_u"], rel=0.05)
    assert told["water_content_u_shared"] > plain["water_content_u_shared"]
    per_reading = {
        name: np.sqrt(row["water_content_u"] ** 2 - row["water_content_u_shared"] ** 2)
        for name, row in (("told", told), ("plain", plain))
    }
    assert per_reading["told"] < 0.9 * per_reading["plain"]
    assert "probe_calibration" in str(found["budget"])


def test_columns_take_raw_records_and_units_of_the_caller(server):
    waves = [stored(name)["waveform"] for name in ("long_moist_loam", "long_wet_loam")]
    columns = {"temperature": [20.0, 20.0], "waveform": waves}
    found = estimate(server, columns, units={"bulk_conductivity": "mS/m"}).json()["estimates"]
    assert found["bulk_conductivity"] == pytest.approx([30.0, 60.0], rel=0.01)
    assert found["water_content"] == pytest.approx([0.25, 0.38], abs=0.02)


def test_what_a_reading_says_itself_is_kept(server):
    wave = stored("long_moist_loam")["waveform"]
    answer = estimate(server, [{**READING, "waveform": wave, "bulk_conductivity": 0.5}])
    assert answer.json()["estimates"][0]["bulk_conductivity"] == 0.5


def test_the_description_and_the_registry_name_the_same_records():
    assert set(RAW) == set(RAW_RECORDS)
