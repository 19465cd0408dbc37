"""What dashboards ask: estimates by time, means, pages, revisions, now, everywhere."""

import io
import json

import polars as pl
import pytest

from tests.service.stations.farm import furnish, post, put, reading, topp

DAY = {"start": "2026-05-04T00:00:00Z", "end": "2026-05-05T00:00:00Z"}
VALUES = [10 + i / 10 for i in range(96)]


@pytest.fixture(scope="module")
def day(client):
    """A day of quarter-hours of two probes at a station of its own."""
    furnish(client, "asked")
    for probe in ("p1", "p2"):
        rows = [reading(15 * i, v, probe, temperature=15.0) for i, v in enumerate(VALUES)]
        assert post(client, rows, "asked").json()["accepted"] == 96
    return client


def ask(client, what="estimates", **words):
    answer = client.get(f"/v1/stations/asked/{what}", params={**DAY, **words})
    assert answer.status_code == 200, answer.text
    return answer


def test_each_reading_is_estimated_with_what_was_installed(day):
    answer = ask(day, probe="p1").json()
    found = answer["estimates"]
    assert [row["water_content"] for row in found] == pytest.approx([topp(v) for v in VALUES])
    assert {row["depth"] for row in found} == {0.2}
    assert all(r["water_content_lower"] < r["water_content"] < r["water_content_upper"]
               for r in found)  # fmt: skip
    (ground,) = answer["grounds"]
    assert ground["mixing_model"]["name"] == "topp-1980"
    assert answer["units"]["water_content"] == "m3/m3"


def test_hourly_means_keep_what_is_shared(day):
    bins = ask(day, probe="p1", every="1h").json()["estimates"]
    rows = ask(day, probe="p1").json()["estimates"]
    assert len(bins) == 24
    for i, row in enumerate(bins):
        expected = [topp(v) for v in VALUES[4 * i : 4 * i + 4]]
        assert row["water_content"] == pytest.approx(sum(expected) / 4, abs=1e-12)
        assert row["water_content_minimum"] == pytest.approx(min(expected), abs=1e-12)
        assert row["water_content_last"] == pytest.approx(expected[-1], abs=1e-12)
        assert (row["count"], row["coverage_fraction"]) == (4, 1.0)
        shared = sum(r["water_content_u_shared"] for r in rows[4 * i : 4 * i + 4]) / 4
        assert row["water_content_u_shared"] == pytest.approx(shared, rel=1e-9)
        own = [r["water_content_u"] ** 2 - r["water_content_u_shared"] ** 2
               for r in rows[4 * i : 4 * i + 4]]  # fmt: skip
        u = (shared**2 + sum(own) / 16) ** 0.5
        assert row["water_content_u"] == pytest.approx(u, rel=1e-6)


def test_days_are_those_of_the_zone(day):
    berlin = ask(day, probe="p1", every="1d").json()
    assert berlin["zone"] == "Europe/Berlin"
    assert [(row["time"], row["count"]) for row in berlin["estimates"]] == [
        ("2026-05-03T22:00:00Z", 88), ("2026-05-04T22:00:00Z", 8),
    ]  # fmt: skip
    utc = ask(day, probe="p1", every="1d", zone="UTC").json()["estimates"]
    assert [(row["time"], row["count"]) for row in utc] == [("2026-05-04T00:00:00Z", 96)]


def test_pages_hold_every_row_once_and_keep_the_question(day):
    for own in ({}, {"every": "15m", "zone": "UTC"}):
        found, address = [], "/v1/stations/asked/estimates"
        words = {**DAY, **own, "limit": 50, "units": "water_content:%", "format": "json"}
        while address:
            answer = day.get(address, params=words)
            found += answer.json()["estimates"]
            address = answer.links.get("next", {}).get("url")
            assert address is None or "units=" in address
            words = None
        keys = [(row["time"], row["probe"]) for row in found]
        assert len(keys) == len(set(keys)) == 192
        assert found[0]["water_content"] == pytest.approx(100 * topp(VALUES[0]))


def test_every_format_tells_the_same(day):
    rows = ask(day, probe="p1").json()["estimates"]
    columns = ask(day, probe="p1", shape="columns").json()["estimates"]
    lines = [json.loads(line) for line in ask(day, probe="p1", format="ndjson").text.splitlines()]
    arrow = pl.read_ipc_stream(io.BytesIO(ask(day, probe="p1", format="arrow").content))
    text = ask(day, probe="p1", format="csv").content
    csv = pl.read_csv(text)
    assert lines == rows
    assert arrow.to_dicts() == rows
    for name in ("time", "water_content", "water_content_upper"):
        assert columns[name] == csv[name].to_list() == [row[name] for row in rows]
    assert b'""' not in text


