"""application/json readings: a list of objects or one object of arrays, checked column by column.

No reading becomes an object of ours: the parsed JSON is turned into columns by whole-column
operations, and only where a column holds something wrong is it looked at cell by cell.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from models.quantity import NOISE, QUANTITIES, READING
from models.relation import Array
from service.errors import Unprocessable
from service.faults import Fault, nearest, pointer, shown
from service.formats.header import meant_by

TEXTS = tuple(name for name in READING if not QUANTITIES[name].unit)
NUMBERS = (*(n for n in READING if QUANTITIES[n].unit), *(f"{n}_u" for n in NOISE))
KNOWN = frozenset((*TEXTS, *NUMBERS))
NUMBER_TYPES = frozenset({float, int, type(None)})
TEXT_TYPES = frozenset({str, type(None)})
MOST = 40
"""Faults that are told one by one; of the others only how many there are."""


@dataclass(frozen=True, slots=True)
class JsonReadings:
    """Columns as sent, in the caller's units, and the shape the answer takes."""

    shape: Literal["rows", "columns"]
    count: int
    numbers: Mapping[str, Array]
    texts: Mapping[str, Sequence[str | None]]
    absent: Mapping[str, NDArray[np.bool_]]
    """Rows that do not have a key which others have."""
    told: tuple[str, ...] = ()
    """Columns that the answer repeats: what raw records were turned into."""


def decode(readings: Any, *, most: int) -> JsonReadings:
    """Columns of the parsed ``readings``.

    most: how many a JSON body may hold.
    Raises Unprocessable with a pointer to every wrong key, cell and length.
    """
    if isinstance(readings, list):
        return _decode_rows(readings, most)
    if isinstance(readings, dict):
        return _decode_columns(readings, most)
    expected = "expected a list of objects or one object of arrays"
    _refuse([Fault(f"{expected}, found {shown(readings)}", "#/readings")])
    raise AssertionError  # pragma: no cover - the line above has raised


def _decode_rows(rows: list[Any], most: int) -> JsonReadings:
    _refuse_count(len(rows), most)
    if set(map(type, rows)) != {dict}:
        _refuse(
            [
                Fault(f"expected an object, found {shown(row)}", pointer(("readings", i)))
                for i, row in enumerate(rows)
                if not isinstance(row, dict)
            ]
        )
    shapes = set(map(tuple, rows))
    names = list(dict.fromkeys(key for row in rows for key in row) if len(shapes) > 1 else rows[0])
    strangers = [name for name in names if name not in KNOWN]
    if strangers:
        first = {name: next(i for i, row in enumerate(rows) if name in row) for name in strangers}
        _refuse([_stranger(n, pointer(("readings", i, n))) for n, i in first.items()])
    cells = {name: [row.get(name) for row in rows] for name in names}
    absent: dict[str, NDArray[np.bool_]] = {}
    if len(shapes) > 1:
        absent = {name: np.array([name not in row for row in rows]) for name in names}
    return _typed("rows", len(rows), cells, absent)


def _decode_columns(columns: dict[str, Any], most: int) -> JsonReadings:
    faults = [_stranger(n, pointer(("readings", n))) for n in columns if n not in KNOWN]
    faults += [
        Fault(f"expected a list, found {shown(cells)}", pointer(("readings", name)))
        for name, cells in columns.items()
        if not isinstance(cells, list) and name in KNOWN
    ]
    if faults:
        _refuse(faults)
    counts = {name: len(cells) for name, cells in columns.items()}
    count = max(counts.values(), default=0)
    _refuse_count(count, most)
    faults = [
        Fault(
            f"arrays must be of equal length: {name} has {n}, the longest has {count}",
            pointer(("readings", name)),
        )
        for name, n in counts.items()
        if n != count
    ]
    if faults:
        _refuse(faults)
    return _typed("columns", count, columns, {})


def _typed(
    shape: Literal["rows", "columns"],
    count: int,
    cells: Mapping[str, list[Any]],
    absent: Mapping[str, NDArray[np.bool_]],
) -> JsonReadings:
    faults: list[Fault] = []
    wrong = 0
    numbers: dict[str, Array] = {}
    texts: dict[str, Sequence[str | None]] = {}
    for name, values in cells.items():
        expected, allowed = ("text", TEXT_TYPES) if name in TEXTS else ("a number", NUMBER_TYPES)
        if set(map(type, values)) <= allowed:
            if name in TEXTS:
                texts[name] = values
            else:
                numbers[name] = np.array(values, dtype=np.float64)
            continue
        odd = [place for place, value in enumerate(values) if type(value) not in allowed]
        wrong += len(odd)
        for place in odd[: MOST - len(faults)]:
            steps = (place, name) if shape == "rows" else (name, place)
            detail = f"expected {expected} or null, found {shown(values[place])}"
            faults.append(Fault(detail, pointer(("readings", *steps))))
    if faults:
        _refuse(faults, wrong - len(faults))
    gaps = {n: rows for n, rows in absent.items() if n in numbers}
    return JsonReadings(shape, count, numbers, texts, gaps)


def _stranger(name: str, place: str) -> Fault:
    meant = meant_by(name) or nearest(name, KNOWN)
    hint = f"did you mean {meant}?" if meant else f"known are {', '.join(sorted(KNOWN))}"
    return Fault(f"unknown key {shown(name)}; {hint}", place)


def _refuse_count(count: int, most: int) -> None:
    if count == 0:
        _refuse([Fault("expected at least one reading, found none", "#/readings")])
    if count > most:
        detail = f"expected at most {most} readings in a JSON body, found {count}"
        _refuse([Fault(f"{detail}: send longer tables as text/csv or NDJSON", "#/readings")])


def _refuse(faults: list[Fault], more: int = 0) -> None:
    """more: how many are wrong beside these."""
    raise Unprocessable("the readings hold what cannot be used", faults, more=more)
