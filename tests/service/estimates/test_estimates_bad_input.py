"""Wrong input of every kind: a problem that says how to mend it, or a flag; never a 500."""

import csv
import io

import pytest

READING = {"apparent_permittivity": 17.2, "temperature": 14.1}


def ask(server, **changes):
    request = {"mixing_model": "crim", "soil": {"texture": "loam"}, "readings": [READING]}
    return server.client.post("/v1/estimates", json=request | changes)


def told(answer, status):
    """Every sentence of a problem, as one text."""
    assert answer.status_code == status, answer.text
    assert answer.headers["Content-Type"] == "application/problem+json"
    problem = answer.json()
    assert problem["status"] == status
    assert problem["request_id"] == answer.headers["X-Request-Id"]
    assert len(answer.content) < 16_000
    places = [item["pointer"] for item in problem.get("errors", [])]
    return problem["detail"] + " ".join(e["detail"] for e in problem.get("errors", [])), places


@pytest.mark.parametrize(
    ("changes", "sentence", "place"),
    [
        ({"soil": {"clay": 22, "porosity": 0.45}}, "looks like %; send 0.22", "#/soil/clay"),
        ({"soil": {"bulk_density": 1420}}, "looks like kg/m3; send 1.42", "#/soil/bulk_density"),
        ({"mixing_model": "crimm"}, 'no mixing model is called "crimm"; did you mean crim?',
         "#/mixing_model"),
        ({"soil": {}}, "needs porosity", "#/soil/porosity"),
        ({"soil": {"texture": "lome"}}, 'no soil texture is called "lome"; did you mean loam?',
         "#/soil/texture"),
        ({"soil": {"texture": "loam", "cly": 0.2}}, "did you mean clay?", "#/soil/cly"),
        ({"soil": {"texture": "loam", "clay": True}}, "expected a number, found true",
         "#/soil/clay"),
        ({"soil": {"texture": "loam", "clay": "0.2"}}, 'expected a number, found "0.2"',
         "#/soil/clay"),
        ({"soil": {"sand": 0.7, "silt": 0.2, "clay": 0.3, "porosity": 0.4}}, "add up to 1",
         "#/soil"),
        ({"soil": {"texture": "loam", "clay_u": -0.1}}, "at least 0", "#/soil/clay_u"),
        ({"soil": {"porosity": 0.45, "clay_u": 0.1}}, "clay_u stands without clay",
         "#/soil/clay_u"),
        ({"soils": {}}, "did you mean soil?", "#/soils"),
        ({"readings": [READING, {"apparent_permittivity": True}]}, "found true",
         "#/readings/1/apparent_permittivity"),
        ({"readings": [{"apparent_permittivity": "1.5"}]}, 'found "1.5"',
         "#/readings/0/apparent_permittivity"),
        ({"readings": [{"aparent_permittivity": 17.0}]}, "did you mean apparent_permittivity?",
         "#/readings/0/aparent_permittivity"),
        ({"readings": {"apparent_permittivity": [17.0, 18.0], "temperature": [14.0]}},
         "equal length", "#/readings/temperature"),
        ({"readings": []}, "at least one reading", "#/readings"),
        ({"readings": 17.2}, "a list of objects or one object of arrays", "#/readings"),
        ({"readings": [17.2]}, "expected an object", "#/readings/0"),
        ({"readings": {"apparent_permittivity": 17.2}}, "expected a list",
         "#/readings/apparent_permittivity"),
        ({"readings": [{"temperature": 14.0}]}, "carries one of apparent_permittivity",
         "#/readings"),
        ({"readings": [{"travel_time": 9.0}]}, "give probe.probe_length", "#/probe"),
        ({"units": {"temperature": "dS/m"}}, "takes Cel, K, [degF]", "#/units/temperature"),
        ({"units": {"warmth": "K"}}, "no quantity with a unit", "#/units/warmth"),
        ({"coverage_probability": 95}, "at most 0.999", "#/coverage_probability"),
        ({"propagation": {"method": "guess"}}, "first-order", "#/propagation/method"),
        ({"mixing_model": {"name": "power-law", "exponent": 7}}, "takes exponent in",
         "#/mixing_model/exponent"),
        ({"mixing_model": {"name": "crim", "exponnent": 0.4}}, "takes no exponnent",
         "#/mixing_model/exponnent"),
        ({"mixing_model": {"name": "crim", "standard_error": -1}}, "at least 0",
         "#/mixing_model/standard_error"),
        ({"mixing_model": {"name": "crim", "revision": 9}}, "revision 9 of crim is not here",
         "#/mixing_model/revision"),
        ({"mixing_model": {"name": "square-root"}}, "needs slope", "#/mixing_model/slope"),
        ({"probe": {"frequency": 800}}, "looks like MHz", "#/probe/frequency"),
    ],
)  # fmt: skip
def test_a_request_that_cannot_be_used_says_how_to_mend_it(server, changes, sentence, place):
    text, places = told(ask(server, **changes), 422)
    assert sentence in text
    if place is not None:
        assert place in places


@pytest.mark.parametrize(
    "body",
    ['{"readings": [{"apparent_permittivity": NaN}]}',
     '{"readings": [{"apparent_permittivity": Infinity}]}',
     '{"readings": [{"apparent_permittivity": 1e999}]}',
     '{"readings": [{"apparent_permittivity": 1' + "0" * 400 + "}]}",
     '{"readings"', "", "[" * 100_000, '{"readings": "\ud83d'],
)  # fmt: skip
def test_what_is_not_json_is_malformed(server, body):
    answer = server.client.post(
        "/v1/estimates", content=body.encode("utf-8", "surrogatepass"),
        headers={"Content-Type": "application/json"},
    )  # fmt: skip
    text, _ = told(answer, 400)
    assert "not JSON" in text


