"""What someone reads who sends the first request wrongly: the fault, and how to mend it."""

import io
import json

import pyarrow as pa
import pytest

from service.formats import MEDIA_TYPES

READING = {"apparent_permittivity": 17.0}
CSV = b"apparent_permittivity,temperature\n17,14\n17\n18,warm\n"


def told(server, body, media_type="application/json", query="", status=422):
    """The detail of a refusal; the errors hold it, too, where there are some."""
    content = body if isinstance(body, bytes) else json.dumps(body).encode()
    headers = {"Content-Type": media_type}
    answer = server.client.post(f"/v1/estimates{query}", content=content, headers=headers)
    assert answer.status_code == status, answer.text
    problem = answer.json()
    assert all(fault["detail"] for fault in problem.get("errors", ()))
    return problem["detail"]


@pytest.mark.parametrize(
    ("document", "words"),
    [
        ([], ("expected an object such as", '"readings"', "found a list")),
        ({}, ("readings is missing",)),
        ({"reading": [READING]}, ('is "reading" meant?',)),
        ({"readings": None}, ("#/readings", "found null")),
        ({"readings": []}, ("at least one reading",)),
        ({"soil": 5, "readings": [READING]}, ("#/soil", "or the name of a stored soil, found 5")),
        ({"probe": [], "readings": [READING]}, ("or the name of a stored probe, found a list",)),
        ({"coverage_probability": 95, "readings": [READING]}, ("for 95 % send 0.95",)),
        ({"propagation": "montecarlo", "readings": [READING]}, ("did you mean monte-carlo?",)),
        ({"propagation": {"method": "firstorder"}, "readings": [READING]},
         ("#/propagation/method", "did you mean first-order?")),
        ({"readings": [{"permittivity": 17.0}]}, ("did you mean apparent_permittivity?",)),
        ({"readings": [{"ec": 0.6, **READING}]}, ("did you mean bulk_conductivity?",)),
        ({"soil": {"clay": True}, "probe": {"frequency": "1"}, "readings": [READING]},
         ("#/soil/clay: expected a number, found true", "and 1 more")),
    ],
    ids=lambda value: json.dumps(value)[:40] if not isinstance(value, tuple) else "",
)  # fmt: skip
def test_the_detail_tells_the_first_thing_that_is_wrong(server, document, words):
    detail = told(server, document)
    assert all(word in detail for word in words), detail


def test_an_empty_body_is_told_with_an_example(server):
    detail = told(server, b"", status=400)
    assert "the body is not JSON, but empty; expected an object such as {" in detail


def test_a_form_is_told_the_header_that_curl_needs(server):
    detail = told(server, b"x", "application/x-www-form-urlencoded", status=415)
    assert "-H 'Content-Type: application/json'" in detail


@pytest.mark.parametrize("method", ["first-order", "monte-carlo"])
def test_a_method_of_propagation_may_stand_alone(server, method):
    answers = [
        server.client.post("/v1/estimates", json={"propagation": said, "readings": [READING]})
        for said in (method, {"method": method})
    ]
    assert answers[0].status_code == 200
    assert answers[0].content == answers[1].content


def test_a_row_is_told_by_its_line_and_its_number(server):
    assert told(server, CSV, "text/csv", "?strict=true") == (
        "line 3 (row 2): expected 2 cells, as many as the header has, found 1 cell: '17'"
    )
    blank = CSV.replace(b"17\n18", b"\n\n18")
    assert "line 5 (row 2), column temperature" in told(server, blank, "text/csv", "?strict=true")


def test_rows_of_typed_columns_have_no_lines(server):
    table, body = pa.table({"apparent_permittivity": ["17", "18", "warm"]}), io.BytesIO()
    with pa.ipc.new_stream(body, table.schema) as writer:
        writer.write_table(table)
    detail = told(server, body.getvalue(), MEDIA_TYPES["arrow"], "?strict=true")
    assert detail == "row 3, column apparent_permittivity: expected a number, found 'warm'"


def test_ndjson_is_told_of_objects_and_keys(server):
    lines = b'{"apparent_permittivity":17}\nnot json\n'
    assert told(server, lines, MEDIA_TYPES["ndjson"], "?strict=true") == (
        "line 2 (row 2): expected a JSON object with each key once, found 'not json'"
    )
    detail = told(server, b'{"permittivity":17}\n', MEDIA_TYPES["ndjson"])
    assert "expected a key apparent_permittivity" in detail
    assert "is 'permittivity' the apparent_permittivity? then name it so" in detail
    assert "a JSON object with a key" in told(server, b"not json\n", MEDIA_TYPES["ndjson"])


def arrow_file():
    table, body = pa.table({"apparent_permittivity": [17.0]}), io.BytesIO()
    with pa.ipc.new_file(body, table.schema) as writer:
        writer.write_table(table)
    return body.getvalue()


@pytest.mark.parametrize(
    ("kind", "body", "words"),
    [
        ("arrow", arrow_file(), "an Arrow file: write the streaming format"),
        ("arrow", b"PAR1....PAR1", "send it as application/vnd.apache.parquet"),
        ("arrow", b"hello", "bytes that begin with 'hello'"),
        ("parquet", b"time,apparent_permittivity\n", "bytes that begin with 'time,apparent"),
        ("csv", b"\x1f\x8b\x08\x00\x00", "say so with Content-Encoding: gzip"),
        ("csv", b"PK\x03\x04\xff\xff", "save the table as CSV"),
        ("ndjson", b"\xff\xfe{\x00", "save the table as UTF-8"),
    ],
)
def test_a_body_of_another_kind_is_told_what_it_is(server, kind, body, words):
    assert words in told(server, body, MEDIA_TYPES[kind], status=400)


@pytest.mark.parametrize(
    ("path", "words"),
    [
        ("/v1/estimate", "did you mean /v1/estimates?"),
        ("/estimates", "did you mean /v1/estimates?"),
        ("/nopath", "/docs and /openapi.json list them all"),
    ],
)
def test_an_unknown_address_is_told_the_nearest(server, path, words):
    answer = server.client.get(path)
    assert answer.status_code == 404
    assert f"no operation has the address {path}" in answer.json()["detail"]
    assert words in answer.json()["detail"]


def test_a_slash_too_many_is_told(server):
    answer = server.client.get("/v1/estimates/")
    assert answer.status_code == 404
    assert "no trailing slash: ask for /v1/estimates" in answer.json()["detail"]
