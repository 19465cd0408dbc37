"""application/x-ndjson: one JSON object a line, one line a row (RFC 8259).

A row is kept as the text it came as, and the answer is inserted before its closing brace. Keys
may differ from line to line. Those on lines that begin in the first 64 KiB decide what is read of
the table, such as whether it has a conductivity to answer for; any that first occur later pass
through like a stranger's, whatever the size of a block.
"""

from collections import Counter
from collections.abc import Collection, Iterator, Mapping, Sequence
from io import BytesIO
from operator import itemgetter

import numpy as np
import orjson
import polars as pl

from models.relation import Array
from service.formats.block import UNREADABLE_ROW, Answer, Block, Header, Marks
from service.formats.cells import json_text, numbers_as_text
from service.formats.errors import FormatError, HeaderError, shown
from service.formats.flag_text import flags_as_json
from service.formats.header import FLAGS, folded, recognised
from service.formats.json.lines import (
    Row,
    first_rows,
    keys_of,
    numbers_of,
    rows_as_written,
    rows_of,
)
from service.formats.records import BLOCK_BYTES, LINE_BYTES, RecordCutter, Records, line_ends

KEY = "ndjson"


class NdjsonDecoder:
    """See Decoder. ``appends``: names of the columns of the answer."""

    def __init__(
        self,
        appends: Collection[str],
        *,
        block_bytes: int = BLOCK_BYTES,
        line_bytes: int = LINE_BYTES,
    ) -> None:
        self._cutter = RecordCutter(line_ends, block_bytes=block_bytes, line_bytes=line_bytes)
        self._appends = appends
        self._header: Header | None = None
        self._spellings: dict[str, str] = {}
        self._known: tuple[str, ...] = ()

    def feed(self, piece: bytes) -> Iterator[Block]:
        """See Decoder."""
        return map(self._block, self._cutter.feed(piece))

    def close(self) -> Iterator[Block]:
        """See Decoder."""
        yield from map(self._block, self._cutter.close())
        if self._header is None:
            raise FormatError("a JSON object on each line", "an empty body")

    def _block(self, records: Records) -> Block:
        pieces = records.pieces()
        rows, broken = rows_of(pieces)
        shapes = first_rows(rows)
        keys = self._keys(shapes, records)
        if self._header is None:
            first = first_rows(rows[: records.first_ones()])
            self._header = Header(keys_of(first), KEY)
            self._known = tuple(recognised(self._header.names, self._appends, line=1))
        nothing, everywhere = np.full(len(rows), np.nan), np.ones(len(rows), dtype=np.bool_)
        values: dict[str, Array] = dict.fromkeys(self._known, nothing)
        unreadable: dict[str, Marks] = {}
        absent: dict[str, Marks] = dict.fromkeys(self._known, everywhere)
        for name, key in keys.items():
            if name not in self._known:
                continue
            absent.pop(name, None)
            if any(key not in shape for shape in shapes):
                absent[name] = np.array([key not in row for row in rows], dtype=np.bool_)
                cells = [row.get(key) for row in rows]
            else:
                cells = list(map(itemgetter(key), rows))
            values[name], odd = numbers_of(cells)
            if odd.any():
                unreadable[name] = odd
        return Block(
            header=self._header,
            lines=records.lines,
            records=records.series(),
            values=values,
            unreadable=unreadable,
            absent=absent,
            broken=broken,
            cells=lambda: _columns(rows_as_written(pieces, broken)),
        )

    def _keys(self, shapes: Mapping[tuple[str, ...], int], records: Records) -> dict[str, str]:
        """The keys that are read in these rows, by quantity name or name_u."""
        found: dict[str, str] = {}
        for shape, row in shapes.items():
            line = int(records.lines[row])
            for name, place in recognised(shape, self._appends, line).items():
                key = found[name] = shape[place]
                before = self._spellings.setdefault(name, key)
                if before != key:
                    raise HeaderError(
                        "one spelling of each name", f"{shown(before)} and {shown(key)}",
                        line=line, column=key, mend=f"write {name} on every line",
                    )  # fmt: skip
        return found


class NdjsonEncoder:
    """See Encoder. Numbers are numbers, no number is null, what is not read is text.

    A row that could not be taken apart is an object with its text under ``unreadable_row``.
    """

    def start(self, header: Header, names: tuple[str, ...]) -> bytes:  # noqa: ARG002
        """See Encoder."""
        twice = [name for name, count in Counter(header.names).items() if count > 1]
        if twice:
            raise HeaderError(
                "each column once", f"{shown(twice[0])} twice", column=twice[0],
                mend="JSON tells columns apart by name: rename one of them, or ask for text/csv",
            )  # fmt: skip
        return b""

    def block(self, block: Block, answer: Answer) -> bytes:
        """See Encoder."""
        begun = _open_objects(block.records) if block.header.form == KEY else _members(block)
        if block.broken.any():
            whole = f'{{"{UNREADABLE_ROW}":' + json_text(block.records) + ","
            begun = whole.zip_with(pl.Series(block.broken), begun)
        parts: list[pl.Series | str] = [begun]
        for name, values in answer.columns.items():
            parts += [_key(name), numbers_as_text(values).fill_null("null"), ","]
        parts += [_key(FLAGS), flags_as_json(answer.flags), "}"]
        text = BytesIO()
        _joined(parts).to_frame().write_csv(text, include_header=False, quote_style="never")
        return text.getvalue()

    def end(self) -> bytes:
        """See Encoder."""
        return b""


def _columns(rows: Sequence[Row]) -> list[pl.Series]:
    """Every key of some rows as a column of text; null: the row does not have it."""
    return [
        pl.Series(name, [row.get(name) for row in rows], dtype=pl.String)
        for name in keys_of(first_rows(rows))
    ]


def _open_objects(records: pl.Series) -> pl.Series:
    """JSON objects without their closing brace, ready for a further member."""
    begun = records.str.strip_chars_end().str.strip_suffix("}")
    empty = begun.str.strip_chars_end().str.ends_with("{")
    return begun.zip_with(empty, begun + ",")


def _members(block: Block) -> pl.Series:
    """The rows of a table of another format, as JSON objects without their closing brace."""
    parts: list[pl.Series | str] = ["{"]
    for column in block.cells():
        name = folded(column.name)
        text = column if column.name in block.bare else json_text(column)
        if name in block.values:
            number = numbers_as_text(block.values[name])
            odd = block.unreadable.get(name, np.zeros(len(block), dtype=np.bool_))
            text = text.zip_with(pl.Series(odd), number)
        parts += [_key(column.name), text.fill_null("null"), ","]
    return _joined(parts)


def _key(name: str) -> str:
    return orjson.dumps(name).decode() + ":"


def _joined(parts: Sequence[pl.Series | str]) -> pl.Series:
    """Row by row, the parts one behind the other; a part that is one text is in every row."""
    expressions = [
        pl.lit(part) if isinstance(part, str) else pl.col(str(i)) for i, part in enumerate(parts)
    ]
    frame = pl.DataFrame(
        [part.alias(str(i)) for i, part in enumerate(parts) if not isinstance(part, str)]
    )
    return frame.select(pl.concat_str(expressions).alias("")).to_series()
