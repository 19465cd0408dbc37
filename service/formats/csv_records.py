"""Where CSV records end, and their cells.

RFC 4180 has quotes around whole cells only, so that counting them tells inside from outside, in
a few passes over an array, and a fast reader can be trusted with the cells. Whether it holds is
checked at every quote. Where it does not, records are read cell by cell, a quote within an
unquoted cell being a letter like any other.
"""

import codecs
import csv
import re

import numpy as np
import polars as pl
from numpy.typing import NDArray

from service.formats.block import Marks
from service.formats.records import CR, LF, Ends, Places, Records

COMMA, QUOTE = 44, 34

csv.field_size_limit(2**31 - 1)  # the length of a record has its own limit

# A cell and what ends it. Possessive, so that a quote that opens a cell never turns into a letter.
_CELL = re.compile(rb'(?:"(?:[^"]++|"")*+"[^,\n]*+|(?!")[^,\n]*+)([,\n])')


def csv_ends(window: bytes) -> Ends:
    """The record ends of a window that begins with a record: a quoted line feed ends nothing."""
    codes = np.frombuffer(window, np.uint8)
    feeds = np.flatnonzero(codes == LF)
    if b'"' in window:
        quotes = np.flatnonzero(codes == QUOTE)
        feeds = feeds[np.searchsorted(quotes, feeds) % 2 == 0]
        if not feeds.size or not _around_cells(codes, quotes[quotes < feeds[-1]]):
            return _ends_cell_by_cell(window)
    if not feeds.size:
        return Ends(feeds)
    text = window[: feeds[-1] + 1]
    stray_return = b"\r" in text and text.count(b"\r") != text.count(b"\r\n")
    return Ends(feeds, regular=not stray_return)


def cells_of(records: Records, width: int) -> tuple[list[pl.Series], Marks]:
    """The columns of some records, and which records do not have ``width`` cells.

    A record with too many cells or too few has empty ones; so has one with a carriage return
    outside quotes, where other readers would see a row end.
    """
    if not records.regular or records.text.startswith(codecs.BOM_UTF8):
        return _cells_row_by_row(records, width)
    broken = _widths(records) != width
    text = records.text
    if broken.any():
        nothing = b'""' + b"," * (width - 1)
        pairs = zip(records.pieces(), broken.tolist(), strict=True)
        text = b"\n".join(nothing if odd else piece for piece, odd in pairs)
    frame = pl.read_csv(
        text,
        has_header=False,
        infer_schema=False,
        new_columns=[str(place) for place in range(width)],
    )
    return frame.get_columns(), broken


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


def _widths(records: Records) -> Places:
    """How many cells each of some regular records has."""
    codes = np.frombuffer(records.text, np.uint8)
    outside = codes == COMMA
    if b'"' in records.text:
        outside &= np.cumsum(codes == QUOTE, dtype=np.uint8) % 2 == 0
    commas = np.flatnonzero(outside)
    return np.searchsorted(commas, records.ends) - np.searchsorted(commas, records.starts) + 1


def _cells_row_by_row(records: Records, width: int) -> tuple[list[pl.Series], Marks]:
    rows = [cells_in(piece.decode()) for piece in records.pieces()]
    broken = np.array([len(cells) != width for cells in rows], dtype=np.bool_)
    nothing = [""] * width
    whole = [nothing if odd else cells for cells, odd in zip(rows, broken.tolist(), strict=True)]
    columns = zip(*whole, strict=True) if whole else [()] * width
    return [pl.Series(values=column, dtype=pl.String) for column in columns], broken
