"""Tables whose columns have types keep them; numbers are those of the same table as text."""

import datetime as dt
import decimal
import json

import numpy as np
import pyarrow as pa
import pytest

from service.formats.arrow import messages
from service.formats.errors import FormatError, HeaderError, RecordTooLong
from tests.service.formats.doubling import converted, csv_rows, json_rows
from tests.service.formats.typed import TYPED, read_typed, written

NOON = dt.datetime(2026, 5, 4, 12, 0, 0, 250, tzinfo=dt.UTC)
FOREIGN = {
    "when": pa.array([NOON, None, NOON], pa.timestamp("us", "UTC")),
    "local": pa.array([NOON.replace(tzinfo=None)] * 3, pa.timestamp("ms")),
    "day": pa.array([dt.date(2026, 5, 4)] * 3),
    "site": pa.array(["a", "b", "a"]).dictionary_encode(),
    "small": pa.array([1, None, 3], pa.int8()),
    "large": pa.array([2**63, 0, 1], pa.uint64()),
    "half": pa.array([0.5, np.nan, None], pa.float32()),
    "exact": pa.array([decimal.Decimal("1.50"), None, decimal.Decimal("-2.25")]),
    "true": pa.array([True, False, None]),
    "raw": pa.array([b"\x00\xff", b"", None]),
    "nested": pa.array([{"a": [1, 2]}, None, {"a": []}]),
    "text": pa.array(['a, "b"', "ü\n", ""], pa.large_string()),
}
OURS = {"apparent_permittivity": pa.array([17.2, None, np.inf])}
MIXED = pa.table({**FOREIGN, **OURS})


@pytest.mark.parametrize("out", TYPED)
@pytest.mark.parametrize("into", TYPED)
def test_foreign_columns_keep_their_types_and_cells(into, out):
    given = read_typed(written(MIXED, into), into)  # a Parquet file has types of its own
    answer = read_typed(converted(written(MIXED, into), into, out), out)
    kept = answer.select(list(FOREIGN))
    assert kept.column("site").type == given.column("site").type
    expected = given.select(list(FOREIGN))
    if out == "parquet":
        expected = read_typed(written(expected, "parquet"), "parquet")
    assert kept.schema.types == expected.schema.types
    for name in FOREIGN:
        assert repr(kept.column(name).to_pylist()) == repr(expected.column(name).to_pylist())
    assert answer.column_names[-2:] == ["water_content", "flags"]
    assert answer.column("water_content").to_pylist() == [34.4, None, None]


def test_metadata_of_the_schema_passes_through():
    table = MIXED.replace_schema_metadata({"site": "meadow"})
    answer = read_typed(converted(written(table, "arrow"), "arrow"), "arrow")
    assert answer.schema.metadata == {b"site": b"meadow"}


def test_cells_of_typed_columns_as_text():
    header, first, second, third = csv_rows(converted(written(MIXED, "arrow"), "arrow", "csv"))
    assert header == [*FOREIGN, *OURS, "water_content", "flags"]
    assert first[:-2] == [
        "2026-05-04T12:00:00.000250Z", "2026-05-04T12:00:00.000", "2026-05-04", "a", "1",
        "9223372036854775808", "0.5", "1.50", "true", "00ff", '{"a":[1,2]}', 'a, "b"', "17.2",
    ]  # fmt: skip
    assert second[:3] == ["", "2026-05-04T12:00:00.000", "2026-05-04"]
    assert second[6] == third[6] == third[12] == ""
    rows = json_rows(converted(written(MIXED, "arrow"), "arrow", "ndjson"))
    assert rows[0]["nested"] == {"a": [1, 2]}
    assert (rows[0]["small"], rows[0]["true"], rows[0]["site"]) == (1, True, "a")
    assert rows[1]["small"] is rows[1]["half"] is rows[2]["apparent_permittivity"] is None


@pytest.mark.parametrize("kind", ["int16", "float32", "float16", "decimal128(8, 2)", "string",
                                  "large_string", "dictionary"])  # fmt: skip
def test_numbers_of_any_type_are_read(kind):
    column = pa.array([17, None, 20])
    if kind == "dictionary":
        column = pa.array(["17", None, "20"]).dictionary_encode()
    elif kind.startswith("decimal"):
        column = column.cast(pa.decimal128(21, 2))
    elif kind == "float16":
        column = pa.array(np.array([17, np.nan, 20], np.float16))
    else:
        column = column.cast(kind)
    body = written(pa.table({"Apparent_Permittivity": column}), "arrow")
    answer = read_typed(converted(body, "arrow"), "arrow")
    assert answer.column("water_content").to_pylist() == [34.0, None, 40.0]


