"""Where CSV records end: a line feed inside a quoted cell ends nothing.

RFC 4180 has quotes around whole cells only, so that counting them tells inside from outside: one
pass over an array. Whether that holds is checked at every quote; where it does not, the window
is read cell by cell, a quote within an unquoted cell being a letter like any other.
"""

import re

import numpy as np
from numpy.typing import NDArray

from service.formats.records import CR, LF, Ends

COMMA, QUOTE = 44, 34

_CELL = re.compile(rb'(?:"(?:[^"]++|"")*+"[^,\n]*+|(?!")[^,\n]*+)([,\n])')


def csv_ends(window: bytes) -> Ends:
    """The record ends of a window that begins with a record."""
    codes = np.frombuffer(window, np.uint8)
    feeds = np.flatnonzero(codes == LF)
    if b'"' in window:
        quotes = np.flatnonzero(codes == QUOTE)
        feeds = feeds[np.searchsorted(quotes, feeds) % 2 == 0]
        if not len(feeds) or not _whole_cells(codes, quotes[quotes < feeds[-1]]):
            return _cell_by_cell(window)
    if not len(feeds):
        return Ends(feeds)
    return Ends(feeds, regular=not _stray_return(window[: feeds[-1] + 1]))


def commas_outside(text: bytes) -> NDArray[np.int64]:
    """The places of the commas between cells, in regular records."""
    codes = np.frombuffer(text, np.uint8)
    commas = codes == COMMA
    if b'"' in text:
        commas &= np.cumsum(codes == QUOTE, dtype=np.uint8) % 2 == 0
    return np.flatnonzero(commas)


def _whole_cells(codes: NDArray[np.uint8], quotes: NDArray[np.int64]) -> bool:
    """Whether each quote opens a cell, closes it, or is one of a pair.

    Every quote has a successor in ``codes``: the records end behind the last.
    """
    opening, closing = quotes[0::2], quotes[1::2]
    before = codes[opening - 1]
    opens = (before == COMMA) | (before == LF) | (before == QUOTE) | (opening == 0)
    after = codes[closing + 1]
    ends_line = (after == CR) & (codes[np.minimum(closing + 2, len(codes) - 1)] == LF)
    closes = (after == COMMA) | (after == LF) | (after == QUOTE) | ends_line
    return bool(opens.all() and closes.all())


def _stray_return(text: bytes) -> bool:
    """Whether a carriage return stands anywhere but before a line feed."""
    return b"\r" in text and text.count(b"\r") != text.count(b"\r\n")


def _cell_by_cell(window: bytes) -> Ends:
    ends: list[int] = []
    place = 0
    while cell := _CELL.match(window, place):
        place = cell.end()
        if cell[1] == b"\n":
            ends.append(place - 1)
    opened = place if window[place : place + 1] == b'"' else None
    return Ends(np.array(ends, np.int64), regular=False, opened=opened)
