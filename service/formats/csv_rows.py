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
from service.formats.cells import csv_text, decimal_commas, finite, numbers_in, quoted
from service.formats.csv_records import cells_in, cells_of, csv_ends
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

    def feed(self, piece: bytes) -> list[Block]:
        """See Decoder."""
        return self._blocks(self._cutter.feed(piece))

    def close(self) -> list[Block]:
        """See Decoder."""
        blocks = self._blocks(self._cutter.close())
        if self._header is None:
            raise FormatError("a header record and rows", "an empty body")
        if not self._given:
            blocks.append(self._block(self._header, Records.none()))
        return blocks

    def _blocks(self, cut: Iterator[Records]) -> list[Block]:
        blocks = []
        for records in cut:
            rows = records
            if self._header is None:
                self._header = _header(records)
                self._places = _places(self._header, self._appends, int(records.lines[0]))
                rows = records.without_first()
            if len(rows):
                blocks.append(self._block(self._header, rows))
        return blocks

    def _block(self, header: Header, records: Records) -> Block:
        columns, broken = cells_of(records, len(header.names))
        values: dict[str, Array] = {}
        unreadable: dict[str, Marks] = {}
        for name, place in self._places.items():
            values[name], odd = numbers_in(columns[place])
            if odd.any():
                unreadable[name] = odd
                if not self._given and decimal_commas(columns[place]):
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
                for column, name in zip(columns, header.names, strict=True)
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
        passed = [block.records] if own else self._cells(block)
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

    def _cells(self, block: Block) -> list[pl.Series]:
        """The cells of a table of another format, in the columns of its first rows."""
        cells = {column.name: column for column in block.cells()}
        for name in cells.keys() - set(self._names):
            row = int(cells[name].is_not_null().to_numpy().argmax())
            raise HeaderError(
                "the same names as in the first rows", shown(name), line=int(block.lines[row]),
                mend="a CSV answer has the columns of the first rows: name it there, with null, "
                "or ask for application/x-ndjson",
            )  # fmt: skip
        empty = pl.repeat("", len(block), dtype=pl.String, eager=True)
        return [csv_text(cells.get(name, empty)) for name in self._names]


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
    check_permittivity(header.names, places, line)
    return places
