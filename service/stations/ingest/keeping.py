"""Hand checked readings to the writer, and tell what became of each."""

import asyncio
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

import anyio.to_thread

from service.errors import NotFound
from service.stations.documents import Documents, Shelf
from service.stations.ingest.arrival import SHOWN, Arrival, Rejected
from service.stations.ingest.placing import Misplaced, beside_a_probe, read_twice
from service.stations.ingest.remarking import (
    Suspicions,
    advice_on_gone,
    advice_on_names,
    advice_on_nothing,
    advice_on_twice,
)
from service.stations.problems import Conflicted
from service.stations.station import Station
from service.stations.times import rfc3339
from service.store.errors import Stale
from service.store.interface import Batch, Channel, Outcome
from service.store.writer import MOST_ROWS, Writer

PATIENCE = 5
"""How often a batch is handed in again when soils, probes or stations keep changing."""


@dataclass(slots=True)
class Tally:
    """What became of all rows of a request."""

    accepted: int = 0
    completed: int = 0
    duplicates: int = 0
    conflicts: list[Mapping[str, Any]] = field(default_factory=list)
    conflict_count: int = 0
    rejected: list[Rejected] = field(default_factory=list)
    rejected_count: int = 0
    missing: int = 0
    ignored: dict[str, None] = field(default_factory=dict)
    suspicions: Suspicions = field(default_factory=Suspicions)
    misplaced: Misplaced = field(default_factory=Misplaced)
    gave_way: int = 0
    read_twice: list[tuple[str, int]] = field(default_factory=list)

    def note(self, arrival: Arrival, station: Station | None, documents: Documents) -> None:
        """Add what was found before anything was kept."""
        self.rejected += arrival.rejected[: SHOWN - len(self.rejected)]
        self.rejected_count += arrival.rejected_count
        self.missing += arrival.missing
        self.ignored |= dict.fromkeys(arrival.ignored)
        self.suspicions.note(arrival.rows)
        if station is not None:
            self.misplaced.note(arrival.rows, station, documents)

    def add(self, outcome: Outcome, batch: Batch, numbers: Sequence[int]) -> None:
        """Add what became of a batch."""
        self.accepted += outcome.accepted
        self.completed += outcome.completed
        self.duplicates += outcome.duplicates
        self.gave_way += outcome.gave_way
        self.conflict_count += len(outcome.clashes)
        for clash in outcome.clashes[: SHOWN - len(self.conflicts)]:
            place = batch.places[clash.row]
            self.conflicts.append(
                {
                    "row": numbers[clash.row],
                    "time": rfc3339(batch.times[clash.row]),
                    **told_place(place),
                    "kept": clash.kept,
                    "sent": clash.sent,
                }
            )

    def document(self) -> dict[str, Any]:
        """As the answer tells it."""
        told: dict[str, Any] = {
            "accepted": self.accepted,
            "completed": self.completed,
            "duplicates": self.duplicates,
            "conflicts": self.conflicts,
            "rejected": [
                {"row": r.row, "pointer": r.pointer, "detail": r.detail}
                for r in sorted(self.rejected, key=lambda one: one.row)
            ],
            "missing": self.missing,
            "ignored": list(self.ignored),
            "advisories": [
                *advice_on_nothing(
                    self.accepted + self.completed + self.duplicates, self.rejected_count
                ),
                *advice_on_names(self.ignored),
                *self.suspicions.advisories(),
                *advice_on_gone(self.gave_way),
                *self.misplaced.advisories(),
                *advice_on_twice(self.read_twice),
            ],
        }
        for name, count in (("conflicts", self.conflict_count), ("rejected", self.rejected_count)):
            if count > len(told[name]):
                told[f"{name}_not_shown"] = count - len(told[name])
        return told


def told_place(place: str) -> dict[str, Any]:
    """Probe or depth of a place, as a row tells it."""
    known = Channel(0, "", place, {})
    return {"depth": known.depth} if known.probe is None else {"probe": known.probe}


async def keep(
    writer: Writer, shelf: Shelf, station: str, arrival: Arrival, documents: Documents, tally: Tally
) -> None:
    """Keep the rows of an arrival; returns when they are durable.

    Raises NotFound when the station is gone, Conflicted when a probe is.
    """
    tally.note(arrival, documents.station(station), documents)
    parts = list(arrival.rows.batches(station, documents.revision, MOST_ROWS))
    if len(parts) == 1:
        outcomes = [await _kept(writer, shelf, parts[0][1])]
    else:
        outcomes = await asyncio.gather(*(_kept(writer, shelf, batch) for _, batch in parts))
    known = documents.station(station)
    if known is not None and beside_a_probe(arrival.rows, known):
        found = await anyio.to_thread.run_sync(read_twice, shelf.store, arrival.rows, known)
        tally.read_twice += found
    for (start, batch), outcome in zip(parts, outcomes, strict=True):
        tally.add(outcome, batch, arrival.rows.numbers[start : start + len(batch)])


async def _kept(writer: Writer, shelf: Shelf, batch: Batch) -> Outcome:
    for _ in range(PATIENCE):
        try:
            return await writer.append(batch)
        except Stale:
            _, documents = await anyio.to_thread.run_sync(shelf.fresh)
            batch = _still_right(batch, documents)
    raise Conflicted("soils, probes and stations keep changing: send the readings again")


def _still_right(batch: Batch, documents: Documents) -> Batch:
    """The batch, if it is right by these documents as well."""
    if documents.find("station", batch.station) is None:
        raise NotFound(f"there is no station {batch.station} any more")
    for place in set(batch.places):
        if not place.startswith("@") and documents.find("probe", place) is None:
            raise Conflicted(f"the probe {place} was deleted meanwhile")
    return replace(batch, documents=documents.revision)
