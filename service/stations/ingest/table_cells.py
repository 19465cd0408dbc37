"""Columns of a table that hold something of a reading, and which of its rows are fine."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import orjson
import polars as pl
from numpy.typing import NDArray

from models.relation import Array
from service.formats.block import Block, Marks
from service.formats.cells import is_missing, numbers_in
from service.formats.errors import HeaderError
from service.formats.ndjson_rows import KEY as NDJSON
from service.stations.ingest.arrival import RAW_RECORDS, Arrival, nothing_known, raw_fault
from service.store.append import packed
from service.store.interface import VALUES

Texts = Mapping[str, pl.Series]


@dataclass(frozen=True, slots=True)
class TableCells:
    """The numbers of a block."""

    values: Mapping[str, Array]
    unreadable: Mapping[str, Marks]
    """Where NaN stands for what is no number, for columns that have such cells."""
    empty: Marks
    """Rows that have none of the columns that hold a value."""


def cells_of(block: Block, texts: Texts, strangers: Sequence[str]) -> TableCells:
    """The numbers of a block, those of columns included that its first rows did not have.

    strangers: names of columns that are none of ours.
    Raises HeaderError where no column of a table holds a value; rows of NDJSON are empty then.
    """
    values, unreadable = dict(block.values), dict(block.unreadable)
    absent = dict(block.absent)
    for name in texts.keys() - values.keys():
        if name in VALUES:
            values[name], odd = numbers_in(texts[name])
            absent[name] = texts[name].is_null().to_numpy()
            if odd.any():
                unreadable[name] = odd
    holding = [name for name in values if name != "depth"]
    kinds = [kind for kind in RAW_RECORDS if kind in texts]
    if block.header.form != NDJSON:
        if not holding and not kinds:
            listed = ", ".join(block.header.names)[:200]
            raise HeaderError("a column that holds a value", listed, mend=nothing_known(strangers))
        return TableCells(values, unreadable, np.zeros(len(block), dtype=np.bool_))
    empty = ~block.broken
    for name in holding:
        empty = empty & absent.get(name, False)
    for kind in kinds:
        empty &= texts[kind].is_null().to_numpy()
    return TableCells(values, unreadable, empty)


class Checks:
    """Which rows of a block are fine so far."""

    def __init__(self, block: Block, first: int, arrival: Arrival) -> None:
        self.fine: Marks = np.ones(len(block), dtype=np.bool_)
        self._lines, self._first, self._arrival = block.lines, first, arrival

    def refuse(self, wrong: Marks, column: str, detail: Callable[[int], str]) -> None:
        """Refuse the marked rows, each for the first thing that is wrong with it."""
        for row in np.flatnonzero(wrong & self.fine).tolist():
            line = f"line {int(self._lines[row])}"
            place = f"{line}, {column}" if column else line
            self._arrival.reject(self._first + row, place, detail(row))
        self.fine &= ~wrong


def records_in(
    texts: Texts,
    values: Mapping[str, NDArray[np.float64]],
    checks: Checks,
    units: Mapping[str, str],
) -> dict[int, bytes]:
    """The raw records of the rows that are fine, by row, as they are stored.

    units: of the numbers beside them.
    """
    found: dict[int, bytes] = {}
    carried: dict[int, list[str]] = {}
    for kind in RAW_RECORDS:
        if kind not in texts:
            continue
        there = checks.fine & ~is_missing(texts[kind])
        odd: Marks = np.zeros(len(there), dtype=np.bool_)
        for row in np.flatnonzero(there).tolist():
            record = _object(texts[kind][row])
            odd[row] = record is None
            found[row] = packed({kind: record})
            carried.setdefault(row, []).append(kind)
        checks.refuse(odd, kind, lambda _: "expected a JSON object")
    for row, kinds in carried.items():
        stated = [name for name, column in values.items() if not np.isnan(column[row])]
        if fault := raw_fault(kinds, stated, units):
            only: Marks = np.arange(len(checks.fine)) == row
            checks.refuse(only, kinds[-1], lambda _, fault=fault: fault)  # type: ignore[misc]
    return found


def _object(text: Any) -> Any:
    try:
        record = orjson.loads(text)
    except ValueError:
        return None
    return record if isinstance(record, dict) else None
