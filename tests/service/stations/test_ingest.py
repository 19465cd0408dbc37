"""What loggers send: every form, the same readings; what cannot be kept is told row by row."""

import io
import threading
from datetime import UTC, datetime, timedelta

import httpx2
import polars as pl
import pytest

from tests.service.stations.farm import furnish, post, put, reading

TIMES = [f"2026-05-04T0{i}:00:00Z" for i in range(3)]
VALUES = [17.2, 16.5, 15.9]


def kept(client, station):
    rows = client.get(f"/v1/stations/{station}/readings").json()["readings"]
    return [(r["time"], r["probe"], r["apparent_permittivity"], r.get("temperature")) for r in rows]


def senml():
    base = int(datetime(2026, 5, 4, tzinfo=UTC).timestamp())
    pack = [{"bn": "p1/", "bt": base, "n": "apparent_permittivity", "u": "/", "v": VALUES[0]}]
    pack += [{"n": "apparent_permittivity", "t": 3600 * i, "v": VALUES[i]} for i in (1, 2)]
    pack += [{"n": "temperature", "u": "K", "t": 3600 * i, "v": 287.15} for i in range(3)]
    return {"json": pack, "headers": {"Content-Type": "application/senml+json"}}


def csv_text():
    rows = [f"{t},p1,{v},14" for t, v in zip(TIMES, VALUES, strict=True)]
    return "time,probe,apparent_permittivity,temperature\n" + "\n".join(rows)


def ndjson_text():
    lines = [
        f'{{"time":"{t}","probe":"p1","apparent_permittivity":{v},"temperature":14}}'
        for t, v in zip(TIMES, VALUES, strict=True)
    ]
    return "\n".join(lines)


def arrow_bytes():
    stream = io.BytesIO()
    frame = pl.DataFrame({"time": TIMES, "probe": ["p1"] * 3, "apparent_permittivity": VALUES,
                          "temperature": [14.0] * 3})  # fmt: skip
    frame.write_ipc_stream(stream)
    return stream.getvalue()


ROWS = [
    {"time": t, "probe": "p1", "apparent_permittivity": v, "temperature": 14}
    for t, v in zip(TIMES, VALUES, strict=True)
]
FORMS = {
    "rows": {"json": {"readings": ROWS}},
    "columns": {"json": {"probe": "p1", "readings": {
        "time": TIMES, "apparent_permittivity": VALUES, "temperature": [14, 14, 14]}}},
    "units": {"json": {"units": {"temperature": "K"}, "readings": [
        {**row, "temperature": 287.15} for row in ROWS]}},
    "csv": {"content": csv_text(), "headers": {"Content-Type": "text/csv"}},
    "ndjson": {"content": ndjson_text(), "headers": {"Content-Type": "application/x-ndjson"}},
    "arrow": {"content": arrow_bytes(),
              "headers": {"Content-Type": "application/vnd.apache.arrow.stream"}},
    "senml": senml(),
}  # fmt: skip


@pytest.mark.parametrize("form", FORMS)
def test_every_form_keeps_the_same_readings(client, form):
    station = f"form-{form}"
    put(client, "station", station, {})
    answer = client.post(f"/v1/stations/{station}/readings", **FORMS[form])
    assert answer.status_code == 200, answer.text
    assert answer.json()["accepted"] == 3, answer.text
    for found, time, value in zip(kept(client, station), TIMES, VALUES, strict=True):
        assert found[:2] == (time, "p1")
        assert found[2] == pytest.approx(value, abs=1e-12)
        assert found[3] == pytest.approx(14.0, abs=1e-9)


def test_resending_is_harmless_in_any_form(client):
    put(client, "station", "again", {})
    assert post(client, ROWS, "again").json()["accepted"] == 3
    for form in ("rows", "columns", "csv", "ndjson"):
        told = client.post("/v1/stations/again/readings", **FORMS[form]).json()
        assert (told["accepted"], told["duplicates"], told["conflicts"]) == (0, 3, []), form
    assert len(kept(client, "again")) == 3


