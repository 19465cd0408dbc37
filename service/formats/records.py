"""A stream of bytes cut into whole records: the same records however the stream arrived.

A window of a fixed number of bytes is cut after the last record that ends in it, and the next
window begins there. Where windows begin depends on the bytes alone, never on the pieces they
came in.
"""

import codecs
from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np
import polars as pl
from numpy.typing import NDArray

from service.formats.errors import MAGIC, FormatError, RecordTooLong, looks_like

BLOCK_BYTES = 1 << 20
"""Some twenty thousand rows of a logger: one block of the estimates."""
LINE_BYTES = 1 << 20
FIRST_BYTES = 64 << 10
"""The records that begin in so many bytes decide what is read of a table, whatever the block."""
BLANK_BYTES = 16 << 20
"""Of blank lines, as many again as of others and these: no logger writes more."""

Places = NDArray[np.int64]
LF, CR = 10, 13
BLANK = b" \t\r\n"
BLANKS = np.frombuffer(BLANK, np.uint8)


@dataclass(frozen=True, slots=True)
class Ends:
    """Where the records of a window end."""

    places: Places
    """Of their line feeds; the window begins with a record."""
    regular: bool = True
    """A fast reader takes these records apart without doubt."""
    feeds: Places | None = None
    """Of every line feed of the window, where they have been looked for."""
    opened: int | None = None
    """Where a cell begins that the end of the window leaves open, if no record ends before."""


def line_ends(window: bytes) -> Ends:
    """Every line is a record."""
    feeds = np.flatnonzero(np.frombuffer(window, np.uint8) == LF)
    return Ends(feeds, feeds=feeds)


@dataclass(frozen=True, slots=True)
class Records:
    """Whole records, in order, without the blank ones."""

    text: bytes
    starts: Places
    ends: Places
    """Without the line end."""
    lines: Places
    """The line each record begins at, counted from 1."""
    regular: bool
    """A fast reader finds these records, and no others, in the text."""
    dense: bool
    """Each line of the text is one of the records."""

    def __len__(self) -> int:
        return len(self.starts)

    @classmethod
    def none(cls) -> "Records":
        """No records."""
        places = np.zeros(0, np.int64)
        return cls(b"", places, places, places, regular=False, dense=False)

    def first_ones(self) -> int:
        """How many records of a table's first block decide what is read of it."""
        return int(np.searchsorted(self.starts, FIRST_BYTES))

    def without_first(self) -> "Records":
        """All but the first record."""
        begin = int(self.starts[1]) if len(self) > 1 else len(self.text)
        return Records(
            self.text[begin:],
            self.starts[1:] - begin,
            self.ends[1:] - begin,
            self.lines[1:],
            self.regular,
            self.dense,
        )

    def pieces(self) -> list[bytes]:
        """The records one by one, to the letter."""
        places = zip(self.starts.tolist(), self.ends.tolist(), strict=True)
        return [self.text[start:end] for start, end in places]

    def series(self) -> pl.Series:
        """The records as a column of text, to the letter."""
        if not self.dense:
            return pl.Series(self.pieces(), dtype=pl.Binary).cast(pl.String)
        lines = pl.Series([self.text.decode()]).str.split("\n").explode().head(len(self))
        return lines.str.strip_suffix("\r") if b"\r" in self.text else lines


