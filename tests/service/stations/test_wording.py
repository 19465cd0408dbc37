"""Words of an estimate in a question about stored readings: heeded, or refused as POST refuses."""

import pytest

from tests.service.stations.farm import furnish, post, put, reading, topp

WHEN = {"start": "2026-05-04T00:00:00Z", "end": "2026-05-05T00:00:00Z"}


@pytest.fixture(scope="module")
def worded(client):
    furnish(client, "worded")
    rows = [reading(15 * i, 12.0 + i, temperature=15.0, bulk_conductivity=0.4) for i in range(8)]
    assert post(client, rows, "worded").json()["accepted"] == 8
    return client


def ask(client, query, what="estimates"):
    return client.get(f"/v1/stations/worded/{what}?{query}")


@pytest.mark.parametrize("what", ["estimates?every=1d&", "estimates?limit=1&", "profile?",
                                  "chart.svg?"])  # fmt: skip
@pytest.mark.parametrize(
    ("words", "place"),
    [
        ("mixing_model=nope", "?mixing_model"),
        ("mixing_model=", "?mixing_model"),
        ("mixing_model=all", "?mixing_model"),
        ("pore_water_model=x", "?pore_water_model"),
        ("texture=loamy", "?texture"),
        ("soil=nowhere", "?soil"),
        ("propagation=foo", "?propagation"),
        ("standard_error=-1", "?standard_error"),
        ("coverage_probability=95", "?coverage_probability"),
        ("assume_temperature=400", "?assume_temperature"),
        ("bulk_density=1420", "?bulk_density"),
        ("probe_length=300", "?probe_length"),
        ("apparent_permittivity_u=-1", "?apparent_permittivity_u"),
        ("units=bulk_conductivity:mS/m", "?units"),
    ],
)
def test_a_word_that_cannot_be_used_is_refused_where_it_stands(worded, what, words, place):
    answer = worded.get(f"/v1/stations/worded/{what}{words}")
    assert answer.status_code == 422, answer.text
    assert [error["pointer"] for error in answer.json()["errors"]] == [place]


def test_a_word_no_soil_of_the_station_can_be_estimated_with_is_refused(worded):
    put(worded, "soil", "bare", {"mixing_model": "topp-1980"})
    put(worded, "station", "bare", {"installations": [{"probe": "p1", "soil": "bare",
                                                       "depth": 0.2}]})  # fmt: skip
    post(worded, [reading(0)], "bare")
    answer = worded.get("/v1/stations/bare/estimates?mixing_model=crim")
    assert answer.status_code == 422
    assert "porosity" in answer.json()["detail"]
    assert worded.get("/v1/stations/bare/estimates").status_code == 200


def test_means_of_readings_that_cannot_be_estimated_are_bins_without_a_number(worded):
    put(worded, "station", "unplaced", {})
    post(worded, [reading(0), reading(15)], "unplaced")
    answer = worded.get("/v1/stations/unplaced/estimates", params={**WHEN, "every": "1d"})
    assert answer.status_code == 200
    (row,) = answer.json()["estimates"]
    assert (row["water_content"], row["count"], row["flagged_count"]) == (None, 0, 2)
    assert row["flags"] == ["not-estimated"]
    csv = worded.get("/v1/stations/unplaced/estimates",
                     params={**WHEN, "every": "1d", "format": "csv"})  # fmt: skip
    assert len(csv.text.splitlines()) == 2


@pytest.mark.parametrize(
    "query", ["probe=p2", "start=2025-01-01T00:00:00Z&end=2025-02-01T00:00:00Z"]
)
def test_means_where_nothing_was_read_are_none(worded, query):
    answer = ask(worded, f"every=1d&{query}")
    assert (answer.status_code, answer.json()["estimates"]) == (200, [])


def test_a_stored_soil_can_stand_in_place_of_the_installed_one(worded):
    own = {"name": "polynomial", "constant": 0.0, "linear": 0.01, "standard_error": 0.01}
    put(worded, "soil", "other-soil", {"mixing_model": own})
    for what, key in (("estimates", "estimates"), ("profile", "profile")):
        query = "soil=other-soil&limit=1" if what == "estimates" else (
            "soil=other-soil&time=2026-05-04T00:10:00Z")  # fmt: skip
        answer = ask(worded, query, what).json()
        assert answer[key][0]["water_content"] == pytest.approx(0.12, abs=1e-3)
        assert answer["grounds"][0]["soil_name"] == "other-soil"
    assert ask(worded, "soil=other-soil", "chart.svg").status_code == 200