def test_other_values_are_a_conflict_that_is_shown(client):
    put(client, "station", "contradicted", {})
    post(client, [reading(0, 17.2)], "contradicted")
    told = post(client, [reading(0, 19.9), reading(15, 17.0)], "contradicted").json()
    (conflict,) = told["conflicts"]
    assert (told["accepted"], conflict["row"]) == (1, 0)
    assert conflict["kept"] == {"apparent_permittivity": 17.2}
    assert conflict["sent"] == {"apparent_permittivity": 19.9}
    listed = client.get("/v1/stations/contradicted/conflicts").json()["conflicts"]
    assert [item["sent"] for item in listed] == [{"apparent_permittivity": 19.9}]
    assert kept(client, "contradicted")[0][2] == 17.2


@pytest.mark.parametrize(
    ("cell", "value", "told"),
    [
        ("time", "2026-05-04T06:00:00", "no offset"),
        ("time", "2026-05-04T06:00:00-00:00", "not known"),
        ("time", "2099-01-01T00:00:00Z", "future"),
        ("time", "1970-01-01T00:00:07Z", "reset"),
        ("time", "2000-01-01T00:10:00Z", "reset"),
        ("time", "2026-02-30T00:00:00Z", "no such date"),
        ("time", "2026-W18-1T06:00:00Z", "RFC 3339"),
        ("time", "", "RFC 3339"),
        ("probe", "p9", "no probe p9"),
        ("probe", "'; DROP TABLE reading; --", "no probe"),
        ("apparent_permittivity", "17,2", "number"),
        ("apparent_permittivity", "=1+1", "number"),
        ("apparent_permittivity", "1e999", "number"),
    ],
)
@pytest.mark.parametrize("form", ["json", "csv"])
def test_a_row_that_cannot_be_kept_is_told_and_the_others_are_kept(client, form, cell, value, told):
    put(client, "station", "picky", {})
    bad = {**reading(0), cell: value}
    if form == "json":
        answer = post(client, [reading(15), bad], "picky").json()
        pointer = f"#/readings/1/{cell}"
    else:
        lines = [",".join(f'"{r[k]}"' for k in bad) for r in (reading(15), bad)]
        text = "\r\n".join([",".join(bad), *lines])
        sent = {"content": text, "headers": {"Content-Type": "text/csv"}}
        answer = client.post("/v1/stations/picky/readings", **sent).json()
        pointer = f"line 3, {cell}"
    (rejected,) = answer["rejected"]
    assert (rejected["row"], rejected["pointer"]) == (1, pointer)
    assert told in rejected["detail"]
    assert answer["accepted"] + answer["duplicates"] == 1


def test_a_row_that_says_nothing_is_no_reading(client):
    answer = post(client, [{"time": "2026-06-03T00:00:00Z", "probe": "p1"}]).json()
    assert answer["accepted"] == 0
    assert "holds no value" in answer["rejected"][0]["detail"]


def test_agreed_sentinels_are_gaps_and_zero_is_a_value(client):
    rows = [
        reading(0, -9999, day="2026-06-01", temperature=0),
        reading(1, 7999.0, day="2026-06-01"),
        reading(2, -8888, day="2026-06-01"),
    ]
    told = post(client, rows).json()
    assert (told["accepted"], told["missing"]) == (3, 2)
    text = "time,probe,apparent_permittivity\n2026-06-01T01:00:00Z,p1,NAN\n"
    text += "2026-06-01T01:01:00Z,p1,-9999\n"
    sent = {"content": text, "headers": {"Content-Type": "text/csv"}}
    assert client.post("/v1/stations/north-1/readings", **sent).json()["missing"] == 2
    span = {"start": "2026-06-01T00:00:00Z", "end": "2026-06-02T00:00:00Z", "probe": "p1"}
    found = client.get("/v1/stations/north-1/readings", params=span).json()["readings"]
    assert [r["apparent_permittivity"] for r in found] == [None, None, -8888, None, None]
    assert found[0]["temperature"] == 0
    estimates = client.get("/v1/stations/north-1/estimates", params=span).json()["estimates"]
    assert "out-of-gate:apparent_permittivity" in estimates[2]["flags"]
    assert all(row["water_content"] is None for row in estimates)