def test_what_is_no_number_is_flagged():
    table = pa.table({
        "apparent_permittivity": [17.0, 18.0, 19.0],
        "temperature": pa.array([True, None, False]),
        "frequency": pa.array([[1], None, []]),
    })  # fmt: skip
    answer = read_typed(converted(written(table, "arrow"), "arrow"), "arrow")
    assert answer.column("flags").to_pylist() == [
        ["unreadable:frequency", "unreadable:temperature"],
        ["missing:frequency", "missing:temperature"],
        ["unreadable:frequency", "unreadable:temperature"],
    ]


@pytest.mark.parametrize("into", TYPED)
def test_many_batches_of_any_size_keep_their_order(into):
    count = 70_000
    table = pa.table({"row": np.arange(count), "apparent_permittivity": np.arange(count) / 1000})
    options = {"row_group_size": 30_001} if into == "parquet" else {"max_chunksize": 30_001}
    for out in TYPED:
        answer = read_typed(converted(written(table, into, **options), into, out), out)
        assert answer.column("row").to_pylist() == list(range(count))
        np.testing.assert_array_equal(answer["water_content"], 2 * np.arange(count) / 1000)


@pytest.mark.parametrize("form", TYPED)
def test_a_table_without_rows_keeps_its_columns(form):
    answer = read_typed(converted(written(MIXED.slice(0, 0), form), form), form)
    assert answer.num_rows == 0
    assert answer.column_names == [*FOREIGN, *OURS, "water_content", "flags"]


def test_rows_of_text_that_cannot_be_taken_apart_stand_in_a_column_of_their_own():
    answer = converted(b"note,apparent_permittivity\na,1\nb,c,d\n", "csv", "parquet")
    assert read_typed(answer, "parquet").to_pylist() == [
        {"note": "a", "apparent_permittivity": 1.0, "unreadable_row": None, "water_content": 2.0,
         "flags": []},
        {"note": "", "apparent_permittivity": None, "unreadable_row": "b,c,d",
         "water_content": None, "flags": ["unreadable-row"]},
    ]  # fmt: skip


@pytest.mark.parametrize("form", TYPED)
@pytest.mark.parametrize("damage", [b"", b"PAR1", b"no table", b"\xff\xff\xff\xff\x10\x00\x00\x00"])
def test_what_is_no_such_table_is_said_so(form, damage):
    with pytest.raises(FormatError, match=r"expected an? (Arrow stream|Parquet file)"):
        converted(damage, form)


@pytest.mark.parametrize("form", TYPED)
def test_a_table_that_was_cut_off_or_damaged_is_refused_or_answered(form):
    body = written(MIXED, form)
    for place in range(0, len(body) - 9, 97):
        for wrong in (body[:place], body[:place] + b"\xff" * 9 + body[place + 9 :]):
            try:
                answer = converted(wrong, form)
            except FormatError:
                continue
            assert read_typed(answer, form).num_rows <= 3


def test_a_record_batch_that_unpacks_to_too_much_is_refused():
    packed = pa.ipc.IpcWriteOptions(compression="zstd")
    table = pa.table({"apparent_permittivity": np.zeros(messages.MOST_BYTES // 8 + 1)})
    body = written(table, "arrow", options=packed)
    assert len(body) < 100_000
    with pytest.raises(RecordTooLong, match="smaller record batches"):
        converted(body, "arrow")
    small = table.slice(0, 1000)
    answer = read_typed(converted(written(small, "arrow", options=packed), "arrow"), "arrow")
    assert answer.num_rows == 1000


def test_columns_that_parquet_cannot_hold_are_refused_with_another_way():
    months = pa.array([(1, 2, 3)], pa.month_day_nano_interval())
    body = written(pa.table({"apparent_permittivity": [1.0], "m": months}), "arrow")
    with pytest.raises(HeaderError, match="ask for another format"):
        converted(body, "arrow", "parquet")


def test_numbers_of_every_format_are_the_same():
    values = [17.2, 1e-7, 1 / 3, 123456789.125]
    answers = {}
    for form in ("csv", "ndjson", *TYPED):
        body = written(pa.table({"apparent_permittivity": values}), "arrow")
        answers[form] = converted(body, "arrow", form)
    doubled = [2 * value for value in values]
    assert [float(row[1]) for row in csv_rows(answers["csv"])[1:]] == doubled
    assert [row["water_content"] for row in json_rows(answers["ndjson"])] == doubled
    for form in TYPED:
        assert read_typed(answers[form], form)["water_content"].to_pylist() == doubled
    assert json.loads(answers["ndjson"].split(b"\n")[0])["apparent_permittivity"] == 17.2
