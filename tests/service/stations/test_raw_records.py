"""Raw records kept at a station: estimated when asked, as POST /v1/estimates does it at once."""

import copy
import json
from pathlib import Path

import numpy as np
import pytest

from service.stations.ask.planning import within_effort
from service.stations.ask.stored import stored
from service.stations.documents import Documents
from service.store.append import packed
from service.store.interface import Channel, Document
from tests.service.stations.farm import post, put

EXAMPLES = Path(__file__).parents[3] / "openapi_examples"


def example(name):
    return json.loads((EXAMPLES / f"post_estimates.{name}.json").read_text())["request"]["json"]


TRACE, TIP, SPECTRUM = example("waveform"), example("coaxial_tip"), example("spectrum")
SOIL = {"texture": "loam", "porosity": 0.45, "mixing_model": "crim"}


def trace(shift=0.0):
    """The example's trace, shifted a little: another record."""
    record = copy.deepcopy(TRACE["readings"][0]["waveform"])
    record["reflection_coefficient"] = [
        value + shift * (-1) ** place
        for place, value in enumerate(record["reflection_coefficient"])
    ]
    return record


def moment(hour):
    return f"2026-05-04T{hour:02}:00:00Z"


@pytest.fixture
def place(client, request):
    """A station of its own, with a probe of its own in a loam."""
    name = f"raw-{abs(hash(request.node.nodeid)) % 10**9}"
    put(client, "soil", "raw-loam", SOIL)

    def furnish(**probe):
        answer = put(client, "probe", name, probe)
        assert answer.status_code == 201, answer.text
        body = {"installations": [{"probe": name, "soil": "raw-loam", "depth": 0.1}]}
        assert put(client, "station", name, body).status_code == 201
        return name

    return furnish


def estimates(client, name, **words):
    answer = client.get(f"/v1/stations/{name}/estimates", params=words)
    assert answer.status_code == 200, answer.text
    return answer.json()


def at_once(client, readings, settings):
    document = {"soil": "raw-loam", "raw_records": settings, "readings": readings}
    answer = client.post("/v1/estimates", json=document)
    assert answer.status_code == 200, answer.text
    return answer.json()["estimates"]


def same(kept, once):
    shared = kept.keys() & once.keys()
    assert {"water_content", "water_content_lower", "water_content_upper", "flags"} <= shared
    for name in shared:
        if name == "flags":
            assert kept["flags"] == once["flags"]
        elif isinstance(once[name], float):
            assert kept[name] == pytest.approx(once[name], rel=1e-9), name


@pytest.mark.parametrize(
    ("kind", "sent"),
    [("waveform", TRACE), ("reflection", TIP), ("spectrum", SPECTRUM)],
    ids=["trace", "tip", "spectrum"],
)
def test_a_kept_record_is_estimated_as_it_would_be_at_once(client, place, kind, sent):
    name = place(raw_records={kind: sent["raw_records"][kind]})
    record = {kind: sent["readings"][0][kind], "temperature": 20.0}
    told = post(client, [{"time": moment(6), "probe": name, **record}], name).json()
    assert (told["accepted"], told["ignored"]) == (1, [])
    answer = estimates(client, name)
    (kept,) = answer["estimates"]
    (once,) = at_once(client, [record], {kind: sent["raw_records"][kind]})
    assert kept["water_content"] > 0.1
    same(kept, once)
    (ground,) = answer["grounds"]
    assert kind in ground["raw_records"]


def test_a_stored_probe_reads_the_records_of_a_request_that_names_it(client, place):
    name = place(raw_records=TRACE["raw_records"])
    record = {"waveform": trace(), "temperature": 20.0}
    sent = {"soil": "raw-loam", "probe": name, "readings": [record]}
    named = client.post("/v1/estimates", json=sent)
    assert named.status_code == 200, named.text
    (once,) = at_once(client, [record], TRACE["raw_records"])
    same(named.json()["estimates"][0], once)


