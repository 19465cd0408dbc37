"""What a question about stored readings says in its query."""

import base64
import binascii
import re
import time
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from models.conversion import refuse_units
from models.errors import ParameterError
from models.readings import quantity_of
from service.errors import Malformed, Unprocessable
from service.faults import Fault, hint, nearest, shown
from service.schemas.batch_query import PLACES, document_of
from service.schemas.estimates import ESTIMATED
from service.stations.ingest.arrival import converter
from service.stations.series_edges import zone_of
from service.stations.times import SECOND, TimeError, microseconds
from service.store.interface import place_at

OWN = (
    "start", "end", "probe", "depth", "every", "zone", "mean", "limit", "after", "at_revision",
    "shape", "time", "within", "quantity", "columns", "strict",
)  # fmt: skip
"""Parameters of the question rather than of the estimate."""
DEFAULT_LIMIT = 1000
_DURATION = re.compile(r"(\d{1,6})([smhd])")
_UNITS = {"s": 1, "m": 60, "h": 3600, "d": 86_400}


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """A question about one station, or all."""

    start: int | None = None
    end: int | None = None
    probe: str | None = None
    place: str | None = None
    """Of a depth."""
    every: str | None = None
    zone: str | None = None
    mean: str = "plain"
    limit: int = DEFAULT_LIMIT
    limited: bool = False
    """Whether the question says how many rows a page holds."""
    columns: tuple[str, ...] | None = None
    """Of the estimates that are answered; None: all."""
    after: tuple[int, int] | None = None
    at_revision: str | None = None
    shape: str = "rows"
    moment: int | None = None
    within: int = 3600 * SECOND
    quantity: str = ""
    estimate: Mapping[str, Any]
    """What of a request for estimates is stated, in the unit of the API."""
    units: Mapping[str, str]
    """Of the answer."""


def asked_of(
    pairs: Iterable[tuple[str, str]], allowed: Iterable[str], most: int, *, estimates: bool = True
) -> Asked:
    """A query taken apart.

    allowed: the parameters of our own this question takes. most: rows of an answer.
    Raises Unprocessable with every parameter that is unknown, repeated or not what it should be;
    Malformed where the place of a page is not one we gave out.
    """
    own: dict[str, str] = {}
    rest: list[tuple[str, str]] = []
    faults: list[Fault] = []
    known = tuple(allowed)
    for name, text in (pair for pair in pairs if pair[0] != "format"):
        if name in own:
            faults.append(Fault(f"{name} is given twice", f"?{name}"))
        elif name in known:
            own[name] = text
        elif name in OWN or not estimates:
            mend = f"; it takes {', '.join(known)}" if known else ""
            mend = mend if name in OWN else hint(name, known) or mend
            detail = f"this question takes no {shown(name)}{mend}"
            faults.append(Fault(detail, f"?{name[:80]}"))
        else:
            rest.append((name, text))
    found = _read(own, faults)
    if found.get("limit", 1) > most:
        faults.append(Fault(f"at most {most}, found {found['limit']}", "?limit"))
    faults += _backwards(own, found)
    if faults:
        raise Unprocessable("the query holds what cannot be used", faults)
    document, units = _estimate_of(rest, known)
    return Asked(**{"limit": min(DEFAULT_LIMIT, most), **found}, estimate=document, units=units)


def _estimate_of(
    rest: list[tuple[str, str]], known: tuple[str, ...]
) -> tuple[dict[str, Any], Mapping[str, str]]:
    """What is stated of a request for estimates, in the unit of the API, and the units."""
    try:
        document = document_of(rest)
    except Unprocessable as error:
        faults = [_with_own_hint(fault, known) for fault in error.errors]
        raise Unprocessable(error.detail, faults) from None
    units = document.pop("units", {})
    refuse_units(units)
    used = set()
    for section in ("soil", "probe", "assume"):
        words = document.get(section)
        for name, value in words.items() if isinstance(words, dict) else ():
            about, is_width = quantity_of(name)
            if about in units and isinstance(value, float):
                used.add(about)
                convert = converter(about, units[about], is_width=is_width)
                document[section] = {**document[section], name: float(convert(value))}
    faults = [
        Fault(_NO_COLUMN.format(name=name, columns=", ".join(ESTIMATED)), "?units")
        for name in units
        if name not in ESTIMATED and name not in used
    ]
    if faults:
        raise Unprocessable("the query holds what cannot be used", faults)
    return document, units


_NO_COLUMN = "this answer has no {name} that could be in another unit; it has {columns}"