def test_a_standard_error_replaces_that_of_the_stored_model(worded):
    plain, exact = (ask(worded, f"limit=1{more}").json() for more in ("", "&standard_error=0"))
    assert exact["grounds"][0]["mixing_model"]["name"] == "topp-1980"
    assert exact["estimates"][0]["water_content"] == pytest.approx(topp(12.0), abs=1e-3)
    widths = [answer["estimates"][0]["water_content_u"] for answer in (exact, plain)]
    assert widths[0] < 0.5 * widths[1]


def test_words_in_another_unit_are_read_in_it(worded):
    queries = ("bulk_density=1.5", "bulk_density=1500&units=bulk_density:kg/m3")
    one, other = (ask(worded, f"limit=1&{query}").json()["estimates"] for query in queries)
    assert one == other


@pytest.mark.parametrize(
    ("query", "told"),
    [
        ("startt=2026-05-04T00:00:00Z", "did you mean start?"),
        ("strict=maybe", "it takes start, end"),
        ("quantity=water_content", "it takes start, end"),
        ("columns=theta", "no answer has a column"),
        ("zone=+02:00", "%2B"),
        ("depth=0.5", "it has 0.2 m, 0.4 m"),
        ("probe=p9", "it has p1, p2"),
    ],
)
def test_a_parameter_that_is_not_heeded_is_refused_with_what_is(worded, query, told):
    answer = ask(worded, query)
    assert answer.status_code == 422
    (error,) = answer.json()["errors"]
    assert told in error["detail"]
    assert not answer.json()["detail"].startswith("?zone: zone:")


def test_only_the_columns_asked_for_are_answered(worded):
    (row,) = ask(worded, "limit=1&columns=water_content").json()["estimates"]
    assert list(row) == ["time", "probe", "depth", "water_content", "flags"]
    (bin_,) = ask(worded, "every=1d&zone=UTC&columns=count,water_content_u").json()["estimates"]
    assert set(bin_) == {"time", "end", "probe", "depth", "count", "water_content_u", "flags"}


def test_a_time_that_was_widened_to_whole_days_is_told(worded):
    query = "every=1d&zone=UTC&start=2026-05-04T00:30:00Z&end=2026-05-04T01:00:00Z"
    answer = ask(worded, query).json()
    assert answer["estimates"][0]["count"] == 8
    (said,) = [one for one in answer["advisories"] if one["code"] == "whole-intervals"]
    assert "start 2026-05-04T00:30:00Z became 2026-05-04T00:00:00Z" in said["text"]
    whole = ask(worded, f"every=1d&zone=UTC&start={WHEN['start']}&end={WHEN['end']}").json()
    assert not [one for one in whole["advisories"] if one["code"] == "whole-intervals"]


def test_a_depth_stands_for_the_probe_that_was_there(worded):
    every = ask(worded, "probe=p1").json()["estimates"]
    assert ask(worded, "depth=0.2").json()["estimates"] == every
    assert ask(worded, "depth=0.4").json()["estimates"] == []
    moved = "2026-05-04T01:00:00Z"
    put(worded, "station", "shifted", {"installations": [
        {"probe": "p1", "soil": "loam", "depth": 0.2, "until": moved},
        {"probe": "p1", "soil": "loam", "depth": 0.6, "from": moved}]})  # fmt: skip
    post(worded, [reading(0), reading(60), reading(75)], "shifted")
    for depth, count in ((0.2, 1), (0.6, 2)):
        for query in (f"depth={depth}", f"depth={depth}&every=1d&columns=count"):
            rows = worded.get(f"/v1/stations/shifted/estimates?{query}").json()["estimates"]
            assert sum(row.get("count", 1) for row in rows) == count
        assert {row["depth"] for row in rows} == {depth}


def test_a_table_holds_more_rows_than_a_page_and_says_when_some_are_left(client):
    furnish(client, "long")
    rows = [{**reading(0), "time": f"2026-05-0{1 + i // 1440}T{i // 60 % 24:02}:{i % 60:02}:00Z"}
            for i in range(1500)]  # fmt: skip
    assert post(client, rows, "long").json()["accepted"] == 1500
    table = client.get("/v1/stations/long/estimates?format=csv")
    assert (len(table.text.splitlines()), "truncated" in table.headers) == (1501, False)
    page = client.get("/v1/stations/long/estimates")
    assert (len(page.json()["estimates"]), page.headers["truncated"]) == (1000, "true")
    cut = client.get("/v1/stations/long/readings?format=ndjson&limit=7")
    assert (cut.headers["row-count"], cut.headers["truncated"]) == ("7", "true")
