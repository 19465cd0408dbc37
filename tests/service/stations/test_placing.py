"""Readings that are out of place, impossible, or said twice: kept, told, and mended by sending."""

import json

import pytest

from tests.service.stations.farm import furnish, post, put, reading

START = "2026-05-04T00:00:00Z"


@pytest.fixture
def fresh(client, request):
    """A station of the test's own."""
    name = f"s{abs(hash(request.node.name)) % 10**9}"
    furnish(client, name)
    return name


@pytest.mark.parametrize(
    ("row", "told"),
    [
        ({"depth": 20}, 'is it in cm? send 0.2, or "units": {"depth": "cm"}'),
        ({"depth": 0.9}, "nothing is installed at 0.9 m, but at 0.2 m, 0.4 m"),
        ({"probe": "p1", "depth": 0.7}, "p1 is installed at 0.2 m, and the reading says 0.7 m"),
        ({"probe": "p1", "time": "2025-05-04T00:00:00Z"}, "p1 was not installed at the time"),
        ({"probe": "elsewhere"}, "elsewhere is not installed at"),
        ({"probe": "p1", "apparent_permittivity": None, "waveform": {"samples": [0.1, 0.2]}},
         "p1 does not say how a waveform is read"),
    ],
)  # fmt: skip
@pytest.mark.parametrize("form", ["json", "ndjson"])
def test_a_reading_out_of_place_is_kept_and_told_with_its_row(client, fresh, row, told, form):
    put(client, "probe", "elsewhere", {"frequency": 1.0e9})
    rows = [reading(0, probe="p2"), {"time": START, "apparent_permittivity": 17.2, **row}]
    rows = [{name: cell for name, cell in one.items() if cell is not None} for one in rows]
    if form == "json":
        answer = post(client, rows, fresh).json()
    else:
        lines = "\n".join(map(json.dumps, rows))
        address, kind = f"/v1/stations/{fresh}/readings", "application/x-ndjson"
        answer = client.post(address, content=lines, headers={"Content-Type": kind}).json()
    assert (answer["accepted"], answer["rejected"]) == (2, [])
    (said,) = [one for one in answer["advisories"] if one["code"] == "not-placed"]
    assert told in said["text"]
    assert said["row"] == 1


def test_readings_in_their_place_give_rise_to_no_word(client, fresh):
    by_depth = {"time": "2026-05-04T01:00:00Z", "depth": 0.2, "apparent_permittivity": 9.0}
    rows = [reading(0), reading(0, probe="p2", depth=0.4), by_depth]
    assert post(client, rows, fresh).json()["advisories"] == []


@pytest.mark.parametrize("form", ["json", "csv"])
def test_a_depth_above_the_surface_is_refused_unless_something_is_there(client, fresh, form):
    def send():
        if form == "json":
            row = {"time": START, "depth": -0.3, "apparent_permittivity": 17.2}
            return post(client, [row], fresh).json()
        address, text = f"/v1/stations/{fresh}/readings", f"{START},-0.3,17.2\n"
        table = f"time,depth,apparent_permittivity\n{text}"
        headers = {"Content-Type": "text/csv"}
        return client.post(address, content=table, headers=headers).json()

    (refused,) = send()["rejected"]
    assert "send 0.3" in refused["detail"]
    installed = [{"probe": "p1", "soil": "loam", "depth": -0.3}]
    changed = put(client, "station", fresh, {"installations": installed}, **{"If-Match": "*"})
    assert changed.status_code == 200, changed.text
    assert send()["accepted"] == 1


def test_an_impossible_value_is_kept_told_and_completed_by_the_right_one(client, fresh):
    wrong = reading(0, temperature=287.1, bulk_conductivity=250)
    first = post(client, [wrong], fresh).json()
    assert first["accepted"] == 1
    told = {one["text"].split()[0] for one in first["advisories"]
            if one["code"] == "impossible-value"}  # fmt: skip
    assert told == {"temperature", "bulk_conductivity"}
    address = f"/v1/stations/{fresh}"
    before = client.get(f"{address}/readings").json()
    assert before["readings"][0]["temperature"] == 287.1
    units = {"temperature": "K", "bulk_conductivity": "mS/m"}
    right = post(client, [wrong], fresh, units=units).json()
    assert (right["completed"], right["conflicts"]) == (1, [])
    assert [one["code"] for one in right["advisories"]] == ["impossible-gave-way"]
    (kept,) = client.get(f"{address}/readings").json()["readings"]
    assert (kept["temperature"], kept["bulk_conductivity"]) == (13.95, 2.5)
    shown = client.get(f"{address}/conflicts").json()["conflicts"]
    assert [row["sent"] for row in shown] == [{"temperature": 287.1, "bulk_conductivity": 250}]
    words = {"at_revision": before["revision"]}
    assert client.get(f"{address}/readings", params=words).json() == before
    assert post(client, [wrong], fresh, units=units).json()["duplicates"] == 1