def test_a_day_of_traces_is_the_same_with_numbers_between_and_in_every_question(client, place):
    name = place(raw_records=TRACE["raw_records"])
    traces = [trace(1e-4 * hour) for hour in range(6)]
    rows = [
        {"time": moment(hour), "probe": name, "waveform": record, "temperature": 20.0}
        for hour, record in enumerate(traces)
    ]
    rows.insert(3, {"time": "2026-05-04T02:30:00Z", "probe": name, "temperature": 20.0,
                    "apparent_permittivity": 22.0})  # fmt: skip
    assert post(client, rows, name).json()["accepted"] == 7
    assert post(client, rows, name).json()["duplicates"] == 7
    answer = estimates(client, name)
    sent = [{"waveform": record, "temperature": 20.0} for record in traces]
    once = at_once(client, sent, TRACE["raw_records"])
    kept = [row for row in answer["estimates"] if row["time"] != "2026-05-04T02:30:00Z"]
    for row, expected in zip(kept, once, strict=True):
        same(row, expected)
    paged = [row for start in (0, 4) for row in estimates(
        client, name, start=moment(start), end=moment(start + 4))["estimates"]]  # fmt: skip
    for row, whole in zip(paged, answer["estimates"], strict=True):
        same(row, whole)
    hours = estimates(client, name, every="1h")["estimates"]
    assert [row["count"] for row in hours] == [1, 1, 2, 1, 1, 1]
    assert hours[0]["water_content"] == pytest.approx(once[0]["water_content"], rel=1e-9)
    assert hours[0]["water_content_u"] == pytest.approx(once[0]["water_content_u"], rel=1e-6)
    (latest,) = [r for r in client.get("/v1/latest").json()["latest"] if r["station"] == name]
    same(latest, once[-1])
    span = {"start": moment(0), "end": moment(7)}
    chart = client.get(f"/v1/stations/{name}/chart.svg", params=span)
    assert "7 readings, 0 flagged" in chart.text
    words = {"time": moment(5), "within": "1h"}
    (row,) = client.get(f"/v1/stations/{name}/profile", params=words).json()["profile"]
    same(row, once[-1])


def test_the_band_holds_what_the_reflection_leaves_open(client, place):
    name = place(raw_records=TRACE["raw_records"])
    settings = {**TRACE["raw_records"]["waveform"], "waveforms": trace()}
    measured = client.post("/v1/waveforms", json=settings).json()["waveforms"]
    permittivity, u = (measured[f"apparent_permittivity{end}"] for end in ("", "_u"))
    assert u > 0.3
    told = {"probe": name, "temperature": 20.0, "frequency": measured["frequency"]}
    exact = {**told, "apparent_permittivity": permittivity}
    rows = [
        {"probe": name, "temperature": 20.0, "waveform": trace()},
        {**exact, "apparent_permittivity_u": u},
        exact,
    ]
    post(client, [{"time": moment(hour), **row} for hour, row in enumerate(rows)], name)
    model = {"mixing_model": "topp-1980", "standard_error": 0}
    found = [row["water_content_u"] for row in estimates(client, name, **model)["estimates"]]
    slope = 2.92e-2 - 2 * 5.5e-4 * permittivity + 3 * 4.3e-6 * permittivity**2
    assert found[0] == pytest.approx(slope * u, rel=0.02)  # Topp, Davis and Annan (1980), Eq. 7
    assert found[1] == pytest.approx(found[0], rel=0.02)
    assert found[2] < 0.2 * found[0]


def test_a_record_that_cannot_be_read_is_flagged_with_its_reason_and_the_others_are_answered(
    client, place
):
    name = place(raw_records=TRACE["raw_records"])
    odd = {"start": 4.15, "window": 2.5, "reflection_coefficient": [0.1] * 20, "points": 21}
    flat = {**trace(), "reflection_coefficient": [0.01] * 128}
    records = [trace(), odd, trace(1e-4), flat, {"volts": [1.0]}, trace(2e-4)]
    rows = [{"time": moment(hour), "probe": name, "waveform": record, "temperature": 20.0}
            for hour, record in enumerate(records)]  # fmt: skip
    assert post(client, rows, name).json()["accepted"] == 6
    answer = estimates(client, name)
    found = answer["estimates"]
    assert [row["water_content"] is None for row in found] == [
        False,
        True,
        False,
        True,
        True,
        False,
    ]
    assert [row["flags"] for row in found[1:5:3]] == [["not-estimated"]] * 2
    assert found[3]["flags"] == ["no-end-reflection"]
    told = " ".join(item["text"] for item in answer["advisories"])
    assert "points says 21" in told
    assert f"{moment(1)} cannot be read" in told
    assert "volts" in told
    once = at_once(client, [{"waveform": trace(1e-4), "temperature": 20.0}], TRACE["raw_records"])
    same(found[2], once[0])