def test_nan_is_told_to_be_null(server):
    answer = server.client.post(
        "/v1/estimates", content=b'{"readings": [{"apparent_permittivity": NaN}]}',
        headers={"Content-Type": "application/json"},
    )  # fmt: skip
    assert "send null" in told(answer, 400)[0]


@pytest.mark.parametrize("cell", [-9999, 0.5, 250])
def test_an_impossible_permittivity_is_a_flag_and_no_number(server, cell):
    reading = {"apparent_permittivity": cell, "temperature": 14.0}
    row = ask(server, readings=[reading]).json()["estimates"][0]
    assert "out-of-gate:apparent_permittivity" in row["flags"]
    assert row["water_content"] is None


@pytest.mark.parametrize(("warmth", "unit"), [(287.2, "K"), (68.0, "[degF]")])
def test_kelvin_and_fahrenheit_are_suspected_aloud(server, warmth, unit):
    readings = [{"apparent_permittivity": 17.2, "temperature": warmth}] * 3
    answer = ask(server, readings=readings).json()
    assert all("out-of-gate:temperature" in row["flags"] for row in answer["estimates"])
    said = {a["code"]: a["text"] for a in answer["advisories"]}
    assert unit in said["unit-suspected"]
    assert "3 values of temperature" in said["unit-suspected"]


def test_a_permittivity_above_that_of_water_is_a_flag(server):
    row = ask(server, readings=[{"apparent_permittivity": 86.0, "temperature": 20.0}]).json()
    assert "permittivity-above-water" in row["estimates"][0]["flags"]


def batch(server, body, query="mixing_model=crim&texture=loam", media_type="text/csv"):
    return server.client.post(
        f"/v1/estimates?{query}", content=body, headers={"Content-Type": media_type}
    )


GOOD = b"apparent_permittivity,temperature\n17.2,14.1\n"


@pytest.mark.parametrize(
    ("body", "status", "sentence"),
    [
        (b"apparent_permittivity;temperature\n17,2;14,1\n", 422, "commas between the cells"),
        (b"time,temperature\n2026-05-04T06:00:00Z,14.1\n", 422, "apparent_permittivity"),
        (b"17.2,14.1\n", 422, "first line must name the columns"),
        (b"apparent_permittivity,porosity\n17.2,0.45\n", 422, "give it in the query"),
        (b"apparent_permittivity,flags\n17.2,x\n", 422, "rename yours"),
        (b"apparent_permittivity,water_content\n17.2,0.2\n", 422, "rename yours"),
        (b"", 400, "line 1"),
        (b"apparent_permittivity,note\n17.2,\xff\xfe\n", 400, "UTF-8"),
        (b"apparent_permittivity,note\n17.2," + b"x" * (10 << 20) + b"\n", 413, "line 2"),
    ],
)  # fmt: skip
def test_a_table_that_cannot_be_used_says_where_and_why(server, body, status, sentence):
    assert sentence in told(batch(server, body), status)[0]


@pytest.mark.parametrize(
    ("body", "rows"),
    [
        (GOOD, 1),
        (b"\xef\xbb\xbf" + GOOD, 1),
        (GOOD.replace(b"\n", b"\r\n"), 1),
        (b"Apparent_Permittivity , TEMPERATURE\n17.2,14.1", 1),
        (b"apparent_permittivity,temperature\n", 0),
        (b'note,apparent_permittivity,temperature\n"two\nlines, ""quoted""",17.2,14.1\n', 1),
    ],
)
def test_the_shapes_tables_come_in_are_all_read(server, body, rows):
    answer = batch(server, body)
    assert answer.status_code == 200, answer.text
    read = list(csv.DictReader(io.StringIO(answer.text)))
    assert len(read) == rows == int(answer.headers["Row-Count"])
    assert all(abs(float(row["water_content"]) - 0.3126) < 1e-3 for row in read)


def test_strict_names_line_and_column(server):
    body = GOOD + b"17.3,warm\n"
    assert batch(server, body).status_code == 200
    text, _ = told(batch(server, body, "mixing_model=crim&texture=loam&strict=true"), 422)
    assert "line 3" in text
    assert "temperature" in text


@pytest.mark.parametrize(
    ("query", "sentence"),
    [
        ("mixing_model=crim&texture=loam&cly=0.2", "did you mean clay?"),
        ("mixing_model=crim&clay=22&porosity=0.45", "looks like %; send 0.22"),
        ("mixing_model=crim&porosity=0,45", "with a point, not a comma"),
        ("mixing_model=crim&texture=loam&texture=clay", "given twice"),
        ("mixing_model=crim&texture=loam&units=temperature", "quantity:unit pairs"),
        ("mixing_model=crim", "needs porosity"),
        ("mixing_model=crim&texture=loam&strict=yes", "true or false"),
    ],
)
def test_a_query_that_cannot_be_used_says_how_to_mend_it(server, query, sentence):
    assert sentence in told(batch(server, GOOD, query), 422)[0]


def test_a_body_of_another_kind_is_told_what_is_read(server):
    answer = batch(server, GOOD, media_type="application/pdf")
    text, _ = told(answer, 415)
    assert "text/csv" in answer.headers["Accept"]
    assert "application/pdf" in text


def test_a_query_beside_a_json_body_is_not_silently_ignored(server):
    answer = server.client.post("/v1/estimates?mixing_model=crim", json={"readings": [READING]})
    assert "?mixing_model" in told(answer, 422)[1]


def test_a_hundred_thousand_bad_items_make_a_short_answer(server):
    readings = {"apparent_permittivity": ["x"] * 20_000}
    text, places = told(ask(server, readings=readings), 422)
    assert len(places) == 20
    assert "found" in text
