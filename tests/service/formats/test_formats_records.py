"""A stream of bytes becomes the same records however it arrives."""

import csv
import io

import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.formats.csv_records import Cells, csv_ends
from service.formats.errors import FormatError, RecordTooLong
from service.formats.records import RecordCutter, line_ends
from tests.service.formats.doubling import cut

TEXTS = st.text(alphabet='a1,"\n é;\x00', max_size=80)


def records_of(pieces, find=csv_ends, **limits):
    cutter = RecordCutter(find, **limits)
    blocks = [block for piece in pieces for block in cutter.feed(piece)]
    blocks += cutter.close()
    lines = [line for block in blocks for line in block.lines.tolist()]
    return list(zip(lines, [p for block in blocks for p in block.pieces()], strict=True))


def outcome(pieces, **limits):
    try:
        return records_of(pieces, **limits)
    except FormatError as error:
        return str(error)


@given(TEXTS, st.lists(st.integers(0, 400)), st.sampled_from([3, 16, 1024]))
def test_any_cut_of_the_stream_gives_the_same_records(text, places, block_bytes):
    body = text.encode()
    whole = outcome([body], block_bytes=1024)
    assert outcome(cut(body, places), block_bytes=block_bytes) == whole


@given(TEXTS)
def test_records_end_where_the_standard_library_ends_them(text):
    found = outcome([text.encode()])
    if isinstance(found, str):
        assert "never closed" in found
        return
    expected = [row for row in csv.reader(io.StringIO(text, newline="")) if row]
    rows = [next(csv.reader([piece.decode()])) for _, piece in found]
    # A row of one blank cell is a row where it is quoted and none where it is not.
    assert [row for row in rows if holds(row)] == [row for row in expected if holds(row)]


def holds(row):
    return len(row) > 1 or row[0] == "" or bool(row[0].strip(" \n"))


def test_a_column_of_text_holds_the_records_to_the_letter():
    body = b'a,b\n"x\ny",1\n\n 2,3 \r\nlast,"q"'
    cutter = RecordCutter(csv_ends)
    (block,) = [*cutter.feed(body), *cutter.close()]
    assert block.series().to_list() == ["a,b", '"x\ny",1', " 2,3 ", 'last,"q"']
    assert block.lines.tolist() == [1, 2, 5, 6]
    assert block.without_first().series().to_list() == ['"x\ny",1', " 2,3 ", 'last,"q"']


@pytest.mark.parametrize(
    "body", [b"a\nb\nc", b"a\nb\nc\n", b"a\r\nb\r\nc\r\n", b"\xef\xbb\xbfa\nb\nc"]
)
def test_line_ends_and_a_byte_order_mark_are_not_part_of_a_record(body):
    for find in (csv_ends, line_ends):
        assert records_of([body], find) == [(1, b"a"), (2, b"b"), (3, b"c")]


def test_blank_lines_are_not_records_but_count_as_lines():
    assert records_of([b"\n  \na\n\t\r\n\nb\n\n"]) == [(3, b"a"), (6, b"b")]


def test_a_quoted_empty_cell_is_a_record():
    assert records_of([b'a\n""\nb\n']) == [(1, b"a"), (2, b'""'), (3, b"b")]


@pytest.mark.parametrize("block_bytes", [16, 1024])
def test_a_record_may_be_as_long_as_the_limit_and_no_longer(block_bytes):
    limits = {"block_bytes": block_bytes, "line_bytes": 40}
    longest = b"x" * 40
    assert records_of([b"a\n" + longest + b"\r\nb\n"], **limits) == [
        (1, b"a"), (2, longest), (3, b"b"),
    ]  # fmt: skip
    with pytest.raises(RecordTooLong, match="line 2: expected at most 40 bytes in a record, found"):
        records_of([b"a\nx" + longest + b"\nb\n"], **limits)


def test_a_quoted_cell_that_never_closes_is_told_by_the_line_it_opens_on():
    body = b'a,b\n1,"one\nline"\n2,"left\nopen,\n3,4\n'
    with pytest.raises(FormatError, match=r"^line 4: expected a closing quote, found the end"):
        records_of([body])
    with pytest.raises(RecordTooLong, match=r"line 4: .*cell that begins here is never closed"):
        records_of([body + b"x" * 90], block_bytes=16, line_bytes=40)


def test_bytes_that_are_not_utf_8_are_told_by_their_line():
    body = "a,b\n1,2\n3,M\u00fcnde\n".encode("latin-1")
    with pytest.raises(FormatError, match="line 3: expected UTF-8, found the byte 0xfc: save the"):
        records_of([body], block_bytes=3)
    with pytest.raises(
        FormatError, match="line 1: expected text in UTF-8, found UTF-16 text: save"
    ):
        records_of(["a,b\n1,2\n".encode("utf-16")])


@pytest.mark.parametrize(
    ("record", "cells"),
    [
        ('5" probe,17', ['5" probe', "17"]),
        ('"a"b,17', ["ab", "17"]),
        ('"a""b",17', ['a"b', "17"]),
        ('"a\nb",17', ["a\nb", "17"]),
        ('"a,b",17', ["a,b", "17"]),
        ("\ufeffa,17", ["\ufeffa", "17"]),
    ],
)
def test_odd_quoting_is_read_as_written(record, cells):
    assert taken_apart(f"x,y\n{record}\nlast,1") == [["x", "y"], cells, ["last", "1"]]


@pytest.mark.parametrize("record", ["a", "a,b,c", "a\rb,c", "a,b\r\r", '"a,b",c,d'])
@pytest.mark.parametrize("neighbour", ['"e\nf",g', 'e"f,g', "e,g"])
def test_a_record_of_another_width_is_broken_alone(record, neighbour):
    first, odd, last = taken_apart(f"{neighbour}\n{record}\n{neighbour}\n")
    assert odd is None
    assert first == last == next(csv.reader([neighbour]))


def test_a_long_cell_beside_odd_quoting_is_still_a_cell():
    rows = taken_apart(f'5" probe,1\n{"z" * 200_000},2\n')
    assert rows == [['5" probe', "1"], ["z" * 200_000, "2"]]


def taken_apart(text):
    """Rows of two cells; None where a row is broken."""
    cutter = RecordCutter(csv_ends)
    rows = []
    for block in [*cutter.feed(text.encode()), *cutter.close()]:
        found = Cells(block, 2)
        columns = [column.fill_null("") for column in found.columns()]
        cells = [list(row) for row in zip(*columns, strict=True)]
        for row, odd in zip(cells, found.broken.tolist(), strict=True):
            assert not odd or row == ["", ""]
            rows.append(None if odd else row)
    return rows
