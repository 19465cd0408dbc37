"""Where CSV records end, and their cells.

RFC 4180 has quotes around whole cells only, so that counting them tells inside from outside, in
a few passes over an array, and a fast reader can be trusted with the cells. Whether it holds is
checked at every quote. Where it does not, records are read cell by cell, a quote within an
unquoted cell being a letter like any other.
"""

import codecs
import csv
import re
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import numpy as np
import polars as pl
from numpy.typing import NDArray

from models.relation import Array
from service.formats.cells import Marks, numbers_in
from service.formats.records import CR, LF, Ends, Places, Records

COMMA, QUOTE = 44, 34

csv.field_size_limit(2**31 - 1)  # the length of a record has its own limit

# A cell and what ends it. Possessive, so that a quote that opens a cell never turns into a letter.
_CELL = re.compile(rb'(?:"(?:[^"]++|"")*+"[^,\n]*+|(?!")[^,\n]*+)([,\n])')


def csv_ends(window: bytes) -> Ends:
    """The record ends of a window that begins with a record: a quoted line feed ends nothing."""
    codes = np.frombuffer(window, np.uint8)
    feeds = ends = np.flatnonzero(codes == LF)
    if b'"' in window:
        quotes = np.flatnonzero(codes == QUOTE)
        ends = feeds[np.searchsorted(quotes, feeds) % 2 == 0]
        if not ends.size or not _around_cells(codes, quotes[quotes < ends[-1]]):
            return _ends_cell_by_cell(window)
    if not ends.size:
        return Ends(ends)
    stop = int(ends[-1]) + 1
    stray_return = b"\r" in window and window.count(b"\r", 0, stop) != window.count(
        b"\r\n", 0, stop
    )
    return Ends(ends, regular=not stray_return, feeds=feeds)


class Cells:
    """The cells of some records.

    A record with too many cells or too few has empty ones; so has one with a carriage return
    outside quotes, where other readers would see a row end.
    """

    def __init__(self, records: Records, width: int) -> None:
        self._width, self._records = width, records
        self._columns: list[pl.Series] | None = None
        self.broken: Marks
        """Which records do not have ``width`` cells."""
        if not records.regular or records.text.startswith(codecs.BOM_UTF8):
            self._columns, self.broken = _cells_row_by_row(records, width)
            return
        self.broken = _widths(records, width)
        self._text = records.text
        if self.broken.any():
            nothing = b'""' + b"," * (width - 1)
            pairs = zip(records.pieces(), self.broken.tolist(), strict=True)
            self._text = b"\n".join(nothing if odd else piece for piece, odd in pairs)

    def columns(self) -> list[pl.Series]:
        """Every column as text."""
        if self._columns is None:
            self._columns = self._read(self._text, dict.fromkeys(range(self._width), pl.String))
        return self._columns

    def numbers(self, places: Iterable[int]) -> list[tuple[Array, Marks]]:
        """Some columns as ``numbers_in`` reads them.

        Numbers are read as such at once; only rows in which that fails are read as text.
        """
        wanted = list(places)
        if self._columns is not None or not wanted:
            return [numbers_in(self.columns()[place]) for place in wanted]
        kinds = dict.fromkeys(range(self._width), pl.String) | dict.fromkeys(wanted, pl.Float64)
        read = dict(zip(sorted(wanted), self._read(self._text, kinds, sorted(wanted)), strict=True))
        values = {place: np.array(read[place].to_numpy(), np.float64) for place in wanted}
        odd = {place: np.zeros(len(read[place]), dtype=np.bool_) for place in wanted}
        with np.errstate(all="ignore"):
            doubtful = np.flatnonzero(~np.isfinite(sum(values.values())))
        if doubtful.size:
            texts = self._some_rows(doubtful)
            for place in wanted:
                values[place][doubtful], odd[place][doubtful] = numbers_in(texts[place])
        return [(values[place], odd[place]) for place in wanted]

    def _some_rows(self, rows: NDArray[np.intp]) -> list[pl.Series]:
        if 2 * rows.size > len(self._records) or self.broken.any():
            return [column.gather(rows) for column in self.columns()]
        pieces = self._records.pieces()
        text = b"\n".join([pieces[row] for row in rows.tolist()])
        return self._read(text, dict.fromkeys(range(self._width), pl.String))

    def _read(
        self, text: bytes, kinds: Mapping[int, Any], places: Sequence[int] | None = None
    ) -> list[pl.Series]:
        schema = {str(place): kind for place, kind in kinds.items()}
        frame = pl.read_csv(
            text, has_header=False, schema=schema, columns=places, ignore_errors=True
        )
        return frame.get_columns()


def cells_in(text: str) -> list[str]:
    """The cells of one record; none where it cannot be taken apart."""
    if text.endswith("\r"):
        return []
    try:
        (cells,) = csv.reader([text])
    except (csv.Error, ValueError):
        return []
    return cells


def _around_cells(codes: NDArray[np.uint8], quotes: Places) -> bool:
    """Whether each quote opens a cell, closes it, or is one of a pair.

    Every quote has a successor in ``codes``, because a record ends behind the last.
    """
    opening, closing = quotes[0::2], quotes[1::2]
    before = codes[opening - 1]
    opens = (before == COMMA) | (before == LF) | (before == QUOTE) | (opening == 0)
    after = codes[closing + 1]
    at_end = (after == CR) & (codes[np.minimum(closing + 2, len(codes) - 1)] == LF)
    closes = (after == COMMA) | (after == LF) | (after == QUOTE) | at_end
    return bool(opens.all() and closes.all())


def _ends_cell_by_cell(window: bytes) -> Ends:
    ends: list[int] = []
    place = 0
    while cell := _CELL.match(window, place):
        place = cell.end()
        if cell[1] == b"\n":
            ends.append(place - 1)
    opened = place if window[place : place + 1] == b'"' else None
    return Ends(np.array(ends, np.int64), regular=False, opened=opened)


def _widths(records: Records, width: int) -> Marks:
    """Which of some regular records have another number of cells."""
    codes = np.frombuffer(records.text, np.uint8)
    outside = codes == COMMA
    if b'"' in records.text:
        outside &= np.cumsum(codes == QUOTE, dtype=np.uint8) % 2 == 0
    commas = np.flatnonzero(outside)
    starts, ends = records.starts, records.ends
    if width > 1 and commas.size == len(starts) * (width - 1):
        by_row = commas.reshape(-1, width - 1)
        if ((by_row[:, 0] >= starts) & (by_row[:, -1] < ends)).all():
            return np.zeros(len(starts), dtype=np.bool_)
    found = np.searchsorted(commas, ends) - np.searchsorted(commas, starts) + 1
    return np.asarray(found != width)


def _cells_row_by_row(records: Records, width: int) -> tuple[list[pl.Series], Marks]:
    rows = [cells_in(piece.decode()) for piece in records.pieces()]
    broken = np.array([len(cells) != width for cells in rows], dtype=np.bool_)
    nothing = [""] * width
    whole = [nothing if odd else cells for cells, odd in zip(rows, broken.tolist(), strict=True)]
    columns = zip(*whole, strict=True) if whole else [()] * width
    return [pl.Series(values=column, dtype=pl.String) for column in columns], broken