def test_an_answer_about_a_time_that_is_over_is_304_until_something_changes(day):
    put(day, "soil", "tagged-loam", {"texture": "loam", "bulk_density": 1.4})
    body = {"installations": [{"probe": "p1", "soil": "tagged-loam", "depth": 0.2}]}
    put(day, "station", "tagged", body)
    post(day, [reading(0), reading(15)], "tagged")
    address, words = "/v1/stations/tagged/estimates", dict(DAY)

    def again(tag):
        return day.get(address, params=words, headers={"If-None-Match": tag})

    tag = day.get(address, params=words).headers["etag"]
    assert again(tag).status_code == 304
    post(day, [reading(7)], "tagged")
    late = again(tag)
    assert late.status_code == 200
    assert again(late.headers["etag"]).status_code == 304
    soil = {"texture": "loam", "bulk_density": 1.5}
    put(day, "soil", "tagged-loam", soil, **{"If-Match": "*"})
    assert again(late.headers["etag"]).status_code == 200
    assert "etag" not in day.get(address).headers


def test_a_better_calibration_corrects_the_whole_record_and_the_old_answer_stays(day):
    put(day, "soil", "site", {"mixing_model": "topp-1980"})
    installed = [{"probe": "p1", "soil": "site", "depth": 0.2}]
    put(day, "station", "site", {"installations": installed})
    post(day, [reading(15 * i, v) for i, v in enumerate(VALUES)], "site")
    address = "/v1/stations/site/estimates"
    before = day.get(address, params=DAY).json()
    own = {"name": "polynomial", "constant": -0.07, "linear": 0.02, "standard_error": 0.01}
    put(day, "soil", "site", {"mixing_model": own}, **{"If-Match": "*"})
    post(day, [reading(5, 30.0), reading(6, 12.0, temperature=15.0, bulk_conductivity=0.5)], "site")
    after = day.get(address, params=DAY).json()
    expected = {reading(15 * i)["time"]: -0.07 + 0.02 * v for i, v in enumerate(VALUES)}
    found = {r["time"]: r["water_content"] for r in after["estimates"]}
    for time, value in expected.items():
        assert found[time] == pytest.approx(value, abs=1e-12)
    assert len(after["estimates"]) == 98
    words = {**DAY, "at_revision": before["revision"]}
    then = day.get(address, params=words)
    assert then.json() == before
    assert then.content == day.get(address, params=words).content
    hourly = {**words, "every": "1h"}
    assert day.get(address, params=hourly).json() == day.get(address, params=hourly).json()


def test_a_probe_that_moves_is_read_in_the_soil_it_was_in(day):
    put(day, "soil", "clay-soil", {"mixing_model": {"name": "polynomial", "constant": 0.0,
                                                    "linear": 0.01}})  # fmt: skip
    moved = "2026-05-04T12:00:00Z"
    put(day, "station", "moving", {"installations": [
        {"probe": "p1", "soil": "loam", "depth": 0.2, "until": moved},
        {"probe": "p1", "soil": "clay-soil", "depth": 0.5, "from": moved,
         "until": "2026-05-04T18:00:00Z"},
    ]})  # fmt: skip
    post(day, [reading(60 * h, 20.0) for h in (11, 12, 18)], "moving")
    answer = day.get("/v1/stations/moving/estimates", params=DAY).json()
    first, second, third = answer["estimates"]
    assert (first["depth"], second["depth"], third["depth"]) == (0.2, 0.5, None)
    assert first["water_content"] == pytest.approx(topp(20.0))
    assert second["water_content"] == pytest.approx(0.2)
    assert (third["water_content"], third["flags"]) == (None, ["not-estimated"])
    assert "no one installation" in answer["advisories"][0]["text"]


def test_readings_that_name_a_depth_are_those_of_the_probe_there(day):
    furnish(day, "by-depth")
    rows = [{**reading(0, 20.0), "probe": None, "depth": d} for d in (0.2, 0.4, 0.9)]
    assert post(day, rows, "by-depth").json()["accepted"] == 3
    found = day.get("/v1/stations/by-depth/estimates", params=DAY).json()["estimates"]
    assert [row["water_content"] for row in found] == pytest.approx([topp(20)] * 2 + [None])
    one = day.get("/v1/stations/by-depth/readings", params={"depth": "0.40"}).json()["readings"]
    assert [row["depth"] for row in one] == [0.4]


def test_a_profile_is_the_last_of_each_depth(day):
    words = {"time": "2026-05-04T06:10:00Z"}
    answer = day.get("/v1/stations/asked/profile", params=words).json()
    assert [(r["depth"], r["time"], r["age_seconds"]) for r in answer["profile"]] == [
        (0.2, "2026-05-04T06:00:00Z", 600.0), (0.4, "2026-05-04T06:00:00Z", 600.0),
    ]  # fmt: skip
    words = {"time": "2026-05-06T00:00:00Z", "within": "1h"}
    assert day.get("/v1/stations/asked/profile", params=words).json()["profile"] == []