def test_late_and_unordered_readings_are_taken_as_they_come(client):
    put(client, "station", "late", {})
    for minute in (30, 0, 45, 15):
        assert post(client, [reading(minute, 10 + minute)], "late").json()["accepted"] == 1
    assert [row[2] for row in kept(client, "late")] == [10, 25, 40, 55]


def test_relative_senml_times_are_from_now(client):
    put(client, "station", "relative", {})
    pack = [{"bn": "0.30/", "n": "apparent_permittivity", "u": "/", "v": 12, "t": -600}]
    sent = {"json": pack, "headers": {"Content-Type": "application/senml+json"}}
    assert client.post("/v1/stations/relative/readings", **sent).json()["accepted"] == 1
    (row,) = client.get("/v1/stations/relative/readings").json()["readings"]
    age = datetime.now(UTC) - datetime.fromisoformat(row["time"])
    assert timedelta(seconds=600) <= age < timedelta(seconds=660)
    assert row["depth"] == 0.3


@pytest.mark.parametrize(
    ("pack", "status", "told"),
    [
        ([{"bver": 11, "n": "p1/temperature", "v": 1}], 422, "bver"),
        ([{"n": "p1/temperature", "v": 1, "must_": 1}], 422, "understood"),
        ({}, 422, "list of records"),
        ([{"n": "p1/temperature", "u": "%", "v": 1}], 200, "unit"),
        ([{"n": "p1/temperature", "u": "Cel", "vs": "x"}], 200, "a number v"),
        ([{"n": "south/p1/temperature", "u": "Cel", "v": 1}], 200, "south"),
        ([{"n": "temperature", "u": "Cel", "v": 1}], 200, "<probe>/temperature"),
        ([{"n": "p1/temperature", "u": "Cel", "v": 1, "t": 1e300}], 200, "calendar"),
    ],
)
def test_senml_that_is_no_reading_is_told(client, pack, status, told):
    sent = {"json": pack, "headers": {"Content-Type": "application/senml+json"}}
    answer = client.post("/v1/stations/north-1/readings", **sent)
    assert answer.status_code == status
    assert told in answer.text


@pytest.mark.parametrize(
    ("body", "status"),
    [(b"{bad", 400), (b"[]", 422), (b'{"readings": 5}', 422), (b'{"readings": [], "x": 1}', 422),
     (b'{"readings": [{"time": NaN}]}', 400), (b"[" * 100_000, 400)],
)  # fmt: skip
def test_a_body_that_is_no_document_of_readings_is_refused(client, body, status):
    headers = {"Content-Type": "application/json"}
    answer = client.post("/v1/stations/north-1/readings", content=body, headers=headers)
    assert answer.status_code == status
    assert client.post("/v1/stations/nowhere/readings", json={}).status_code == 404
    headers["Content-Type"] = "text/plain"
    answer = client.post("/v1/stations/north-1/readings", content=body, headers=headers)
    assert answer.status_code == 415


def test_a_storm_of_resends_leaves_one_copy(farm):
    furnish(farm.client, "storm")
    day = [reading(15 * i, 10 + i / 10, day="2026-04-01") for i in range(96)]
    told = []

    def logger(number):
        rows = [{**row, "depth": 0.001 * (number + 1), "probe": None} for row in day]
        with httpx2.Client(base_url=farm.base_url, timeout=30) as client:
            told.extend(post(client, rows, "storm").json() for _ in range(5))

    loggers = [threading.Thread(target=logger, args=(n,)) for n in range(100)]
    for thread in loggers:
        thread.start()
    for thread in loggers:
        thread.join()
    assert sum(t["accepted"] for t in told) == 100 * 96
    assert sum(t["duplicates"] for t in told) == 100 * 96 * 4
    assert not any(t["conflicts"] or t["rejected"] for t in told)