@pytest.mark.parametrize("sentinel", [-7999.0, 7998.0])
def test_a_sentinel_nobody_declared_does_not_block_its_place(client, fresh, sentinel):
    first = post(client, [reading(0, sentinel)], fresh).json()
    (said,) = first["advisories"]
    assert (said["code"], "sentinels" in said["text"], said["row"]) == ("impossible-value", True, 0)
    assert post(client, [reading(0, 17.2)], fresh).json()["completed"] == 1


def test_a_possible_value_is_never_overwritten(client, fresh):
    post(client, [reading(0, 17.2)], fresh)
    for other in (17.3, -7999.0):
        answer = post(client, [reading(0, other)], fresh).json()
        assert [clash["kept"]["apparent_permittivity"] for clash in answer["conflicts"]] == [17.2]
    (kept,) = client.get(f"/v1/stations/{fresh}/readings").json()["readings"]
    assert kept["apparent_permittivity"] == 17.2


def test_the_same_readings_in_another_unit_are_duplicates(client, fresh):
    """Every thousandth of a dS/m, and every tenth of a degree, as it is and in other units."""
    times = [f"2026-05-04T{i // 60:02}:{i % 60:02}:00Z" for i in range(1000)]

    def send(conductivity, temperature, units=None):
        rows = {"time": times, "probe": "p1", "bulk_conductivity": conductivity,
                "temperature": temperature}  # fmt: skip
        return post(client, rows, fresh, units=units or {}).json()

    count, tenths = range(1, 1001), [i % 400 for i in range(1000)]
    celsius = [t / 10 for t in tenths]
    assert send([i / 1000 for i in count], celsius)["accepted"] == 1000
    kelvin = [float(f"{(2731.5 + t) / 10:.2f}") for t in tenths]
    fahrenheit = [float(f"{32 + 0.18 * t:.2f}") for t in tenths]
    for salt, warmth, conductivity, temperature in (
        ("S/m", "K", [i / 10_000 for i in count], kelvin),
        ("mS/m", "[degF]", [i / 10 for i in count], fahrenheit),
        ("uS/cm", "Cel", [float(i) for i in count], celsius),
    ):
        units = {"bulk_conductivity": salt, "temperature": warmth}
        again = send(conductivity, temperature, units)
        assert (again["duplicates"], again["conflicts"]) == (1000, [])


def test_a_converted_value_is_kept_as_it_would_have_been_sent(client, fresh):
    post(client, [reading(0, temperature=285.1)], fresh, units={"temperature": "K"})
    (kept,) = client.get(f"/v1/stations/{fresh}/readings").json()["readings"]
    assert kept["temperature"] == 11.95


def test_a_depth_read_beside_its_probe_is_told_where_means_count_one_of_both(client, fresh):
    post(client, [reading(0)], fresh)
    row = {"time": START, "depth": 0.2, "apparent_permittivity": 55}
    assert post(client, [row], fresh).json()["accepted"] == 1
    for query in ("", "?every=1d"):
        answer = client.get(f"/v1/stations/{fresh}/estimates{query}").json()
        codes = [one["code"] for one in answer["advisories"]]
        assert "read-twice" in codes


@pytest.mark.parametrize("body", [
    '{"readings":[{"time":"2026-05-04T00:00:00Z","probe":"p1","temperature":1,"temperature":2}]}',
    '{"readings":[],"readings":[]}',
])  # fmt: skip
def test_a_key_that_stands_twice_is_refused_in_readings(client, fresh, body):
    headers = {"Content-Type": "application/json"}
    answer = client.post(f"/v1/stations/{fresh}/readings", content=body, headers=headers)
    assert answer.status_code == 422
    assert "twice" in answer.json()["detail"]


def test_a_key_that_stands_twice_is_refused_in_a_soil(client):
    headers = {"Content-Type": "application/json"}
    body = '{"texture":"loam","clay":0.1,"clay":0.3}'
    answer = client.put("/v1/soils/twice", content=body, headers=headers)
    assert answer.status_code == 422
    assert '"clay" stands twice' in answer.json()["detail"]
    assert client.get("/v1/soils/twice").status_code == 404


