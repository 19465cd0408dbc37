"""Readings as JSON: rows or columns; each row is judged by itself."""

import math
from collections.abc import Callable, Mapping
from typing import Any

from models.conversion import refuse_units
from service.errors import Unprocessable
from service.faults import Fault, shown
from service.stations.ingest.arrival import (
    KNOWN,
    RAW_RECORDS,
    Arrival,
    Broken,
    Rows,
    Rules,
    nothing_known,
    raw_fault,
)
from service.stations.times import TimeError, microseconds
from service.store.append import packed
from service.store.interface import RAW, VALUES, place_at

Row = Mapping[str, Any]
Cells = dict[str, float | bytes]
_VALUES = frozenset(VALUES)
_KNOWN = frozenset(KNOWN)
_KEYS = frozenset({"readings", "units", "probe", "depth"})
_NUMBERS = frozenset({float, int})


class RowError(ValueError):
    """A row cannot be kept: in which cell, and why."""

    def __init__(self, key: str, detail: str) -> None:
        super().__init__(detail)
        self.key = key


def taken_apart(document: Any, most: int) -> tuple[list[Any], Callable[[int, str], str], Row]:
    """The rows of a document, how to point at one of their cells, and what holds for all of them.

    Raises Unprocessable where the document is not of the form.
    """
    if not isinstance(document, dict) or "readings" not in document:
        raise _refusal("expected an object with readings, a list or an object of arrays", "#")
    for key in document.keys() - _KEYS:
        listed = ", ".join(sorted(_KEYS))
        raise _refusal(f"unknown key {shown(key)}; known are {listed}", f"#/{key[:80]}")
    units = document.get("units", {})
    if not isinstance(units, dict) or not all(isinstance(code, str) for code in units.values()):
        raise _refusal("expected an object of UCUM codes", "#/units")
    refuse_units(units)
    readings = document["readings"]
    rows, point = readings, _point_row
    if isinstance(readings, dict):
        rows, point = _transposed(readings), _point_column
    if not isinstance(rows, list):
        raise _refusal("expected a list of objects or one object of arrays", "#/readings")
    if len(rows) > most:
        raise _refusal(
            f"expected at most {most} readings, found {len(rows)}: send longer tables as text/csv "
            "or NDJSON",
            "#/readings",
        )
    shared = {key: document[key] for key in ("probe", "depth") if key in document}
    return rows, point, {"units": units, "shared": shared}


EMPTY = frozenset({"missing", "ignored", "depth"})
"""What a row may hold and still be no reading; one that says null or a sentinel is one."""


def check_rows(
    rows: list[Any], point: Callable[[int, str], str], shared: Row, rules: Rules
) -> Arrival:
    """The rows that can be kept, and what is wrong with the others."""
    kept = Rows([], [], [], {})
    arrival = Arrival(kept)
    convert = rules.converters()
    numbers: list[int] = []
    places: list[str] = []
    times: list[int] = []
    cells: list[Cells] = []
    ignored: dict[str, None] = {}
    for number, row in enumerate(rows):
        try:
            place, moment, found = _checked(row, shared, rules, convert)
        except RowError as error:
            arrival.reject(number, point(number, error.key), str(error))
            continue
        arrival.missing += found.pop("missing")
        for key in found.pop("ignored"):
            ignored[key] = None
        numbers.append(number)
        places.append(place)
        times.append(moment)
        cells.append(found)
    names = dict.fromkeys(name for found in cells for name in found)
    ordered = [name for name in (*VALUES, RAW) if name in names]
    values = {name: [found.get(name) for found in cells] for name in ordered}
    arrival.rows = Rows(numbers, places, times, values)
    arrival.ignored = list(ignored)
    return arrival


