"""What is said of names, units, zones and times that cannot be what was meant."""

import json

import pytest

from tests.service.stations.farm import furnish, post, put, reading

SENML = {"Content-Type": "application/senml+json"}


@pytest.fixture(scope="module")
def station(client):
    furnish(client, "worded")
    return client


def told(answer):
    assert answer.status_code == 200, answer.text
    return answer.json()


def codes(body):
    return {advisory["code"]: advisory["text"] for advisory in body["advisories"]}


def test_a_misspelt_name_is_told_with_the_one_that_was_meant(station):
    row = {**reading(0), "bulk_conductivty": 0.5, "battery": 3.6}
    body = told(post(station, [row], "worded"))
    assert (body["accepted"], body["ignored"]) == (1, ["bulk_conductivty", "battery"])
    text = codes(body)["name-not-known"]
    assert "did you mean bulk_conductivity?" in text
    assert "battery" not in text


@pytest.mark.parametrize("form", ["json", "columns", "ndjson"])
def test_a_row_in_which_nothing_is_known_is_rejected_with_what_was_meant(station, form):
    key = {"time": "2026-05-05T00:00:00Z", "probe": "p1"}
    rows = [{**key, "permittivty": 17.2}, {**key, "apparent_permittivity": 17.2}]
    if form == "json":
        answer = post(station, rows, "worded")
    elif form == "columns":
        columns = {name: [row[name]] for row in rows[:1] for name in row}
        answer = post(station, columns, "worded")
    else:
        text = "\n".join(map(json.dumps, rows))
        headers = {"Content-Type": "application/x-ndjson"}
        answer = station.post("/v1/stations/worded/readings", content=text, headers=headers)
    body = told(answer)
    (rejected,) = body["rejected"]
    assert rejected["row"] == 0
    assert "apparent_permittivity?" in rejected["detail"]
    assert body["accepted"] + body["duplicates"] == (form != "columns")


def test_a_table_without_a_column_that_is_known_is_refused(station):
    text = "time,probe,permittivty\n2026-05-05T00:00:00Z,p1,17.2\n"
    sent = {"content": text, "headers": {"Content-Type": "text/csv"}}
    answer = station.post("/v1/stations/worded/readings", **sent)
    assert answer.status_code == 422
    assert 'does "permittivty" mean' in answer.json()["detail"]


def test_a_quantity_that_first_comes_late_in_a_body_of_lines_is_kept(station):
    put(station, "station", "lines", {})
    lines = [json.dumps({**reading(minute), "note": "x" * 100}) for minute in range(1000)]
    lines.append('{"time":"2026-05-05T00:00:00Z","probe":"p1","temperature":14.5}')
    lines.append('{"time":"2026-05-05T01:00:00Z","probe":"p1","temperature":"warm"}')
    headers = {"Content-Type": "application/x-ndjson"}
    body = told(station.post("/v1/stations/lines/readings", content="\n".join(lines),
                             headers=headers))  # fmt: skip
    assert (body["accepted"], body["ignored"]) == (1001, ["note"])
    assert "expected a number, found 'warm'" in body["rejected"][0]["detail"]
    span = {"start": "2026-05-05T00:00:00Z"}
    (row,) = station.get("/v1/stations/lines/readings", params=span).json()["readings"]
    assert row["temperature"] == 14.5


@pytest.mark.parametrize("line", ["17.2", "{bad", '{"time": NaN}', "[1]"])
def test_a_line_that_is_no_object_is_told_as_a_line(station, line):
    good = json.dumps(reading(0))
    headers = {"Content-Type": "application/x-ndjson"}
    body = told(station.post("/v1/stations/worded/readings", content=f"{good}\n{line}\n",
                             headers=headers))  # fmt: skip
    (rejected,) = body["rejected"]
    assert (rejected["row"], rejected["pointer"]) == (1, "line 2")
    assert "JSON object" in rejected["detail"]
    assert "cells of the table" not in rejected["detail"]


def test_a_line_without_a_time_does_not_stop_the_others(station):
    lines = ['{"probe":"p1","temperature":14}', '{"probe":"p1","temperature":15}']
    headers = {"Content-Type": "application/x-ndjson"}
    body = told(station.post("/v1/stations/worded/readings", content="\n".join(lines),
                             headers=headers))  # fmt: skip
    assert [r["pointer"] for r in body["rejected"]] == ["line 1, time", "line 2, time"]


