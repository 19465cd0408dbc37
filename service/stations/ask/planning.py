"""Which soil and which probe each stored reading is estimated with: those that were there then."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.relation import Array
from service.stations.ask.records import EFFORT, effort_of
from service.stations.ask.stored import Stored
from service.stations.documents import Documents
from service.stations.raw_settings import settings_for
from service.stations.station import Installation
from service.store.append import kind_of
from service.store.interface import RAW, Channel

Places = NDArray[np.intp]
Part = tuple[str, str, frozenset[str], str]
"""Soil, probe, the columns the series holds, and the kind of raw record: empty where none is."""


@dataclass(slots=True)
class Plan:
    """Rows by what they are estimated with."""

    parts: dict[Part, list[Places]]
    depth: Array
    """m; NaN where nothing was installed and the reading names a probe."""
    probe: Places
    """The place among ``probes`` of the one that was there, -1: none is known."""
    probes: list[str]
    troubles: list[str]
    """Why rows have no part."""


def planned(rows: Stored, documents: Documents, upto: int | None) -> Plan:
    """The parts of rows that are ordered by channel, then time.

    upto: the revision whose columns a series is taken to hold.
    """
    known: dict[str, int] = {}
    plan = Plan({}, np.full(len(rows), np.nan), np.full(len(rows), -1), [], [])
    kinds = _Kinds(rows)
    for channel, installed, places in _series(rows, documents):
        held = channel.held_at(upto) - {RAW, "depth"}
        if channel.depth is not None:
            plan.depth[places] = channel.depth
        if channel.probe is not None:
            plan.probe[places] = known.setdefault(channel.probe, len(known))
        alone = 0
        for item, inside in _by_installation(rows.time, installed, places):
            if item is None:
                alone += inside.size
                continue
            plan.depth[inside] = item.depth
            plan.probe[inside] = known.setdefault(item.probe, len(known))
            for kind, those in kinds.apart(inside):
                plan.parts.setdefault((item.soil, item.probe, held, kind), []).append(those)
        if alone:
            plan.troubles.append(
                f"{channel.station}: {_counted(alone)} of "
                f"{channel.probe or f'{channel.depth:g} m'} "
                f"{'is from a time' if alone == 1 else 'are from times'} for which no one "
                "installation is on record"
            )
    plan.probes = list(known)
    return plan


def _counted(count: int) -> str:
    return "1 reading" if count == 1 else f"{count} readings"


def within_effort(rows: Stored, documents: Documents, upto: int | None) -> int:
    """How many rows, from the first one on, hold no more raw records than one answer reads."""
    if not rows.raw:
        return len(rows)
    effort = np.zeros(len(rows), dtype=np.int64)
    effort[list(rows.raw)] = 1
    for (_, probe, _, kind), several in planned(rows, documents, upto).parts.items():
        known = documents.find("probe", probe)
        if kind and known is not None:
            cost = effort_of(kind, settings_for(known.body or {}, kind))
            effort[np.concatenate(several)] = cost
    return int(np.searchsorted(np.cumsum(effort), EFFORT, side="right"))


class _Kinds:
    """The kind of raw record of each row."""

    def __init__(self, rows: Stored) -> None:
        self._kinds = [""]
        self._of_row: Places | None = None
        if rows.raw:
            self._of_row = np.zeros(len(rows), dtype=np.intp)
            places: dict[str, int] = {"": 0}
            for row, record in rows.raw.items():
                kind = kind_of(record)
                self._of_row[row] = places.setdefault(kind, len(places))
            self._kinds = list(places)

    def apart(self, places: Places) -> Iterator[tuple[str, Places]]:
        """Rows by their kind; no kind without rows."""
        if self._of_row is None:
            if places.size:
                yield "", places
            return
        of_row = self._of_row[places]
        for number in np.unique(of_row).tolist():
            yield self._kinds[number], places[of_row == number]


def _series(
    rows: Stored, documents: Documents
) -> Iterator[tuple[Channel, list[Installation], Places]]:
    """Each channel with its installations and the places of its rows."""
    numbers, firsts = np.unique(rows.number, return_index=True)
    ends = np.append(firsts[1:], len(rows))[: len(firsts)]
    for number, first, end in zip(numbers.tolist(), firsts.tolist(), ends.tolist(), strict=True):
        channel = rows.channels[number]
        station = documents.station(channel.station)
        yield channel, station.installed(channel) if station else [], np.arange(first, end)


def _by_installation(
    times: NDArray[np.int64], installed: Sequence[Installation], places: Places
) -> Iterator[tuple[Installation | None, Places]]:
    """Each installation with the places of its rows, then those of rows that have none."""
    moments = times[places]
    left = np.ones(len(places), dtype=np.bool_)
    for item in installed:
        inside = (moments >= item.start) & (moments < item.end)
        left &= ~inside
        yield item, places[inside]
    yield None, places[left]
