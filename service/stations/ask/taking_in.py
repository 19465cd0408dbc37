"""Raw records of stored rows as columns beside the numbers that the rows hold themselves."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from models.flags import Flags
from models.quantity import READING
from models.readings import Readings, quantity_of
from models.relation import Array
from service.formats.raw_records import PERMITTIVITY, TakenIn
from service.stations.ask.planning import Part, Places
from service.stations.ask.records import TAKEN, ReadRecords, read_records
from service.stations.ask.stored import Stored
from service.stations.raw_settings import Body, settings_for
from service.stations.times import rfc3339

_IN_PLACE = frozenset({*PERMITTIVITY, "imaginary_permittivity"})
_KINDS = {kind: frozenset(quantity_of(name)[0] for name in names) for kind, names in TAKEN.items()}
"""Quantities that a kind of raw record tells."""


def columns_with(held: frozenset[str], kind: str) -> frozenset[str]:
    """The columns of rows of a series that carry a kind of raw record; of the others, the held."""
    if not kind:
        return held
    own = frozenset(name for name in held if quantity_of(name)[0] not in _IN_PLACE)
    return own | frozenset(TAKEN.get(kind, ()))


@dataclass(frozen=True, slots=True)
class Said:
    """What the reading of some raw records gave beside columns."""

    echo: Mapping[str, Any] = field(default_factory=dict)
    troubles: tuple[str, ...] = ()


class Taken:
    """The rows of a question with what their raw records say.

    most: records of rows from there on are not read.
    """

    def __init__(self, rows: Stored, most: int) -> None:
        self.rows, self.most = rows, most
        self._numbers: dict[str, Array] = {}
        self._shared: dict[str, Array] = {}
        self._flags: Flags | None = None

    def put(self, places: Places, found: ReadRecords) -> None:
        """Note what the records of some rows say."""
        if self._flags is None:
            self._flags = np.zeros(len(self.rows), dtype=np.uint64)
        self._flags[places] = found.flags
        for name, values in found.numbers.items():
            if name not in self._numbers:
                self._numbers[name] = np.full(len(self.rows), np.nan)
            self._numbers[name][places] = values
        for name, values in found.shared.items():
            self._shared.setdefault(name, np.full(len(self.rows), np.nan))[places] = values

    def columns(self, part: Part, places: Places) -> dict[str, Array]:
        """The numbers of some rows of one part, in the unit of the API.

        Where a row states a quantity itself, its record says nothing of it.
        """
        held, kind = part[2], part[3]
        if not kind:
            return {n: values[places] for n, values in self.rows.values.items() if n in held}
        told, nothing = _KINDS[kind], np.full(len(places), np.nan)

        def own(name: str) -> Array:
            values = self.rows.values.get(name)
            return nothing if values is None else values[places]

        columns: dict[str, Array] = {}
        for name in sorted(columns_with(held, kind), key=_order):
            about, _ = quantity_of(name)
            columns[name] = own(name)
            if about in told:
                stated = ~np.isnan(own(about)) & (about not in _IN_PLACE)
                read = self._numbers.get(name)
                read = nothing if read is None else read[places]
                columns[name] = np.where(stated, columns[name], read)
        return columns

    def with_shared(self, readings: Readings, places: Places) -> Readings:
        """The readings of some rows, with what those of one probe share."""
        shared = {name: values[places] for name, values in self._shared.items()}
        return TakenIn(shared=shared).with_shared(readings)

    def mark(self, flags: Flags, places: Places) -> None:
        """Add the flags of the records to those of their readings, in place."""
        TakenIn(None if self._flags is None else self._flags[places]).mark(flags)


def _order(name: str) -> tuple[int, str]:
    about = quantity_of(name)[0]
    return (READING.index(about) if about in READING else len(READING), name)


def take_in(taken: Taken, part: Part, places: Places, probe: Body) -> tuple[Places, Said]:
    """Read the raw records of one part; the rows that have columns now, and what was said."""
    rows, kind = taken.rows, part[3]
    settings = settings_for(probe, kind)
    inside, beyond = places[places < taken.most], places[places >= taken.most]
    both = [place for place in inside.tolist() if _states_permittivity(rows, place)]
    inside = inside[~np.isin(inside, both)]
    found = read_records(kind, [rows.raw[place] for place in inside.tolist()], settings)
    taken.put(inside, found)
    reasons = {int(inside[place]): reason for place, reason in found.failed.items()}
    reasons |= dict.fromkeys(both, f"a reading carries {kind} or a permittivity, found both")
    troubles = list(_told(rows, part[1], kind, reasons))
    if beyond.size:
        troubles.append(
            f"{part[1]}: {beyond.size} more raw records ({kind}) than one answer reads: ask for "
            "the estimates of the station"
        )
    fine = inside[~np.isin(inside, list(reasons))]
    echo = {kind: found.told([rows.time[place] for place in inside.tolist()])} if fine.size else {}
    return fine, Said(echo, tuple(troubles))


def _states_permittivity(rows: Stored, place: int) -> bool:
    return any(not np.isnan(rows.values[n][place]) for n in PERMITTIVITY if n in rows.values)


def _told(rows: Stored, probe: str, kind: str, reasons: Mapping[int, str]) -> list[str]:
    """Reasons, each with the first reading it is about and how many there are."""
    by_reason: dict[str, list[int]] = {}
    for place, reason in sorted(reasons.items()):
        by_reason.setdefault(reason, []).append(place)
    return [
        f"{probe}: the raw record ({kind}) of {rfc3339(int(rows.time[places[0]]))}"
        f"{f' and {len(places) - 1} more' if len(places) > 1 else ''} cannot be read: {reason}"
        for reason, places in by_reason.items()
    ]
