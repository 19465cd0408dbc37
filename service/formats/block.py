"""What travels between a decoder, the estimates and an encoder: a block of rows at a time."""

from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Protocol

import numpy as np
import polars as pl
from numpy.typing import NDArray

from models.flags import BIT, Flags, slugs_of, withheld
from models.readings import Readings, read
from models.relation import Array
from service.formats.csv_records import cells_in
from service.formats.errors import CellError, HeaderError, shown
from service.formats.header import folded

Marks = NDArray[np.bool_]

UNREADABLE_ROW = "unreadable_row"
"""The key under which JSON shows a row that could not be taken apart."""


@dataclass(frozen=True, slots=True)
class Header:
    """What is known of a table before its rows."""

    names: tuple[str, ...]
    """Its columns, as they are written there. NDJSON: the keys of the first block."""
    form: str
    """The short name of its format."""
    text: str = ""
    """Of the header record, to the letter."""
    line_end: str = "\n"
    schema: Any = None
    """Of a table whose columns have types: a pyarrow schema."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Block:
    """Rows of a table, in order."""

    header: Header
    lines: NDArray[np.int64]
    """The line each row begins at, shape (n,)."""
    records: pl.Series
    """The rows as they were sent, without their line ends."""
    values: Mapping[str, Array]
    """Numbers by quantity name or name_u, shape (n,), in the unit of the table; NaN: none."""
    unreadable: Mapping[str, Marks]
    """Where NaN stands for what is no number, for columns that have such cells."""
    absent: Mapping[str, Marks]
    """Where the row does not have the column at all, for columns that have such rows."""
    broken: Marks
    """Rows that could not be taken apart; they have no number in any column."""
    cells: Callable[[], list[pl.Series]]
    """Every column of the table as text under its name; null: the row does not have it."""
    batch: Any = None
    """The same rows as a pyarrow record batch, where the columns have types."""
    bare: Collection[str] = ()
    """Names of columns whose text is JSON as it stands: numbers, truth values, what is nested."""

    def __len__(self) -> int:
        return len(self.lines)

    def columns(self, names: Sequence[str]) -> list[pl.Series]:
        """The cells in the columns of the table's first rows; null where a row has none.

        Raises HeaderError for a name that came up later.
        """
        columns = self.cells()
        if [column.name for column in columns] == list(names):
            return columns
        cells = {column.name: column for column in columns}
        for name in cells.keys() - set(names):
            row = int(cells[name].is_not_null().to_numpy().argmax())
            raise HeaderError(
                "the same names as in the first rows", shown(name), line=int(self.lines[row]),
                mend="this answer has the columns of the first rows: name it there, with null, "
                "or ask for application/x-ndjson",
            )  # fmt: skip
        nothing = pl.Series(values=[None] * len(self), dtype=pl.String)
        return [cells.get(name, nothing) for name in names]

    def readings(self, units: Mapping[str, str]) -> Readings:
        """The rows in SI, gated and flagged.

        units: UCUM codes by quantity name, where they are not those of the API.

        A row is flagged by what it holds itself: a column that only its neighbours have is not
        missing from it, and a row that could not be taken apart is said to be that alone.
        """
        found = read(self.values, units, self.unreadable, self.absent)
        flags = found.flags if self.values else np.zeros(len(self), np.uint64)
        flags[self.broken] = BIT["unreadable-row"]
        return Readings(len(self), found.columns, flags)


@dataclass(frozen=True, slots=True)
class Refusal:
    """Cells that can be read, and name what cannot be used."""

    column: str
    rows: Marks
    expected: str
    mend: str = ""


@dataclass(frozen=True, slots=True)
class Answer:
    """What is appended to the rows of a block."""

    columns: Mapping[str, Array]
    """In the unit of the answer, shape (n,), NaN: no number. The first is what was asked for;
    every block of a table has the same columns."""
    flags: Flags
    refusals: tuple[Refusal, ...] = ()
    """What strictness refuses besides cells that cannot be read."""


class Decoder(Protocol):
    """Bytes in, blocks of rows out; one for each table."""

    def feed(self, piece: bytes) -> Iterable[Block]:
        """The blocks that this piece completes. Raises FormatError."""
        ...

    def close(self) -> Iterable[Block]:
        """The blocks that are left at the end; of a table without rows, one without rows.

        Raises FormatError.
        """
        ...


class Encoder(Protocol):
    """Blocks and their answers in, bytes out; one for each table."""

    def start(self, header: Header, names: tuple[str, ...]) -> bytes:
        """What stands before the rows.

        names: of the columns that are appended, without the flags.
        Raises HeaderError when the columns cannot be told in this format.
        """
        ...

    def block(self, block: Block, answer: Answer) -> bytes:
        """The rows, in order, answers appended."""
        ...

    def end(self) -> bytes:
        """What stands behind the rows."""
        ...


def refuse_first(block: Block, answer: Answer, before: int = 0) -> None:
    """Raise CellError for the first cell that cannot be read or used, or is missing and needed.

    before: rows of the table before this block.

    A missing value was needed where the row has no number and no other flag says why.
    """
    unread = block.broken.copy()
    for odd in (*block.unreadable.values(), *(refusal.rows for refusal in answer.refusals)):
        unread |= odd
    numbers = next(iter(answer.columns.values()), np.zeros(len(block)))
    missing = np.isnan(numbers) & ((answer.flags & _MISSING) != 0)
    missing &= ~withheld(answer.flags & ~_FROM_MISSING)
    refused = np.flatnonzero(unread | missing)
    if not refused.size:
        return
    row = int(refused[0])
    line = None if block.batch is not None else int(block.lines[row])
    where: Any = {"line": line, "row": before + row + 1}
    if block.broken[row]:
        expected, found = row_in_words(block, row)
        raise CellError(expected, found, **where)
    for name, odd in block.unreadable.items():
        if odd[row]:
            raise CellError("a number", _shown_cell(block, name, row), column=name, **where)
    for refusal in answer.refusals:
        if refusal.rows[row]:
            raise CellError(refusal.expected, _shown_cell(block, refusal.column, row),
                            column=refusal.column, mend=refusal.mend, **where)  # fmt: skip
    slugs = slugs_of(int(answer.flags[row] & _MISSING))
    name = slugs[0].partition(":")[2]
    raise CellError("a number", "none", column=name, mend="the model needs it", **where)


def row_in_words(block: Block, row: int) -> tuple[str, str]:
    """What a row that cannot be taken apart should be, and what it is."""
    text: str = block.records[row]
    if block.header.form != "csv":
        return "a JSON object with each key once", shown(text)
    cells = cells_in(text)
    counted = f"{_cells(len(cells))}: " if cells else ""
    return f"{_cells(len(block.header.names))}, as many as the header has", counted + shown(text)


def _cells(count: int) -> str:
    return f"{count} cell" if count == 1 else f"{count} cells"


def _shown_cell(block: Block, name: str, row: int) -> str:
    cells = (column[row] for column in block.cells() if folded(column.name) == name)
    return shown(next(cells, None) or "")


_MISSING = np.bitwise_or.reduce([BIT[slug] for slug in BIT if slug.startswith("missing:")])
_FROM_MISSING = BIT["no-permittivity"] | BIT["loss-missing"]