def test_a_probe_that_does_not_say_how_its_records_are_read_is_told_what_to_give(client, place):
    name = place()
    row = {"time": moment(6), "probe": name, "waveform": trace(), "temperature": 20.0}
    post(client, [row], name)
    answer = estimates(client, name)
    assert answer["estimates"][0]["flags"] == ["not-estimated"]
    assert "probe_length" in answer["advisories"][0]["text"]
    before = answer["revision"]
    put(client, "probe", name, {"probe_length": 0.1}, **{"If-Match": "*"})
    described = estimates(client, name)["estimates"][0]
    assert described["flags"] == []
    (once,) = at_once(client, [{"waveform": trace(), "temperature": 20.0}],
                      {"waveform": {"probe": {"probe_length": 0.1}}})  # fmt: skip
    same(described, once)
    put(client, "probe", name, {"raw_records": TRACE["raw_records"]}, **{"If-Match": "*"})
    calibrated = estimates(client, name)
    assert calibrated["estimates"][0]["water_content"] != described["water_content"]
    then = estimates(client, name, at_revision=before)
    assert then["estimates"] == answer["estimates"]
    put(client, "probe", name, {"probe_length": 0.15}, **{"If-Match": "*"})
    assert estimates(client, name, at_revision=calibrated["revision"]) == calibrated


@pytest.mark.parametrize("form", ["json", "ndjson", "csv"])
def test_records_come_in_every_form_and_one_a_reading(client, place, form):
    name = place(raw_records=TRACE["raw_records"])
    rows = [
        {"time": moment(0), "probe": name, "temperature": 20.0, "waveform": trace()},
        {"time": moment(1), "probe": name, "apparent_permittivity": 22.0, "waveform": trace()},
        {"time": moment(2), "probe": name, "spectrum": {}, "waveform": trace()},
        {"time": moment(3), "probe": name, "waveform": 5},
    ]
    if form == "json":
        sent = {"json": {"readings": rows}}
    else:
        text = "\n".join(map(json.dumps, rows))
        if form == "csv":
            names = list(dict.fromkeys(name for row in rows for name in row))
            cells = [[json.dumps(row[n]) if isinstance(row.get(n), dict) else str(row.get(n, ""))
                      for n in names] for row in rows]  # fmt: skip
            quoted = [['"' + cell.replace('"', '""') + '"' for cell in row] for row in cells]
            text = "\n".join(",".join(row) for row in [names, *quoted])
        media_type = {"ndjson": "application/x-ndjson", "csv": "text/csv"}[form]
        sent = {"content": text, "headers": {"Content-Type": media_type}}
    told = client.post(f"/v1/stations/{name}/readings", **sent).json()
    assert (told["accepted"], told["ignored"]) == (1, [])
    details = {r["row"]: r["detail"] for r in told["rejected"]}
    assert "waveform or apparent_permittivity, found both" in details[1]
    assert "one raw record" in details[2]
    assert "object" in details[3]
    (kept,) = client.get(f"/v1/stations/{name}/readings").json()["readings"]
    assert json.loads(kept["raw_record"]) == {"waveform": trace()}
    assert estimates(client, name)["estimates"][0]["water_content"] > 0.3


@pytest.mark.parametrize(
    ("settings", "place", "told"),
    [
        ({"wavefrm": {}}, "/wavefrm", "did you mean waveform?"),
        ({"waveform": {"probe": {"probe_lenth": 0.1}}}, "/waveform/probe/probe_lenth",
         "did you mean probe_length?"),
        ({"waveform": {"probe": {"probe_length": 0.1}, "calibration": {
            "air": {"start": 1, "window": 1, "reflection_coefficient": [0.1] * 20, "points": 17}}}},
         "/waveform/calibration/air/points", "20"),
        ({"reflection": {"at_frequency": "fast"}}, "/reflection/at_frequency", "at_frequency"),
        ({"reflection": {"at_frequency": 1e9, "standards": 5}}, "/reflection/standards", "a list"),
        ({"spectrum": {"at_freqency": 1e9}}, "/spectrum/at_freqency", "at_frequency"),
    ],
)  # fmt: skip
def test_settings_that_no_record_could_be_read_with_are_refused_with_their_place(
    client, settings, place, told
):
    answer = put(client, "probe", "unreadable", {"raw_records": settings})
    assert answer.status_code == 422
    errors = {error["pointer"]: error["detail"] for error in answer.json()["errors"]}
    assert told in errors[f"#/raw_records{place}"]


