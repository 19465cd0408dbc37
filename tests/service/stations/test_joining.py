"""One sensor, however its readings name it: by its probe or by the depth it is at."""

import pytest

from tests.service.stations.farm import put, reading, topp


@pytest.fixture(scope="module")
def mixed(client):
    """A probe whose readings name it by turns, then move; another that is at the depth after it."""
    put(client, "soil", "joined", {"mixing_model": "topp-1980"})
    for probe in ("j1", "j2"):
        put(client, "probe", probe, {})
    noon = "2026-05-04T12:00:00Z"
    installations = [
        {"probe": "j1", "soil": "joined", "depth": 0.2, "until": noon},
        {"probe": "j2", "soil": "joined", "depth": 0.2, "from": noon},
        {"probe": "j1", "soil": "joined", "depth": 0.5, "from": noon},
    ]
    put(client, "station", "mixed", {"installations": installations})
    rows = []
    for hour in range(8, 16):
        named = {"probe": "j1"} if hour % 2 else {"probe": None, "depth": 0.2}
        rows.append({**reading(60 * hour, 10.0 + hour), **named})
    answer = client.post("/v1/stations/mixed/readings", json={"readings": rows})
    assert answer.json()["accepted"] == 8, answer.text
    return client


def ask(client, what="estimates", **words):
    answer = client.get(f"/v1/stations/mixed/{what}", params=words)
    assert answer.status_code == 200, answer.text
    return answer


def test_rows_that_name_a_depth_are_told_with_the_probe_that_was_there(mixed):
    rows = ask(mixed).json()["estimates"]
    found = {row["time"][11:13]: (row["probe"], row["depth"]) for row in rows}
    expected = {f"{h:02}": ("j1", 0.2) for h in range(8, 12)}
    expected |= {"12": ("j2", 0.2), "14": ("j2", 0.2), "13": ("j1", 0.5), "15": ("j1", 0.5)}
    assert found == expected


def test_means_are_of_the_sensor(mixed):
    bins = ask(mixed, every="1d", zone="UTC").json()["estimates"]
    count = {(row["probe"], row["depth"]): row["count"] for row in bins}
    assert count == {("j1", 0.5): 6, ("j2", 0.2): 2}
    hours = ask(mixed, every="1h", zone="UTC").json()["estimates"]
    (row,) = [r for r in hours if r["time"] == "2026-05-04T10:00:00Z"]
    assert (row["probe"], row["depth"]) == ("j1", 0.2)
    assert row["water_content"] == pytest.approx(topp(20.0))


def test_the_last_values_and_the_chart_show_no_second_sensor(mixed):
    rows = [row for row in mixed.get("/v1/latest").json()["latest"] if row["station"] == "mixed"]
    found = [(row["probe"], row["depth"], row["time"][11:13]) for row in rows]
    assert found == [("j2", 0.2, "14"), ("j1", 0.5, "15")]
    words = {"time": "2026-05-04T11:30:00Z", "within": "6h"}
    profile = ask(mixed, "profile", **words).json()["profile"]
    assert [(row["probe"], row["depth"], row["time"][11:13]) for row in profile] == [
        ("j1", 0.2, "11")
    ]
    chart = ask(mixed, "chart.svg", start="2026-05-04T07:00:00Z", end="2026-05-04T12:00:00Z").text
    assert f"0.20 m: {topp(18):.3g} to {topp(21):.3g} m3/m3; 4 readings, 0 flagged, 0 gaps" in chart
    features = mixed.get("/v1/stations.geojson").json()["features"]
    (place,) = [f for f in features if f["id"] == "mixed"]
    assert len(place["properties"]["latest"]) == 2


def test_a_moment_that_came_by_both_names_counts_once(mixed):
    installations = [{"probe": "j1", "soil": "joined", "depth": 0.2}]
    put(mixed, "station", "twice", {"installations": installations})
    rows = [reading(0, 20.0, "j1"), {**reading(0, 20.0), "probe": None, "depth": 0.2}]
    mixed.post("/v1/stations/twice/readings", json={"readings": rows})
    (row,) = mixed.get("/v1/stations/twice/estimates?every=1h").json()["estimates"]
    assert (row["probe"], row["count"]) == ("j1", 1)


def test_where_two_probes_are_at_a_depth_none_is_guessed(mixed):
    installations = [{"probe": p, "soil": "joined", "depth": 0.2} for p in ("j1", "j2")]
    put(mixed, "station", "crowded", {"installations": installations})
    rows = [reading(0, 20.0, "j1"), {**reading(15, 20.0), "probe": None, "depth": 0.2}]
    mixed.post("/v1/stations/crowded/readings", json={"readings": rows})
    rows = mixed.get("/v1/stations/crowded/estimates").json()["estimates"]
    assert [(row["probe"], row["flags"]) for row in rows] == [("j1", []), (None, ["not-estimated"])]
