"""Edges of bins in local time: quarters of an hour, hours and days, whatever the clocks do."""

import itertools
from collections.abc import Mapping
from datetime import date, datetime, timedelta
from types import MappingProxyType
from zoneinfo import ZoneInfo

import numpy as np

from models.errors import Complaint, ParameterError
from models.relation import Array

EVERY: Mapping[str, float] = MappingProxyType({"15m": 900.0, "1h": 3600.0, "1d": 86_400.0})
"""Usual length of a bin, s, by its name in a query."""
FIRST, LAST = -61_800_000_000.0, 252_700_000_000.0
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
    day = datetime.fromtimestamp(start, zone).date() - timedelta(days=1)
    midnights = [_midnight(day, zone)]
    while midnights[-1] < end:
        day += timedelta(days=1)
        midnights.append(_midnight(day, zone))
    edges = np.unique(midnights)  # where a zone skips a whole day, two midnights are one
    if every != "1d":
        within = [np.arange(*ends, EVERY[every]) for ends in itertools.pairwise(edges)]
        edges = np.concatenate([*within, edges[-1:]])
    first = int(np.searchsorted(edges, start, side="right")) - 1
    last = int(np.searchsorted(edges, end, side="left"))
    return edges[first : last + 1]


def _midnight(day: date, zone: ZoneInfo) -> float:
    """The first instant of a day; where clocks skip midnight, that of the change."""
    return datetime(day.year, day.month, day.day, tzinfo=zone).timestamp()


def _check(start: float, end: float, every: str) -> None:
    complaints = []
    if every not in EVERY:
        detail = f"takes every as one of {', '.join(EVERY)}, found {every[:20]!r}"
        complaints.append(Complaint("every", detail))
    if not FIRST <= start < end <= LAST:
        complaints.append(
            Complaint("end", "takes an end after the start, between years 12 and 9979")
        )
    if complaints:
        raise ParameterError("series", complaints)