def _checked(
    row: Any, shared: Row, rules: Rules, convert: Mapping[str, Callable[[Any], Any]]
) -> tuple[str, int, dict[str, Any]]:
    if type(row) is not dict:
        told = str(row) if type(row) is Broken else f"expected an object, found {shown(row)}"
        raise RowError("", told)
    row = {**shared, **row} if shared else row
    moment = _moment(row, rules)
    found: dict[str, Any] = {"missing": 0, "ignored": []}
    for key, value in row.items():
        if key in _VALUES:
            _take(found, key, value, rules.station.sentinels, convert.get(key))
        elif key not in _KNOWN:
            found["ignored"].append(key)
    _take_record(found, row, rules.units)
    if not found["missing"] and not found.keys() - EMPTY:
        raise RowError("", nothing_known(found["ignored"]))
    return _place(row, found, rules), moment, found


def _take_record(found: dict[str, Any], row: Row, units: Mapping[str, str]) -> None:
    """Put the raw record of a row among its cells, if it carries one."""
    kinds = [kind for kind in RAW_RECORDS if kind in row]
    stated = [kind for kind in kinds if row[kind] is not None]
    found["missing"] += len(kinds) - len(stated)
    if fault := raw_fault(stated, found, units):
        raise RowError(stated[-1], fault)
    for kind in stated:
        if not isinstance(row[kind], dict):
            raise RowError(kind, f"expected an object, found {shown(row[kind])}")
        found[RAW] = packed({kind: row[kind]})


def _moment(row: Row, rules: Rules) -> int:
    text = row.get("time")
    if "time" not in row:
        near = next((name for name in row if name.strip().casefold() == "time"), None)
        mend = f"; does {shown(near)} mean time?" if near else ""
        raise RowError("time", f"the time is missing{mend}")
    if type(text) is not str:
        form = 'RFC 3339 text with an offset, such as "2026-05-04T06:00:00Z"'
        raise RowError("time", f"expected the time as {form}, found {shown(text)}")
    try:
        moment = microseconds(text)
    except TimeError as error:
        raise RowError("time", f"{error}, found {shown(text)}") from None
    if fault := rules.time_fault(moment):
        raise RowError("time", fault)
    return moment


def _take(
    found: dict[str, Any],
    key: str,
    value: Any,
    sentinels: Mapping[str, frozenset[float]],
    convert: Callable[[Any], Any] | None,
) -> None:
    """Put a cell among the found ones, in the unit of the API."""
    if value is None or (type(value) in _NUMBERS and value in sentinels.get(key, ())):
        found["missing"] += 1
        return
    if type(value) not in _NUMBERS:
        raise RowError(key, f"expected a number or null, found {shown(value)}")
    try:
        number = float(value if convert is None else convert(value))
    except OverflowError:
        number = math.inf
    if not math.isfinite(number):
        raise RowError(key, f"expected a finite number, found {shown(value)}")
    found[key] = number


def _place(row: Row, found: dict[str, Any], rules: Rules) -> str:
    probe = row.get("probe")
    if probe is not None:
        if type(probe) is not str:
            raise RowError("probe", f"expected the name of a probe, found {shown(probe)}")
        if fault := rules.probe_fault(probe):
            raise RowError("probe", fault)
        return probe
    depth = found.pop("depth", None)
    if depth is None:
        raise RowError("probe", "expected a probe or a depth: without one, the key is not complete")
    if fault := rules.depth_fault(depth):
        raise RowError("depth", fault)
    return place_at(depth)


def _transposed(columns: Mapping[str, Any]) -> list[dict[str, Any]]:
    """Rows of an object of arrays; a single value counts for all of them."""
    lengths = {name: len(cells) for name, cells in columns.items() if isinstance(cells, list)}
    if len(set(lengths.values())) != 1:
        told = ", ".join(f"{name} {n}" for name, n in lengths.items()) or "none"
        raise _refusal(f"expected arrays of one length, found {told}"[:400], "#/readings")
    count = next(iter(lengths.values()))
    full = [cells if isinstance(cells, list) else [cells] * count for cells in columns.values()]
    return [dict(zip(columns, row, strict=True)) for row in zip(*full, strict=True)]


def _point_row(row: int, key: str) -> str:
    return f"#/readings/{row}/{key}" if key else f"#/readings/{row}"


def _point_column(row: int, key: str) -> str:
    return f"#/readings/{key}/{row}"


def _refusal(detail: str, place: str) -> Unprocessable:
    return Unprocessable(detail, [Fault(detail, place)])