def test_the_latest_of_all_stations_come_in_one_answer(day):
    rows = day.get("/v1/latest").json()["latest"]
    last = {(r["station"], r["probe"]): r for r in rows}
    assert last["asked", "p2"]["time"] == "2026-05-04T23:45:00Z"
    assert last["asked", "p2"]["water_content"] == pytest.approx(topp(VALUES[-1]))
    places = day.get("/v1/stations.geojson")
    assert places.headers["content-type"] == "application/geo+json"
    (asked,) = [f for f in places.json()["features"] if f["id"] == "asked"]
    assert asked["geometry"] == {"type": "Point", "coordinates": [9.9, 51.5]}
    assert len(asked["properties"]["latest"]) == 2


def test_a_raw_record_is_kept_with_its_reading(day):
    put(day, "station", "traces", {})
    trace = {"samples": [0.1, -0.25, 0.5] * 300, "window": 2.0}
    row = {"time": "2026-05-04T06:00:00Z", "probe": "p1", "waveform": trace}
    assert post(day, [row], "traces").json()["accepted"] == 1
    assert post(day, [row], "traces").json()["duplicates"] == 1
    (kept,) = day.get("/v1/stations/traces/readings").json()["readings"]
    assert json.loads(kept["raw_record"]) == {"waveform": trace}


@pytest.mark.parametrize(
    ("what", "query", "status", "pointer"),
    [
        ("estimates", "every=2h", 422, "?every"),
        ("estimates", "every=1h&zone=Mars", 422, None),
        ("estimates", "start=2026-05-04", 422, "?start"),
        ("estimates", "limit=0", 422, "?limit"),
        ("estimates", "limit=999999999", 422, "?limit"),
        ("estimates", "after=%00", 400, None),
        ("estimates", "after=MTIz", 400, None),
        ("estimates", "probe=p9", 422, "?probe"),
        ("estimates", "probe=p1'%20OR%201=1", 422, "?probe"),
        ("estimates", "depth=1;DROP", 422, "?depth"),
        ("estimates", "start=2026-05-04T00:00:00Z&start=2026-05-05T00:00:00Z", 422, "?start"),
        ("estimates", "mixing_modl=crim", 422, "?mixing_modl"),
        ("estimates", "at_revision=-1", 422, "?at_revision"),
        ("estimates", "at_revision=99999999", 422, "?at_revision"),
        ("estimates", "format=xml", 406, None),
        ("readings", "mixing_model=crim", 422, "?mixing_model"),
        ("profile", "within=soon", 422, "?within"),
        ("chart.svg", "quantity=colour", 422, "?quantity"),
        ("chart.svg", "start=2026-05-05T00:00:00Z&end=2026-05-04T00:00:00Z", 422, None),
    ],
)
def test_a_question_that_cannot_be_answered_says_where(day, what, query, status, pointer):
    answer = day.get(f"/v1/stations/asked/{what}?{query}")
    assert answer.status_code == status, answer.text
    assert answer.headers["content-type"] == "application/problem+json"
    if pointer:
        assert pointer in [error["pointer"] for error in answer.json()["errors"]]


@pytest.mark.parametrize("what", ["estimates", "readings", "profile", "chart.svg", "conflicts"])
def test_a_station_without_readings_or_none_at_all(day, what):
    put(day, "station", "silent", {})
    assert day.get(f"/v1/stations/silent/{what}").status_code == 200
    assert day.get(f"/v1/stations/slient/{what}").status_code == 404


@pytest.fixture(scope="module")
def salty(client):
    """Readings whose bands are lopsided: wet soil, and salt that loss leaves open."""
    furnish(client, "salty")
    rows = [reading(15 * i, 12.0 + i / 3, temperature=15.0, bulk_conductivity=0.2 + i / 50)
            for i in range(96)]  # fmt: skip
    assert post(client, rows, "salty").json()["accepted"] == 96
    return client


NAMES = ("water_content", "pore_water_conductivity", "bulk_conductivity_25")


@pytest.mark.parametrize("mean", ["plain", "time-weighted"])
def test_a_mean_has_the_band_of_its_readings(salty, mean):
    address = "/v1/stations/salty/estimates"
    rows = salty.get(address, params=DAY).json()["estimates"]
    for every, count in (("15m", 1), ("1h", 4), ("1d", 96)):
        words = {**DAY, "every": every, "zone": "UTC", "mean": mean}
        bins = salty.get(address, params=words).json()["estimates"]
        assert len(bins) == 96 // count
        for place, found in enumerate(bins):
            of_bin = rows[place * count : (place + 1) * count + (mean != "plain")]
            for name in NAMES:
                if found[name] is None:
                    continue
                lower = [row[f"{name}_lower"] for row in of_bin]
                upper = [row[f"{name}_upper"] for row in of_bin]
                assert min(lower) <= found[f"{name}_lower"] <= found[name]
                if None in upper:
                    assert found[f"{name}_upper"] is None
                else:
                    assert found[name] <= found[f"{name}_upper"] <= max(upper)
                if count == 1 and mean == "plain":
                    ends = (found[f"{name}_lower"], found[f"{name}_upper"])
                    assert ends == pytest.approx((lower[0], upper[0]), rel=1e-12)