@pytest.mark.parametrize("form", ["json", "ndjson"])
def test_units_do_not_change_what_a_record_means(client, place, form):
    name = place(raw_records=SPECTRUM["raw_records"])
    row = {"time": moment(0), "probe": name, "temperature": 20.0,
           "spectrum": SPECTRUM["readings"][0]["spectrum"]}  # fmt: skip
    address = f"/v1/stations/{name}/readings"
    if form == "json":
        answer = client.post(address, json={"readings": [row], "units": {"frequency": "MHz"}})
    else:
        headers = {"Content-Type": "application/x-ndjson"}
        words = {"units": "frequency:MHz"}
        answer = client.post(address, content=json.dumps(row), headers=headers, params=words)
    (rejected,) = answer.json()["rejected"]
    assert "in Hz" in rejected["detail"]


def test_a_frequency_in_another_unit_is_told_without_offering_units(client):
    settings = {"reflection": {"at_frequency": 1e9, "frequency": [0.5, 1.0], "kind": "filled-line"}}
    answer = put(client, "probe", "gigahertz", {"raw_records": settings})
    (error,) = [e for e in answer.json()["errors"] if e["pointer"].endswith("/frequency/0")]
    assert "looks like GHz: send it in the unit of the API" in error["detail"]
    assert "units" not in error["detail"]


@pytest.mark.parametrize(
    ("kind", "file"),
    [("reflection", "post_reflections.filled_line"), ("scattering", "post_scattering.filled_line")],
)
def test_a_filled_line_is_read_as_its_own_path_reads_it(client, place, kind, file):
    document = json.loads((EXAMPLES / f"{file}.json").read_text())["request"]["json"]
    sample, units = document.pop("sample"), document.pop("units", {})
    scale = 1e9 if units.get("frequency") == "GHz" else 1.0
    document["frequency"] = [scale * value for value in document["frequency"]]
    at = document["frequency"][1]
    name = place(raw_records={kind: {**document, "at_frequency": at}})
    row = {"time": moment(0), "probe": name, "temperature": 20.0, kind: sample}
    assert post(client, [row], name).json()["accepted"] == 1
    (found,) = estimates(client, name)["estimates"]
    (once,) = at_once(client, [{kind: sample, "temperature": 20.0}],
                      {kind: {**document, "at_frequency": at}})  # fmt: skip
    assert found["water_content"] == pytest.approx(once["water_content"], rel=1e-9, nan_ok=True)
    assert found["flags"] == once["flags"]


def test_units_do_not_change_what_settings_mean(client):
    settings = {"waveform": {"probe": {"probe_length": 10}}}
    body = {"units": {"probe_length": "cm"}, "raw_records": settings}
    answer = put(client, "probe", "centimetres", body)
    assert (answer.status_code, answer.json()["errors"][0]["pointer"]) == (422, "#/units")


def test_a_page_ends_where_its_records_would_take_too_long():
    body = {"installations": [{"probe": "p", "soil": "s", "depth": 0.1}]}
    documents = Documents().with_changes([
        Document("soil", "s", 1, 0, None, {}), Document("probe", "p", 2, 0, None, {}),
        Document("station", "a", 3, 0, None, body),
    ])  # fmt: skip
    channel = Channel(1, "a", "p", {"temperature": 3, "raw": 3})
    rows = [(1, time, 4, 20.0) for time in range(300)]
    raw = [(1, time, 4, packed({"spectrum": {}})) for time in range(100, 300)]
    found = stored(rows, [channel], ["temperature"], raw)
    assert within_effort(found, documents, None) == 150
    traces = [(1, time, 4, packed({"waveform": {}})) for time in range(100, 300)]
    assert within_effort(stored(rows, [channel], ["temperature"], traces), documents, None) == 300
    assert within_effort(stored(rows, [channel], ["temperature"]), documents, None) == 300
    assert np.all(found.time == np.arange(300))
