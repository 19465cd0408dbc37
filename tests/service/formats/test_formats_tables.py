"""Laws of every table format, whatever the rows hold."""

import csv
import io
import json

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from models.flags import BIT
from service.formats import FORMATS, MEDIA_TYPES, format_of
from service.formats.errors import FormatError
from tests.service.formats.doubling import conversion, converted, csv_rows, cut, json_rows
from tests.service.formats.typed import TYPED, read_typed, typed_samples

SAMPLES = {
    "csv": b"time,note,apparent_permittivity,temperature\n"
    b'2026-05-04T06:00:00Z,"a, ""b""",17.20,14\n'
    b"2026-05-04T07:00:00Z,,NA,warm\n"
    b"too,few\n"
    b"2026-05-04T08:00:00Z,\xc3\xbc,1e999,\n",
    "ndjson": b'{"time":"2026-05-04T06:00:00Z","note":"a, \\"b\\"","apparent_permittivity":17.20,'
    b'"temperature":14}\n'
    b'{"time":"2026-05-04T07:00:00Z","note":"","apparent_permittivity":null,"temperature":"warm"}\n'
    b"[1,2]\n"
    b'{"time":"2026-05-04T08:00:00Z","note":"\xc3\xbc","apparent_permittivity":1e999,'
    b'"temperature":null}\n',
    **typed_samples(),
}
WATER = [34.4, None, None, None]
FLAGS = [
    [],
    ["unreadable:temperature", "missing:apparent_permittivity"],
    ["unreadable-row"],
    ["unreadable:apparent_permittivity", "missing:temperature"],
]
MISSING = ["missing:apparent_permittivity", "missing:temperature"]
TYPED_FLAGS = [FLAGS[0], FLAGS[1], MISSING, FLAGS[3]]
CELLS = st.text(alphabet='a1,"\n\r é=\x00', max_size=5)
ROWS = st.lists(st.lists(CELLS, min_size=2, max_size=2), max_size=6)
PIECES = st.lists(st.integers(0, 400), max_size=5)
JSON_VALUES = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False, allow_infinity=False)
    | st.text(max_size=3),
    lambda inner: st.lists(inner, max_size=2)
    | st.dictionaries(st.text(max_size=2), inner, max_size=2),
    max_leaves=3,
)  # fmt: skip
KEYS = st.sampled_from(["apparent_permittivity", "note", "é", ""])
JSON_LINES = st.lists(
    st.dictionaries(KEYS, JSON_VALUES).map(json.dumps)
    | st.text(alphabet='{}[]":,1eN \té\\u', max_size=9),
    max_size=6,
)  # fmt: skip


def test_every_format_has_a_sample_here():
    assert set(FORMATS) == set(SAMPLES) == set(MEDIA_TYPES)


def told(body, form):
    """Water contents and flags of an answer."""
    if form in TYPED:
        table = read_typed(body, form)
        return table["water_content"].to_pylist(), table["flags"].to_pylist()
    if form == "csv":
        rows = list(csv.DictReader(io.StringIO(body.decode(), newline="")))
        return (
            [float(row["water_content"]) if row["water_content"] else None for row in rows],
            [row["flags"].split(";") if row["flags"] else [] for row in rows],
        )
    rows = json_rows(body)
    return [row["water_content"] for row in rows], [row["flags"] for row in rows]


@pytest.mark.parametrize("out", FORMATS)
@pytest.mark.parametrize("into", FORMATS)
def test_one_row_in_one_row_out_whatever_it_holds(into, out):
    flags = TYPED_FLAGS if into in TYPED else FLAGS
    assert told(converted(SAMPLES[into], into, out), out) == (WATER, flags)


@pytest.mark.parametrize("out", FORMATS)
@pytest.mark.parametrize("into", FORMATS)
def test_any_cut_of_the_upload_gives_the_same_answer(into, out):
    body = SAMPLES[into]
    whole = converted(body, into, out)
    for size in (1, 2, 7):
        assert (
            converted([body[i : i + size] for i in range(0, len(body), size)], into, out) == whole
        )


@pytest.mark.parametrize("form", FORMATS)
def test_rows_do_not_depend_on_their_neighbours(form):
    body = SAMPLES[form]
    assert converted(body, form, block_bytes=64) == converted(body, form)


@pytest.mark.parametrize("form", ["csv", "ndjson"])
def test_a_last_line_end_makes_no_difference(form):
    body = SAMPLES[form]
    assert converted(body.removesuffix(b"\n"), form) == converted(body, form)


def outcome(body, into, out, **limits):
    try:
        return converted(body, into, out, **limits)
    except FormatError as error:
        return type(error)


