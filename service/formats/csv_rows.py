"""text/csv: one header record, then one record a row (RFC 4180, UTF-8, commas, decimal points).

A row is kept as the text it came as, and the answer is appended to that text: what the table
holds besides passes through to the letter, line breaks in cells and odd quoting included. That
goes for text a spreadsheet would take for a formula, too: it is the caller's own and is neither
prefixed nor escaped.
"""

from collections.abc import Collection, Iterator
from io import BytesIO

import polars as pl

from models.relation import Array
from service.formats.block import UNREADABLE_ROW, Answer, Block, Header, Marks
from service.formats.cells import csv_text, decimal_commas, finite, quoted
from service.formats.csv_records import Cells, cells_in, csv_ends
from service.formats.errors import FormatError, HeaderError, shown
from service.formats.flag_text import flags_as_csv
from service.formats.header import (
    FLAGS,
    check_permittivity,
    check_separator,
    check_width,
    recognised,
)
from service.formats.records import BLOCK_BYTES, LINE_BYTES, RecordCutter, Records

KEY = "csv"


class CsvDecoder:
    """See Decoder. ``appends``: names of the columns of the answer."""

    def __init__(
        self,
        appends: Collection[str],
        *,
        block_bytes: int = BLOCK_BYTES,
        line_bytes: int = LINE_BYTES,
    ) -> None:
        self._cutter = RecordCutter(csv_ends, block_bytes=block_bytes, line_bytes=line_bytes)
        self._appends = appends
        self._header: Header | None = None
        self._places: dict[str, int] = {}
        self._given = False

    def feed(self, piece: bytes) -> Iterator[Block]:
        """See Decoder."""
        return self._blocks(self._cutter.feed(piece))

    def close(self) -> Iterator[Block]:
        """See Decoder."""
        yield from self._blocks(self._cutter.close())
        if self._header is None:
            raise FormatError("a header record and rows", "an empty body")
        if not self._given:
            yield self._block(self._header, Records.none())

    def _blocks(self, cut: Iterator[Records]) -> Iterator[Block]:
        for records in cut:
            rows, first = records, 0
            if self._header is None:
                self._header = _header(records)
                self._places = _places(self._header, self._appends, int(records.lines[0]))
                rows, first = records.without_first(), records.first_ones() - 1
            if len(rows):
                yield self._block(self._header, rows, first)

    def _block(self, header: Header, records: Records, first: int = 0) -> Block:
        """Some rows; ``first`` of them are those by which the table is judged."""
        cells = Cells(records, len(header.names))
        broken = cells.broken
        values: dict[str, Array] = {}
        unreadable: dict[str, Marks] = {}
        numbers = cells.numbers(self._places.values())
        for (name, place), (found, odd) in zip(self._places.items(), numbers, strict=True):
            values[name] = found
            if odd.any():
                unreadable[name] = odd
                if first and decimal_commas(cells.columns()[place].head(first)):
                    raise HeaderError(
                        "decimal points", "decimal commas", line=int(records.lines[0]),
                        column=header.names[place], mend="write 17.2, not 17,2",
                    )  # fmt: skip
        self._given = True
        return Block(
            header=header,
            lines=records.lines,
            records=records.series(),
            values=values,
            unreadable=unreadable,
            absent=dict.fromkeys(values, broken) if broken.any() else {},
            broken=broken,
            cells=lambda: [
                column.fill_null("").alias(name)
                for column, name in zip(cells.columns(), header.names, strict=True)
            ],
        )


class CsvEncoder:
    """See Encoder. Lines end as those of a CSV table did, else in LF.

    A row that could not be taken apart stands, as it was sent, in the first cell.
    """

    def __init__(self) -> None:
        self._header = Header((), KEY)
        self._names: tuple[str, ...] = ()

    def start(self, header: Header, names: tuple[str, ...]) -> bytes:
        """See Encoder."""
        self._header = header
        text = header.text
        if header.form != KEY:
            check_width(header.names, line=1)
            self._names = header.names or (UNREADABLE_ROW,)
            text = ",".join(csv_text(pl.Series(self._names, dtype=pl.String)))
        return (",".join((text, *names, FLAGS)) + header.line_end).encode()

    def block(self, block: Block, answer: Answer) -> bytes:
        """See Encoder."""
        own = block.header.form == KEY
        passed = [block.records] if own else [csv_text(c) for c in block.columns(self._names)]
        if block.broken.any():
            empty = "," * (len(block.header.names) - 1) if own else ""
            whole = quoted(block.records) + empty
            passed[0] = whole.zip_with(pl.Series(block.broken), passed[0])
        added = [*map(finite, answer.columns.values()), flags_as_csv(answer.flags)]
        frame = pl.DataFrame([c.alias(str(i)) for i, c in enumerate([*passed, *added])])
        text = BytesIO()
        frame.write_csv(
            text,
            include_header=False,
            quote_style="never",
            line_terminator=self._header.line_end,
        )
        return text.getvalue()

    def end(self) -> bytes:
        """See Encoder."""
        return b""


def _header(records: Records) -> Header:
    text = records.pieces()[0].decode()
    line, end = int(records.lines[0]), int(records.ends[0])
    if "\0" in text:
        raise FormatError("UTF-8", "NUL characters", line=line, mend="save the table as UTF-8")
    names = cells_in(text)
    if not names:
        raise FormatError(
            "a header record", shown(text), line=line, mend="end each line with LF or CRLF"
        )
    line_end = "\r\n" if records.text[end : end + 1] == b"\r" else "\n"
    return Header(tuple(names), KEY, text, line_end)


def _places(header: Header, appends: Collection[str], line: int) -> dict[str, int]:
    """Which columns are read; raises HeaderError where the header is none we can answer."""
    check_width(header.names, line)
    places = recognised(header.names, appends, line)
    check_separator(header.text, header.names, line)
    if appends:  # what nothing is appended to is not estimated: any numbers will do
        check_permittivity(header.names, places, line)
    return places