class RecordCutter:
    """Takes bytes as they come, gives records block by block.

    find: where records end in a window that begins with a record.
    block_bytes: size of a window; one without a whole record is widened once, to the longest
    record that is taken (line_bytes).
    """

    def __init__(
        self,
        find: Callable[[bytes], Ends],
        *,
        block_bytes: int = BLOCK_BYTES,
        line_bytes: int = LINE_BYTES,
    ) -> None:
        self._find = find
        self._line_bytes = line_bytes
        first, widest = max(block_bytes, FIRST_BYTES), max(block_bytes, line_bytes + len(b"\r\n"))
        self._sizes, self._later_sizes = (first, max(first, widest)), (block_bytes, widest)
        self._waiting = bytearray()
        self._line = 1
        self._marked = self._begun = False
        self._blanks = self._others = 0

    def feed(self, piece: bytes) -> Iterator[Records]:
        """The blocks that this piece completes.

        Raises FormatError where the bytes are not UTF-8, RecordTooLong.
        """
        self._waiting += piece
        return self._blocks(last=False)

    def close(self) -> Iterator[Records]:
        """What is left when nothing more comes; the last record may lack its line end.

        Raises FormatError where the bytes are not UTF-8 or a quoted cell is still open,
        RecordTooLong.
        """
        if self._waiting and not self._waiting.endswith(b"\n"):
            self._waiting += b"\n"
        return self._blocks(last=True)

    def _blocks(self, *, last: bool) -> Iterator[Records]:
        if not self._begun and not self._begin(last=last):
            return
        while self._waiting and (last or len(self._waiting) >= self._sizes[0]):
            records = self._next(last=last)
            if records is None:
                return
            self._sizes = self._later_sizes
            if len(records):
                yield records

    def _begin(self, *, last: bool) -> bool:
        """Drop what stands before the first record; whether that was found."""
        if not self._marked:
            if len(self._waiting) < len(codecs.BOM_UTF8) and not last:
                return False
            self._marked = True
            if self._waiting.startswith(codecs.BOM_UTF8):
                del self._waiting[: len(codecs.BOM_UTF8)]
        blank = len(self._waiting) - len(self._waiting.lstrip(BLANK))
        dropped = self._waiting.rfind(b"\n", 0, blank) + 1
        self._line += self._waiting.count(b"\n", 0, dropped)
        self._count(dropped, 0)
        self._begun = blank < len(self._waiting)
        del self._waiting[:dropped]
        return self._begun

    def _count(self, blanks: int, others: int) -> None:
        self._blanks += blanks
        self._others += others
        if self._blanks > BLANK_BYTES + self._others:
            most = f"at most {BLANK_BYTES} bytes of blank lines"
            raise RecordTooLong(most, "more", line=self._line)

    def _next(self, *, last: bool) -> Records | None:
        """The records of the next window; None while it takes more bytes to tell."""
        window, ends = b"", Ends(np.zeros(0, np.int64))
        for size in self._sizes:
            if len(self._waiting) < size and not last:
                return None
            with memoryview(self._waiting) as waiting:
                window = bytes(waiting[:size])
            ends = self._find(window)
            if len(ends.places):
                return self._cut(window, ends)
        self._check_utf8(window)
        line = self._line + window.count(b"\n", 0, ends.opened or 0)
        never = "" if ends.opened is None else "the quoted cell that begins here is never closed"
        if last and len(window) == len(self._waiting):
            raise FormatError("a closing quote", "the end of the body", line=line, mend=never)
        raise self._too_long(line, never)

    def _cut(self, window: bytes, ends: Ends) -> Records:
        text = window[: int(ends.places[-1]) + 1]
        self._check_utf8(text)
        del self._waiting[: len(text)]
        codes = np.frombuffer(text, np.uint8)
        starts = np.concatenate((np.zeros(1, np.int64), ends.places[:-1] + 1))
        stops = ends.places - ((codes[ends.places - 1] == CR) & (ends.places > starts))
        feeds = np.flatnonzero(codes == LF) if ends.feeds is None else ends.feeds
        count = int(np.searchsorted(feeds, ends.places[-1])) + 1
        if count == len(starts):
            lines = np.arange(self._line, self._line + count)
        else:
            lines = self._line + np.searchsorted(feeds, starts)
        self._line += count
        longest = int(np.argmax(stops - starts))
        if stops[longest] - starts[longest] > self._line_bytes:
            raise self._too_long(int(lines[longest]))
        blank = _blank(codes, starts, stops)
        whole = not blank.any()
        empty = 0 if whole else int((ends.places - starts + 1)[blank].sum())
        self._count(empty, len(text) - empty)
        if not whole:
            starts, stops, lines = starts[~blank], stops[~blank], lines[~blank]
        return Records(
            text, starts, stops, lines, ends.regular and whole, whole and count == len(starts)
        )

    def _check_utf8(self, text: bytes) -> None:
        try:
            text.decode()
        except UnicodeDecodeError as error:
            at = error.start
            if error.end == len(text) and "unexpected end" in error.reason:
                return
            line, found = self._line + text.count(b"\n", 0, at), f"the byte 0x{text[at]:02x}"
            if self._line == 1 and (meant := looks_like(text[:MAGIC])):
                raise FormatError("text in UTF-8", meant) from None
            raise FormatError("UTF-8", found, line=line, mend="save the table as UTF-8") from None

    def _too_long(self, line: int, mend: str = "") -> RecordTooLong:
        return RecordTooLong(
            f"at most {self._line_bytes} bytes in a record", "more", line=line, mend=mend
        )


def _blank(codes: NDArray[np.uint8], starts: Places, stops: Places) -> NDArray[np.bool_]:
    """Records of nothing but blanks."""
    blank = np.isin(codes[starts], BLANKS)
    if blank.any():
        letters = np.concatenate((np.zeros(1, np.int64), np.cumsum(~np.isin(codes, BLANKS))))
        blank = letters[starts] == letters[stops]
    return blank