def _with_own_hint(fault: Fault, known: tuple[str, ...]) -> Fault:
    """What is wrong with a parameter that is most likely one of the question's own."""
    name = fault.pointer.removeprefix("?")
    meant = nearest(name, (*known, *PLACES))
    if meant not in known or not fault.detail.startswith("unknown parameter"):
        return fault
    return Fault(f"unknown parameter {shown(name)}; did you mean {meant}?", fault.pointer)


def _read(own: Mapping[str, str], faults: list[Fault]) -> dict[str, Any]:
    found: dict[str, Any] = {}
    for name, text in own.items():
        try:
            found |= _READERS[name](text)
        except ValueError as error:
            faults.append(Fault(str(error), f"?{name}"))
    return found


def _backwards(own: Mapping[str, str], found: Mapping[str, Any]) -> list[Fault]:
    """What is wrong with a time that ends before it begins."""
    if not ("start" in found and "end" in found and found["start"] >= found["end"]):
        return []
    detail = (
        f"start must be before end, found start {shown(own['start'])} and end {shown(own['end'])}: "
        "exchange them, or move end, which is not itself in the time"
    )
    return [Fault(detail, "?start"), Fault(detail, "?end")]


def cursor_of(number: int, moment: int) -> str:
    """The place of a page that begins behind this row."""
    return base64.urlsafe_b64encode(f"{number}.{moment}".encode()).decode().rstrip("=")


def now() -> int:
    """Microseconds since 1970."""
    return time.time_ns() // 1000


def _after(text: str) -> dict[str, Any]:
    try:
        plain = base64.b64decode(text + "=" * (-len(text) % 4), altchars=b"-_", validate=True)
        number, moment = plain.decode("ascii").split(".")
        return {"after": (int(number), int(moment))}
    except (ValueError, binascii.Error):
        raise Malformed("after is no place that an earlier answer gave: follow its link") from None


def _moment(name: str, text: str) -> dict[str, Any]:
    try:
        return {name: microseconds(text)}
    except TimeError as error:
        raise ValueError(f"{error}, found {shown(text)}{_plus(text)}") from None


def _plus(text: str) -> str:
    """What became of a plus sign that stood for itself in an address."""
    return "; write + as %2B in an address" if re.search(r" \d\d:\d\d$", text) else ""


def _columns(text: str) -> dict[str, Any]:
    names = tuple(name.strip() for name in text.split(",") if name.strip())
    if not names:
        raise ValueError("expected names of columns, comma-separated")
    return {"columns": names}


def _depth(text: str) -> dict[str, Any]:
    if not re.fullmatch(r"-?\d{1,4}(\.\d{1,9})?", text, re.ASCII):
        raise ValueError(f"expected a depth in m, found {shown(text)}")
    return {"place": place_at(float(text))}


def _limit(text: str) -> dict[str, Any]:
    if not re.fullmatch(r"[1-9]\d{0,8}", text, re.ASCII):
        raise ValueError(f"expected a whole number from 1, found {shown(text)}")
    return {"limit": int(text), "limited": True}


def _within(text: str) -> dict[str, Any]:
    found = _DURATION.fullmatch(text)
    if not found:
        raise ValueError(f"expected a duration such as 90m, 1h or 2d, found {shown(text)}")
    return {"within": int(found[1]) * _UNITS[found[2]] * SECOND}


def _zone(text: str) -> dict[str, Any]:
    try:
        zone_of(text)
    except ParameterError as error:
        offset = "; an offset is no zone" if re.search(r"\d\d:\d\d$", text) else ""
        detail = f"{error.complaints[0].detail}{offset}{_plus(text)}"
        raise ValueError(detail.replace("takes", "expected", 1)) from None
    return {"zone": text}


def _one_of(name: str, choices: tuple[str, ...], text: str) -> dict[str, Any]:
    if text not in choices:
        raise ValueError(f"expected one of {', '.join(choices)}, found {shown(text)}")
    return {name: text}


_READERS: Mapping[str, Any] = {
    "start": lambda text: _moment("start", text),
    "end": lambda text: _moment("end", text),
    "time": lambda text: _moment("moment", text),
    "probe": lambda text: {"probe": text},
    "depth": _depth,
    "every": lambda text: _one_of("every", ("15m", "1h", "1d"), text),
    "zone": _zone,
    "mean": lambda text: _one_of("mean", ("plain", "time-weighted"), text),
    "limit": _limit,
    "columns": _columns,
    "after": _after,
    "at_revision": lambda text: {"at_revision": text},
    "shape": lambda text: _one_of("shape", ("rows", "columns"), text),
    "within": _within,
    "quantity": lambda text: {"quantity": text},
}
