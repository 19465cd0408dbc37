"""Edges of bins in local time: quarters of an hour, hours and days, whatever the clocks do."""

import math
from collections.abc import Mapping
from datetime import date, datetime, timedelta
from types import MappingProxyType
from zoneinfo import ZoneInfo

import numpy as np

from models.errors import Complaint, ParameterError
from models.relation import Array

EVERY: Mapping[str, float] = MappingProxyType({"15m": 900.0, "1h": 3600.0, "1d": 86_400.0})
"""Usual length of a bin, s, by its name in a query."""
FIRST, LAST = -62_000_000_000.0, 253_000_000_000.0
"""s since the epoch between which every zone has a calendar."""


def zone_of(name: str) -> ZoneInfo:
    """The time zone of an IANA name: Europe/Berlin, UTC.

    Raises ParameterError for a name that is none.
    """
    try:
        return ZoneInfo(name)
    except (OSError, ValueError, KeyError):  # also for names that climb out of the folder
        detail = f"takes an IANA time zone such as UTC or Europe/Berlin, found {name[:40]!r}"
        raise ParameterError("series", [Complaint("zone", detail)]) from None


def bin_edges(start: float, end: float, every: str, zone: ZoneInfo) -> Array:
    """Edges of the whole bins that hold the time from ``start`` to just before ``end``.

    start, end: s since the epoch; every: a key of ``EVERY``.

    A day is from one local midnight to the next, so it has 23 or 25 h when the clocks change; where
    a clock skips midnight, it begins with what follows. Shorter bins are counted from local
    midnight; the last one of a day may be cut short (where clocks change by half an hour).
    Raises ParameterError when ``every`` is none of those or the end is not after the start.
    """
    _check(start, end, every)
    day = datetime.fromtimestamp(start, zone).date()
    midnights = []
    while not midnights or midnights[-1] < end:
        midnights.append(_midnight(day, zone))
        day += timedelta(days=1)
    if midnights[0] > start:  # the clock went back over midnight: the day began the evening before
        midnights.insert(0, _midnight(datetime.fromtimestamp(start, zone).date(), zone, fold=0))
    edges = np.array(midnights)
    if every == "1d":
        return edges
    parts = np.concatenate([_parts(*ends, EVERY[every]) for ends in zip(edges, edges[1:])])
    first = int(np.searchsorted(parts, start, side="right")) - 1
    last = int(np.searchsorted(parts, end, side="left"))
    return np.append(parts, edges[-1])[first : last + 1]


def _parts(midnight: float, following: float, length: float) -> Array:
    return np.arange(midnight, following, length)


def _midnight(day: date, zone: ZoneInfo) -> float:
    return datetime(day.year, day.month, day.day, tzinfo=zone).timestamp()
