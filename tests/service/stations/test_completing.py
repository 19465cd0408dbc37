"""Readings that come in parts: what is lacking is added, what contradicts is a conflict."""

from datetime import UTC, datetime

import pytest

from tests.service.stations.farm import post, put, reading, topp

SENML = {"Content-Type": "application/senml+json"}
TIME = "2026-05-04T00:00:00Z"
BASE = int(datetime(2026, 5, 4, tzinfo=UTC).timestamp())


@pytest.fixture
def station(client, request):
    put(client, "soil", "in-parts", {"mixing_model": "topp-1980"})
    name = f"parts-{abs(hash(request.node.nodeid)) % 10**9}"
    body = {"installations": [{"probe": "p1", "soil": "in-parts", "depth": 0.2}]}
    assert put(client, "station", name, body).status_code == 201
    return name


def counts(answer):
    assert answer.status_code == 200, answer.text
    told = answer.json()
    return (told["accepted"], told["completed"], told["duplicates"], len(told["conflicts"]))


def kept(client, station, **words):
    rows = client.get(f"/v1/stations/{station}/readings", params=words).json()["readings"]
    return [(r.get("apparent_permittivity"), r.get("temperature")) for r in rows]


def test_an_empty_reading_does_not_stand_in_the_way_of_its_value(client, station):
    assert counts(post(client, [reading(0, None)], station)) == (1, 0, 0, 0)
    before = client.get(f"/v1/stations/{station}/estimates").json()
    assert before["estimates"][0].get("water_content") is None
    assert counts(post(client, [reading(0, 17.2)], station)) == (0, 1, 0, 0)
    assert counts(post(client, [reading(0, None)], station)) == (0, 0, 1, 0)
    assert counts(post(client, [reading(0, 18.0)], station)) == (0, 0, 0, 1)
    (row,) = client.get(f"/v1/stations/{station}/estimates").json()["estimates"]
    assert row["water_content"] == pytest.approx(topp(17.2))
    words = {"at_revision": before["revision"]}
    assert client.get(f"/v1/stations/{station}/estimates", params=words).json() == before


def test_the_other_half_of_a_reading_completes_it_and_the_earlier_answer_stays(client, station):
    assert counts(post(client, [reading(0, 17.2)], station)) == (1, 0, 0, 0)
    first = client.get(f"/v1/stations/{station}/readings").json()["revision"]
    half = {"time": TIME, "probe": "p1", "temperature": 14.0}
    assert counts(post(client, [half], station)) == (0, 1, 0, 0)
    assert counts(post(client, [half, reading(0, 17.2)], station)) == (0, 0, 2, 0)
    assert kept(client, station) == [(17.2, 14.0)]
    assert kept(client, station, at_revision=first) == [(17.2, None)]
    other = {**half, "temperature": 15.0, "bulk_conductivity": 0.4}
    assert counts(post(client, [other], station)) == (0, 0, 0, 1)
    assert kept(client, station) == [(17.2, 14.0)]


def test_completing_changes_the_tag_of_a_closed_time(client, station):
    post(client, [reading(0, 17.2)], station)
    words = {"start": TIME, "end": "2026-05-05T00:00:00Z"}
    address = f"/v1/stations/{station}/estimates"
    tag = client.get(address, params=words).headers["etag"]
    post(client, [reading(0, 17.2, temperature=14.0)], station)
    again = client.get(address, params=words, headers={"If-None-Match": tag})
    assert again.status_code == 200


@pytest.mark.parametrize("form", ["csv", "ndjson"])
def test_tables_complete_as_well(client, station, form):
    post(client, [reading(0, 17.2), reading(15, 17.3)], station)
    rows = [(TIME, "p1", 14.0), ("2026-05-04T00:15:00Z", "p1", 14.5)]
    if form == "csv":
        text = "time,probe,temperature\n" + "".join(f"{t},{p},{v}\n" for t, p, v in rows)
        media_type = "text/csv"
    else:
        text = "".join(f'{{"time":"{t}","probe":"{p}","temperature":{v}}}\n' for t, p, v in rows)
        media_type = "application/x-ndjson"
    sent = {"content": text, "headers": {"Content-Type": media_type}}
    answer = client.post(f"/v1/stations/{station}/readings", **sent)
    assert counts(answer) == (0, 2, 0, 0)
    assert kept(client, station) == [(17.2, 14.0), (17.3, 14.5)]


@pytest.mark.parametrize("order", [1, -1])
def test_records_of_one_moment_in_a_pack_are_one_reading(client, station, order):
    pack = [
        {"n": "p1/apparent_permittivity", "u": "/", "v": 17.2, "t": BASE},
        {"n": "p1/apparent_permittivity", "u": "/", "v": 17.3, "t": BASE + 900},
        {"n": "p1:temperature", "u": "K", "v": 287.15, "t": BASE + 900},
        {"n": f"{station}/p1/temperature", "u": "Cel", "v": 13.0, "t": BASE},
    ][::order]
    answer = client.post(f"/v1/stations/{station}/readings", json=pack, headers=SENML)
    assert counts(answer) == (2, 0, 0, 0)
    assert kept(client, station) == [(17.2, 13.0), (17.3, pytest.approx(14.0))]


def test_packs_that_bring_one_quantity_each_make_one_reading(client, station):
    packs = [
        [{"bn": "p1/", "bt": BASE, "n": "apparent_permittivity", "u": "/", "v": 17.2}],
        [{"bn": "p1/", "bt": BASE + 100, "n": "temperature", "u": "Cel", "v": 14, "t": -100}],
    ]
    address = f"/v1/stations/{station}/readings"
    found = [counts(client.post(address, json=pack, headers=SENML)) for pack in packs * 2]
    assert found == [(1, 0, 0, 0), (0, 1, 0, 0), (0, 0, 1, 0), (0, 0, 1, 0)]
    assert kept(client, station) == [(17.2, 14.0)]


def test_one_depth_is_one_place_however_it_is_written(client, station):
    pack = [
        {"bt": BASE, "n": "0.2/apparent_permittivity", "u": "/", "v": 17.2},
        {"n": "0.20/temperature", "u": "Cel", "v": 14},
        {"n": "0.20/temperature", "u": "Cel", "v": 14},
    ]
    answer = client.post(f"/v1/stations/{station}/readings", json=pack, headers=SENML)
    assert counts(answer) == (1, 0, 0, 0)
    assert kept(client, station) == [(17.2, 14.0)]