def test_cells_of_refused_rows_are_not_counted_as_missing(client, fresh):
    table = ("time,probe,apparent_permittivity,temperature\n"
             "no time,p1,,\n2026-05-04T00:00:00Z,p1,17.2,\n")  # fmt: skip
    address, kind = f"/v1/stations/{fresh}/readings", {"Content-Type": "text/csv"}
    answer = client.post(address, content=table, headers=kind).json()
    assert (len(answer["rejected"]), answer["missing"]) == (1, 1)


def test_a_depth_read_beside_its_probe_is_told_when_it_is_sent(client, fresh):
    post(client, [reading(0), reading(15)], fresh)
    rows = [{"time": reading(minute)["time"], "depth": 0.2, "apparent_permittivity": 55}
            for minute in (7, 15)]  # fmt: skip
    answer = post(client, rows, fresh).json()
    assert (answer["accepted"], answer["conflicts"]) == (2, [])
    (said,) = answer["advisories"]
    assert (said["code"], said["row"]) == ("read-twice", 1)


@pytest.mark.parametrize(
    ("row", "told"),
    [
        ({"time": 1781049600, "depth": 0.2, "temperature": 9.0}, "2026-05-04T06:00:00Z"),
        ({"Time": START, "depth": 0.2, "temperature": 9.0}, 'does "Time" mean time?'),
        ({"depth": 0.2, "temperature": 9.0}, "the time is missing"),
    ],
)
def test_a_time_that_is_none_is_told_with_what_it_should_be(client, fresh, row, told):
    answer = post(client, [row], fresh).json()
    (refused,) = answer["rejected"]
    assert told in refused["detail"]
    assert answer["advisories"][0]["code"] == "nothing-kept"


def test_senml_in_milliseconds_is_told_that_seconds_are_meant(client, fresh):
    pack = [{"n": "p1/temperature", "t": 1777852800000.0, "u": "Cel", "v": 12.0}]
    headers = {"Content-Type": "application/senml+json"}
    answer = client.post(f"/v1/stations/{fresh}/readings", json=pack, headers=headers).json()
    assert "not milliseconds" in answer["rejected"][0]["detail"]


@pytest.mark.parametrize(
    ("name", "meant"),
    [
        ("temp", "temperature"),
        ("permittivity", "real_permittivity"),
        ("temprature", "temperature"),
    ],
)
def test_a_name_that_is_cut_short_is_told_as_well(client, fresh, name, meant):
    (said,) = post(client, [{**reading(0), name: 12.0}], fresh).json()["advisories"]
    assert (said["code"], meant in said["text"]) == ("name-not-known", True)


def test_each_time_has_a_fraction_only_where_it_has_one(client, fresh):
    rows = [reading(0), {**reading(0), "time": "2026-05-04T00:00:00.25Z"}, reading(1)]
    post(client, rows, fresh)
    text = client.get(f"/v1/stations/{fresh}/readings?format=csv").text
    assert [line.split(",")[0] for line in text.split("\r\n")[1:4]] == [
        "2026-05-04T00:00:00Z", "2026-05-04T00:00:00.250000Z", "2026-05-04T00:01:00Z",
    ]  # fmt: skip


def test_readings_that_come_after_a_change_are_checked_against_it(client, fresh):
    put(client, "probe", f"new-{fresh}", {"frequency": 1.0e9})
    assert post(client, [reading(0, probe=f"new-{fresh}")], fresh).json()["accepted"] == 1


def test_a_profile_tells_the_last_reading_that_is_too_old_for_it(client, fresh):
    post(client, [reading(0)], fresh)
    answer = client.get(f"/v1/stations/{fresh}/profile").json()
    assert answer["profile"] == []
    (said,) = answer["advisories"]
    assert (said["code"], "p1 of 2026-05-04T00:00:00Z" in said["text"]) == ("older-readings", True)


def test_a_table_and_a_chart_say_why_rows_have_no_number(client, fresh):
    post(client, [{**reading(0), "time": "2025-05-04T00:00:00Z"}], fresh)
    table = client.get(f"/v1/stations/{fresh}/estimates?format=csv")
    assert "for which no one installation is on record" in table.headers["not-estimated"]
    chart = client.get(f"/v1/stations/{fresh}/chart.svg").text
    assert "for which no one installation is on record" in chart
