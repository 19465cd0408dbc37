"""Typed tables that promise in a few bytes what would not fit in memory."""

import contextlib
import io

import numpy as np
import pyarrow as pa
import pyarrow.parquet as pq
import pytest

from service.formats import FORMATS
from service.formats.arrow.bounded import MOST_TEXT, bounded
from service.formats.arrow.thrift import Compact, Unfit
from service.formats.errors import FormatError, HeaderError, RecordTooLong

PERMITTIVITY = "apparent_permittivity"


def parquet(table, **how):
    body = io.BytesIO()
    pq.write_table(table, body, **how)
    return body.getvalue()


def stream(table):
    body = io.BytesIO()
    with pa.ipc.new_stream(body, table.schema) as writer:
        writer.write_table(table)
    return body.getvalue()


def blocks(kind, body):
    decoder = FORMATS[kind].decoder(())
    for start in range(0, len(body), 1 << 20):
        list(decoder.feed(body[start : start + (1 << 20)]))
    return list(decoder.close())


def test_a_page_of_a_hundred_megabytes_is_refused_by_its_column():
    table = pa.table({PERMITTIVITY: [17.0], "note": ["x" * 100_000_000]})
    body = parquet(table, compression="zstd", use_dictionary=False, write_statistics=False)
    assert len(body) < 1 << 20
    with pytest.raises(RecordTooLong, match=r"column note: expected at most .* smaller pages"):
        blocks("parquet", body)


@pytest.mark.parametrize("version", ["1.0", "2.0"])
@pytest.mark.parametrize("compression", ["none", "snappy", "zstd", "gzip"])
def test_usual_files_are_taken_whole(compression, version):
    count = 50_000
    table = pa.table({
        PERMITTIVITY: np.linspace(3, 40, count),
        "station": [f"a rather long name of a station, number {i % 900}" for i in range(count)],
        "note": pa.array([None if i % 3 else str(i) for i in range(count)], pa.large_string()),
        "spectrum": pa.array([[1.0, 2.0]] * count),
        "kept.in": pa.array([f"{i % 700} {'x' * 40}" for i in range(count)]).dictionary_encode(),
    })  # fmt: skip
    body = parquet(table, compression=compression, data_page_version=version, row_group_size=20_000)
    found = blocks("parquet", body)
    assert sum(len(block) for block in found) == count
    whole = pa.Table.from_batches([block.batch for block in found])
    assert whole.schema.equals(table.schema)
    assert whole.equals(pq.read_table(io.BytesIO(body)))


def test_a_long_text_that_stands_in_every_row_comes_a_few_rows_at_a_time():
    text = "x" * 1_000_000
    table = pa.table({PERMITTIVITY: np.full(300, 17.0), "note": [text] * 300})
    body = parquet(table, compression="zstd", dictionary_pagesize_limit=2 << 20)
    assert len(body) < 100_000
    found = blocks("parquet", body)
    assert sum(len(block) for block in found) == 300
    assert max(len(block) for block in found) <= MOST_TEXT // len(text)
    assert {value for block in found for value in block.batch.column(1).to_pylist()} == {text}


def test_so_does_one_of_an_arrow_dictionary_and_one_of_a_view():
    text = "x" * 1_000_000
    told = pa.DictionaryArray.from_arrays(pa.array([0, None] * 50, pa.int8()), [text])
    viewed = pa.array([text, None], pa.string_view())
    for column, count in ((told, 100), (pa.concat_arrays([viewed] * 50), 100)):
        batch = pa.record_batch({PERMITTIVITY: np.full(count, 17.0), "note": column})
        parts = list(bounded(batch))
        assert len(parts) > 1
        assert max(part.num_rows for part in parts) <= 2 * MOST_TEXT // len(text) + 1
        assert pa.Table.from_batches(parts).equals(pa.Table.from_batches([batch]))


def test_a_list_that_holds_a_hundred_million_nothings_is_refused():
    many = pa.ListArray.from_arrays([0, 100_000_000], pa.nulls(100_000_000, pa.int8()))
    body = parquet(pa.table({PERMITTIVITY: [17.0], "note": many}))
    assert len(body) < 1 << 20
    with pytest.raises(RecordTooLong, match="values of a list column"):
        blocks("parquet", body)


@pytest.mark.parametrize(
    "column",
    [
        pa.RunEndEncodedArray.from_arrays(pa.array([3], pa.int32()), pa.array(["x"])),
        pa.array([["x"]] * 3, pa.list_view(pa.string())),
        pa.array([["x"]] * 3, pa.list_(pa.dictionary(pa.int8(), pa.string()))),
    ],
    ids=["run ends", "list view", "dictionary in a list"],
)
def test_columns_that_hide_their_size_are_refused_by_name(column):
    with pytest.raises(HeaderError, match="column odd: expected columns of plain types"):
        blocks("arrow", stream(pa.table({PERMITTIVITY: [17.0] * 3, "odd": column})))


def test_a_damaged_page_header_is_told_with_its_column():
    body = bytearray(parquet(pa.table({PERMITTIVITY: np.linspace(3, 40, 1000)})))
    body[4:12] = b"\xff" * 8
    with pytest.raises(FormatError, match=f"column {PERMITTIVITY}: .* page header at byte 4"):
        blocks("parquet", bytes(body))


def test_cutting_a_file_anywhere_never_ends_in_anything_but_a_refusal():
    body = parquet(pa.table({PERMITTIVITY: np.linspace(3, 40, 200), "note": ["x"] * 200}))
    rng = np.random.default_rng(2)
    for _ in range(300):
        damaged = bytearray(body)
        for place in rng.integers(0, len(body), 3):
            damaged[place] = rng.integers(0, 256)
        with contextlib.suppress(FormatError):
            blocks("parquet", bytes(damaged))


@pytest.mark.parametrize("data", [
    b"", b"\x15", b"\x15\xff" + b"\xff" * 20, b"\x1c" * 40, b"\x18\xff\xff\x03", b"\x19\x10",
], ids=["nothing", "cut", "endless number", "nested", "text past the end", "list"])  # fmt: skip
def test_bytes_that_are_no_structure_are_unfit(data):
    with pytest.raises(Unfit):
        Compact(memoryview(data)).structure()


def test_numbers_are_read_as_the_specification_writes_them():
    # Field 1 is -3 (zigzag 5), field 1 + 2 is 300 (zigzag 600), field 20 has its number written
    data = bytes([0x15, 5, 0x26, 0xD8, 0x04, 0x05, 40, 2, 0])
    assert Compact(memoryview(data)).structure() == {1: -3, 3: 300, 20: 1}
