"""SenML (RFC 8428): base fields and relative times resolved, records of one moment made a reading.

A name is <probe>/<quantity> or <depth in m>/<quantity>, with the station before it or not, the
parts parted by / or by colons: north-1/p1/temperature, 0.20:apparent_permittivity.
"""

import math
import re
from collections.abc import Callable, Mapping
from decimal import Decimal
from typing import Any

from models.quantity import QUANTITIES
from models.readings import quantity_of
from service.errors import Unprocessable
from service.faults import Fault, shown
from service.stations.ingest.arrival import Broken, Rules, converter, likely
from service.stations.series_edges import FIRST, LAST
from service.stations.times import SECOND, rfc3339
from service.store.interface import VALUES

MEDIA_TYPE = "application/senml+json"
VERSION = 10
RELATIVE = 2**28
"""Seconds below which a time is relative to now (RFC 8428, section 4.5.3)."""
UNITS: Mapping[str, str] = {
    "": "", "/": "1", "1": "1", "Cel": "Cel", "K": "K", "S/m": "S/m", "mS/m": "mS/m", "s": "s",
    "ms": "ms",
    "Hz": "Hz", "MHz": "MHz", "m": "m", "mm": "mm", "cm": "cm",
}  # fmt: skip
"""UCUM codes by SenML unit (RFC 8428, table 2; RFC 8798)."""
_SPELT = ", ".join(unit for unit in UNITS if unit)

_BASE = ("bn", "bt", "bu", "bv", "bs", "bver")
_KNOWN = frozenset((*_BASE, "n", "u", "v", "vs", "vb", "vd", "s", "t", "ut"))
_NAME = re.compile(r"[A-Za-z0-9][A-Za-z0-9\-:./_]*")
_DEPTH = re.compile(r"\d+(\.\d+)?")

Point = Callable[[int, str], str]


def resolved(pack: Any, rules: Rules, now: int) -> tuple[list[Any], Point]:
    """Rows of JSON readings from a pack; a record that is no reading becomes its own fault.

    now: microseconds since 1970.
    Raises Unprocessable where the pack as a whole cannot be read.
    """
    if not isinstance(pack, list) or not pack or not all(isinstance(r, dict) for r in pack):
        raise _refusal("a SenML pack is a list of records, at least one", "#")
    base: dict[str, Any] = {"bver": VERSION}
    rows: dict[tuple[str | float, int], dict[str, Any]] = {}
    origin: list[int] = []
    merged: list[Any] = []
    for place, record in enumerate(pack):
        _check_labels(record, place)
        base |= {key: record[key] for key in _BASE if key in record}
        if base["bver"] != VERSION:
            told = shown(base["bver"])
            raise _refusal(f"expected bver {VERSION}, found {told}", f"#/{place}/bver")
        if not any(key in record for key in ("v", "vs", "vb", "vd", "s", "n", "t")):
            continue  # base fields alone
        try:
            where, quantity, moment, value = _record(base, record, rules, now)
        except ValueError as error:
            merged.append(Broken(str(error)))
            origin.append(place)
            continue
        at = _place(where)
        row = rows.get((at, moment))
        if row is None or row.get(quantity, value) != value:
            named = {"probe": where} if isinstance(at, str) else {"depth": at}
            row = rows[at, moment] = {"time": rfc3339(moment), **named}
            merged.append(row)
            origin.append(place)
        row[quantity] = value
    return merged, lambda row, _: f"#/{origin[row]}"


def _check_labels(record: Mapping[str, Any], place: int) -> None:
    for label in record:
        if label not in _KNOWN and label.endswith("_"):
            raise _refusal(f"the label {shown(label)} must be understood, and is not", f"#/{place}")


def _record(
    base: Mapping[str, Any], record: Mapping[str, Any], rules: Rules, now: int
) -> tuple[str, str, int, float]:
    """Place, quantity, moment and value of one record. Raises ValueError."""
    where, quantity = _name(_text(base, "bn") + _text(record, "n"), rules.station.name)
    if "v" not in record and "bv" not in base:
        raise ValueError("expected a number v; texts, truths, data and sums are no readings here")
    value = _number(base, "bv") + _number(record, "v")
    code = record.get("u", base.get("bu", ""))
    if code not in UNITS:
        raise ValueError(f"the unit {shown(code)} is not read here; known are {_SPELT}")
    about, is_width = quantity_of(quantity)
    taken = UNITS[code]
    known = [unit.code for unit in QUANTITIES[about].units]
    if taken == "" and QUANTITIES[about].unit == "1":
        taken = "1"
    if taken not in known:
        spelt = ", ".join(senml for senml, ucum in UNITS.items() if ucum in known)
        raise ValueError(f"{quantity} cannot be in {shown(code)}; it takes {spelt}")
    if taken != QUANTITIES[about].unit:
        value = float(converter(about, taken, is_width=is_width)(value))
    return where, quantity, _moment(base, record, now), value


def _name(name: str, station: str) -> tuple[str, str]:
    if not _NAME.fullmatch(name):
        raise ValueError(f"{shown(name)} is no SenML name")
    *before, quantity = re.split("[/:]", name)
    if quantity not in VALUES:
        near = likely(quantity)
        mend = f"did you mean {near}?" if near else f"known are {', '.join(VALUES)}"
        raise ValueError(
            f"the name ends in {shown(quantity)}, which is no number of a reading; {mend}"
        )
    if len(before) > 1 and before[-2] != station:
        raise ValueError(f"the name is of the station {shown(before[-2])}, not of {station}")
    if not before or not before[-1]:
        raise ValueError(f"expected <probe>/{quantity} or <depth>/{quantity}, found {shown(name)}")
    return before[-1], quantity


def _place(where: str) -> str | float:
    """A probe, or a depth: 0.2 and 0.20 are one."""
    return float(where) if _DEPTH.fullmatch(where) else where


_NO_DATE = "the time is out of any calendar: SenML times are seconds since 1970, not milliseconds"


def _moment(base: Mapping[str, Any], record: Mapping[str, Any], now: int) -> int:
    """Microseconds; decimal arithmetic, so that a time is the same however it is split."""
    seconds = Decimal(repr(_number(base, "bt"))) + Decimal(repr(_number(record, "t")))
    moment = int(seconds * 1_000_000)
    moment = now + moment if seconds < RELATIVE else moment
    if not FIRST * SECOND < moment < LAST * SECOND:
        raise ValueError(_NO_DATE)
    return moment


def _number(record: Mapping[str, Any], label: str) -> float:
    value = record.get(label, 0)
    if type(value) not in {int, float} or not math.isfinite(value):
        raise ValueError(f"expected {label} to be a number, found {shown(value)}")
    return float(value)


def _text(record: Mapping[str, Any], label: str) -> str:
    value = record.get(label, "")
    if not isinstance(value, str):
        raise ValueError(f"expected {label} to be text, found {shown(value)}")  # noqa: TRY004
    return value


def _refusal(detail: str, place: str) -> Unprocessable:
    return Unprocessable(detail, [Fault(detail, place)])