@given(ROWS, st.sampled_from(["\n", "\r\n"]), st.sampled_from([0, 1]), PIECES)
def test_any_quoting_and_any_cut_keep_every_cell_of_csv(rows, line_end, quoting, places):
    text = io.StringIO(newline="")
    writer = csv.writer(text, lineterminator=line_end, quoting=quoting)
    writer.writerows([["apparent_permittivity", "note"], *rows])
    if line_end == "\n" and "\r" in text.getvalue():
        return  # such a cell is not quoted, and other readers see a row end in it
    body = text.getvalue().encode()
    answer = converted(cut(body, places), block_bytes=40)
    assert answer == converted(body)
    assert answer.count(b"\r\n") >= (1 + len(rows)) * (line_end == "\r\n")
    kept = [row[:2] for row in csv_rows(answer)[1:]]
    assert kept == rows
    as_json = json_rows(converted(body, "csv", "ndjson"))
    assert [row["note"] for row in as_json] == [note for _, note in rows]


@settings(suppress_health_check=[HealthCheck.too_slow])
@given(st.text(alphabet='a1,"\n\r é.-\x00', max_size=60), PIECES, st.sampled_from([3, 16, 64]))
def test_csv_that_no_writer_would_write_keeps_its_rows_and_columns(text, places, block_bytes):
    body = ("note,apparent_permittivity\n" + text).encode()
    whole = outcome(body, "csv", "csv")
    assert outcome(cut(body, places), "csv", "csv", block_bytes=block_bytes) == whole
    if isinstance(whole, bytes):
        table = csv_rows(whole)
        assert {len(row) for row in table} == {4}
        assert len(json_rows(converted(body, "csv", "ndjson"))) == len(table) - 1


@settings(suppress_health_check=[HealthCheck.too_slow])
@given(JSON_LINES, PIECES, st.sampled_from([3, 16, 64]))
def test_ndjson_keeps_its_rows_to_the_letter(lines, places, block_bytes):
    body = "\n".join(lines).encode()
    whole = outcome(body, "ndjson", "ndjson")
    assert outcome(cut(body, places), "ndjson", "ndjson", block_bytes=block_bytes) == whole
    if not isinstance(whole, bytes):
        return
    sent = [line for line in lines if line.strip(" \t")]
    answers = whole.decode().split("\n")[:-1]
    for line, answer in zip(sent, answers, strict=True):
        row = json.loads(answer)
        if row["flags"] == ["unreadable-row"]:
            assert row["unreadable_row"] == line
        else:
            assert answer.startswith(line.rstrip(" \t")[:-1])
            own = [key for key in row if key not in {"water_content", "flags"}]
            assert {key: row[key] for key in own} == json.loads(line)
    table = outcome(body, "ndjson", "csv")
    if isinstance(table, bytes):
        rows = csv_rows(table)
        assert len(rows) == 1 + len(sent)
        assert len({len(row) for row in rows}) == 1


def test_a_long_table_of_quoted_line_breaks_keeps_its_order():
    count = 30_000
    rows = "".join(f'"row\n{i}",{i}.5\n' for i in range(count))
    body = f"note,apparent_permittivity\n{rows}".encode()
    work = conversion("csv", "csv")
    blocks = [*work.decoder.feed(body), *work.decoder.close()]
    values = np.concatenate([block.values["apparent_permittivity"] for block in blocks])
    lines = np.concatenate([block.lines for block in blocks])
    np.testing.assert_array_equal(values, np.arange(count) + 0.5)
    np.testing.assert_array_equal(lines, 2 + 2 * np.arange(count))
    assert [len(b.records) for b in blocks] == [len(b) for b in blocks]


def test_a_block_becomes_readings_in_si():
    work = conversion("csv", "csv")
    work.decoder.feed(b"apparent_permittivity,frequency,temperature_u\n17,70,1\n500,x,-1\na,b\n")
    (block,) = work.decoder.close()
    readings = block.readings({"frequency": "MHz"})
    np.testing.assert_array_equal(readings.columns["frequency"], [7e7, np.nan, np.nan])
    assert readings.flags.tolist() == [
        0,
        int(BIT["out-of-gate:apparent_permittivity"] | BIT["unreadable:frequency"]
            | BIT["unusable-uncertainty"]),
        int(BIT["unreadable-row"]),
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("content_type", "key"),
    [("text/csv", "csv"), ("Text/CSV; charset=utf-8", "csv"), ("application/x-ndjson", "ndjson"),
     ("application/json", None), ("", None)],
)  # fmt: skip
def test_a_format_is_known_by_its_media_type(content_type, key):
    found = format_of(content_type)
    assert (found and found.key) == key