@pytest.mark.parametrize(
    ("name", "value", "other"),
    [("temperature", 287.15, "K"), ("bulk_conductivity", 62.0, "mS/m")],
)
@pytest.mark.parametrize("form", ["json", "csv"])
def test_a_value_in_another_unit_is_told_when_it_comes_and_when_it_is_asked(
    station, form, name, value, other
):
    place = f"units-{form}-{name.replace('_', '-')}"
    furnish(station, place)
    rows = [{**reading(15 * i), name: value + i} for i in range(3)]
    if form == "json":
        answer = post(station, rows, place)
    else:
        lines = [",".join(map(str, row.values())) for row in rows]
        text = "\n".join([",".join(rows[0]), *lines])
        headers = {"Content-Type": "text/csv"}
        answer = station.post(f"/v1/stations/{place}/readings", content=text, headers=headers)
    body = told(answer)
    assert body["accepted"] == 3
    text = codes(body)["unit-suspected"]
    assert f"3 values of {name}" in text
    assert f'"{name}": "{other}"' in text
    kept = told(station.get(f"/v1/stations/{place}/estimates"))
    plain = [{k: v for k, v in row.items() if k != "probe"} for row in rows]
    document = {"soil": "loam", "probe": "p1", "readings": plain}
    once = told(station.post("/v1/estimates", json=document))
    assert codes(kept)["unit-suspected"] == codes(once)["unit-suspected"] == text
    hourly = told(station.get(f"/v1/stations/{place}/estimates", params={"every": "1h"}))
    assert codes(hourly)["unit-suspected"] == text


def test_values_that_are_possible_raise_no_suspicion(station):
    body = told(post(station, [reading(60, temperature=14.0, bulk_conductivity=0.6)], "worded"))
    assert body["advisories"] == []


@pytest.mark.parametrize("what", ["estimates", "chart.svg"])
@pytest.mark.parametrize("query", ["zone=Mars", "zone=Mars&every=1h", "zone=../../etc/passwd"])
def test_a_zone_that_is_none_is_told_by_its_name(station, what, query):
    query = query.replace("&every=1h", "") if what == "chart.svg" else query
    answer = station.get(f"/v1/stations/worded/{what}?{query}")
    assert answer.status_code == 422
    (error,) = answer.json()["errors"]
    assert error["pointer"] == "?zone"
    assert "found" in error["detail"]


@pytest.mark.parametrize("what", ["estimates", "readings", "chart.svg"])
@pytest.mark.parametrize("end", ["2026-05-04T00:00:00Z", "2026-05-05T02:00:00%2B02:00"])
def test_a_time_that_ends_before_it_begins_is_told(station, what, end):
    address = f"/v1/stations/worded/{what}?start=2026-05-05T00:00:00Z&end={end}"
    answer = station.get(address)
    assert answer.status_code == 422
    errors = answer.json()["errors"]
    assert [error["pointer"] for error in errors] == ["?start", "?end"]
    assert "2026-05-05T00:00:00Z" in errors[0]["detail"]
    assert "exchange" in errors[0]["detail"]


@pytest.mark.parametrize(
    ("body", "found"),
    [
        ({"zone": "Mars"}, 'found "Mars"'),
        ({"earliest": "2001"}, 'found "2001"'),
        ({"installations": [{"probe": "p1", "soil": "loam", "depth": 0.2, "from": "yesterday"}]},
         'found "yesterday"'),
    ],
)  # fmt: skip
def test_a_station_that_cannot_be_kept_says_what_was_found(station, body, found):
    answer = put(station, "station", "misdescribed", body)
    assert answer.status_code == 422
    assert found in answer.json()["errors"][0]["detail"]


@pytest.mark.parametrize("name", ["stations/worded", "probes/p1", "soils/loam"])
def test_what_is_needed_says_what_to_do_instead(station, name):
    post(station, [reading(0)], "worded")
    answer = station.delete(f"/v1/{name}")
    assert answer.status_code == 409
    assert "until" in answer.json()["detail"]
    assert "PUT /v1/stations/" in answer.json()["detail"]


def test_a_probe_that_only_readings_name_says_what_to_do_instead(station):
    put(station, "probe", "lone", {})
    put(station, "station", "lonely", {})
    post(station, [reading(0, probe="lone")], "lonely")
    answer = station.delete("/v1/probes/lone")
    assert (answer.status_code, "lonely" in answer.json()["detail"]) == (409, True)
    assert "another name" in answer.json()["detail"]


@pytest.mark.parametrize(
    ("record", "known"),
    [
        ({"n": "p1/temperature", "u": "degC", "v": 1}, "known are /, 1, Cel, K,"),
        ({"n": "p1/temprature", "u": "Cel", "v": 1}, "did you mean temperature"),
        ({"n": "p1/rainfall", "u": "mm", "v": 1}, "apparent_permittivity, real_permittivity"),
        ({"n": "p1/temperature", "u": "Hz", "v": 1}, "it takes Cel, K"),
    ],
)
def test_senml_that_is_not_known_is_answered_with_what_is(station, record, known):
    body = told(station.post("/v1/stations/worded/readings", json=[record], headers=SENML))
    assert known in body["rejected"][0]["detail"]
