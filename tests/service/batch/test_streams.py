"""Any cut and any block give the same bytes, through the real estimates."""

import json

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from service.answers.columns import APPENDED
from service.batch import Conversion
from service.batch_estimates import TableEstimates
from service.formats import FORMATS
from service.formats.errors import FormatError
from service.schemas.batch_query import document_of
from service.schemas.query import settings_of
from tests.service.formats.doubling import csv_rows, cut, json_rows
from tests.service.formats.typed import read_typed

QUERY = [("mixing_model", "crim"), ("texture", "loam"), ("frequency", "1e9"),
         ("apparent_permittivity_u", "0.3")]  # fmt: skip
NUMBERS = st.sampled_from(["17.2", "3", "81", "", "NA", "x", "1e999", "-9999", "25.06"])
ROWS = st.lists(st.tuples(NUMBERS, NUMBERS, NUMBERS, st.text('a,"\n é', max_size=4)), max_size=12)
PIECES = st.lists(st.integers(0, 500), max_size=4)
SLOW = settings(suppress_health_check=[HealthCheck.too_slow], deadline=None, max_examples=40)


def answered(pieces, into, out, block_bytes, columns=None):
    estimates = TableEstimates(settings_of(document_of(QUERY)))
    decoder = FORMATS[into].decoder(APPENDED, block_bytes=block_bytes)
    work = Conversion(decoder, FORMATS[out].encoder(), estimates, columns=columns)
    parts = [part for piece in pieces for part in work.feed(piece)]
    return b"".join([*parts, *work.close()])


def quoted(text):
    return '"' + text.replace('"', '""') + '"'


@SLOW
@given(ROWS, PIECES, st.sampled_from([16, 200, 70_000]))
def test_csv_is_answered_alike_however_it_came(rows, places, block_bytes):
    head = "apparent_permittivity,temperature,bulk_conductivity,note\n"
    body = (head + "".join(",".join((*row[:3], quoted(row[3]))) + "\n" for row in rows)).encode()
    whole = answered([body], "csv", "csv", 1 << 20)
    assert answered(cut(body, places), "csv", "csv", block_bytes) == whole
    assert [row[3] for row in csv_rows(whole)[1:]] == [row[3] for row in rows]


@SLOW
@given(st.lists(st.dictionaries(
    st.sampled_from(["apparent_permittivity", "temperature", "bulk_conductivity", "note"]),
    st.sampled_from([17.2, 3, None, "x", 25.06, -9999])), min_size=1, max_size=10),
    PIECES, st.sampled_from([16, 200, 70_000]))  # fmt: skip
def test_ndjson_is_answered_alike_however_it_came(rows, places, block_bytes):
    rows = [{"apparent_permittivity": 20.0}, *rows]
    body = "".join(json.dumps(row) + "\n" for row in rows).encode()
    whole = answered([body], "ndjson", "ndjson", 1 << 20)
    assert answered(cut(body, places), "ndjson", "ndjson", block_bytes) == whole
    assert len(json_rows(whole)) == len(rows)


def lines_with_a_late_conductivity():
    early = [{"apparent_permittivity": 10 + i % 20, "temperature": 14.0} for i in range(1_500)]
    late = [{**row, "bulk_conductivity": 0.4} for row in early]
    return "".join(json.dumps(row) + "\n" for row in (*early, *late)).encode()


@pytest.mark.parametrize("out", ["ndjson", "csv"])
def test_what_ndjson_is_taken_to_hold_does_not_depend_on_the_block(out):
    body = lines_with_a_late_conductivity()
    outcomes = set()
    for block_bytes in (50, 10_000, 100_000, 1 << 20):
        try:
            outcomes.add(answered([body], "ndjson", out, block_bytes))
        except FormatError as error:
            outcomes.add(str(error))
    (only,) = outcomes
    if out == "ndjson":
        assert "pore_water_conductivity" not in json_rows(only)[-1]  # keys come first, then answers
    else:
        assert "expected the same names as in the first rows" in only


def test_wanted_columns_come_in_the_order_of_the_answer_and_flags_with_them():
    body = b"apparent_permittivity,temperature\n17,14\n"
    wanted = ("water_content_upper", "water_content")
    head, row = csv_rows(answered([body], "csv", "csv", 1 << 20, wanted))
    assert head[2:] == ["water_content", "water_content_upper", "flags"]
    assert float(row[2]) < float(row[3])
    with pytest.raises(FormatError, match="found pore_water_conductivity: leave it out"):
        answered([body], "csv", "csv", 1 << 20, ("pore_water_conductivity",))


def test_every_format_has_the_same_numbers():
    rows = [(17.2, 14.0, 0.62), (3.1, 2.5, 0.05), (31.7, 25.0, 1.4)]
    body = (
        b"apparent_permittivity,temperature,bulk_conductivity\n"
        + "".join(f"{a},{b},{c}\n" for a, b, c in rows).encode()
    )
    as_arrow = answered([body], "csv", "arrow", 1 << 20, ("water_content",))
    numbers = read_typed(as_arrow, "arrow")["water_content"].to_pylist()
    only = ("water_content",)
    for into, sent in {
        "csv": body,
        "ndjson": "".join(
            json.dumps(dict(zip(["apparent_permittivity", "temperature", "bulk_conductivity"],
                                row, strict=True))) + "\n" for row in rows).encode(),
        "parquet": without(answered([body], "csv", "parquet", 1 << 20, only)),
    }.items():  # fmt: skip
        answer = answered([sent], into, "parquet", 1 << 20, only)
        assert read_typed(answer, "parquet")["water_content"].to_pylist() == numbers
        text = answered([sent], into, "csv", 1 << 20, only)
        assert [float(row[-2]) for row in csv_rows(text)[1:]] == numbers


def without(body):
    """A Parquet table as a caller would send it: without the columns of an answer."""
    import io  # noqa: PLC0415

    import pyarrow.parquet as pq  # noqa: PLC0415

    table = read_typed(body, "parquet").drop_columns(["water_content", "flags", "unreadable_row"])
    sink = io.BytesIO()
    pq.write_table(table, sink)
    return sink.getvalue()
