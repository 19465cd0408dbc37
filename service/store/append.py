"""What became of readings whose keys are not all new: accepted, the same, more, or in conflict."""

import math
import zlib
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import orjson

from service.store.interface import (
    COLUMNS,
    IN_PLACE_OF_RAW,
    RAW,
    Batch,
    Clash,
    Outcome,
    Row,
)
from service.store.possible import is_possible

Key = tuple[int, int]
"""Channel number and time."""
Fetch = Callable[[int, Sequence[int]], list[Row]]
"""The kept readings of a channel at some times: time, revision, every column."""
ROUNDING = 1e-12
"""By how much equal numbers may differ, as a part of them and in the unit of the API."""
_RAW = COLUMNS.index(RAW)
_IN_PLACE = [COLUMNS.index(name) for name in IN_PLACE_OF_RAW]


@dataclass(slots=True)
class Examined:
    """What was found about one batch."""

    accepted: int = 0
    duplicates: int = 0
    completed: int = 0
    clashes: list[Clash] = field(default_factory=list)
    keys: list[Key] = field(default_factory=list)
    """Of the clashes."""
    gave_way: list[tuple[Key, Mapping[str, Any]]] = field(default_factory=list)
    """Impossible values of kept readings, in whose place there are possible ones now."""

    def outcome(self) -> Outcome:
        """As the caller is told."""
        gone = sum(len(values) for _, values in self.gave_way)
        return Outcome(self.accepted, self.duplicates, self.clashes, self.completed, gone)


@dataclass(slots=True)
class Kept:
    """A kept reading, and what becomes of it while batches are compared with it."""

    key: Key
    revision: int
    before: list[Any]
    """Every column, as the store holds it."""
    values: list[Any]
    """Every column, as the store is to hold it."""
    unclaimed: bool
    """The revision of the batches brought it in, and no row has been counted for it yet."""


def examine(
    batches: Sequence[tuple[Batch, Sequence[int]]], revision: int, fetch: Fetch
) -> tuple[list[Examined], list[Kept]]:
    """Compare batches, in order, with what is kept after they were inserted at ``revision``.

    batches: each with the channel number of every row.
    Returns what was found, and the kept readings that are to be completed. A key that this
    revision brought in belongs to the first row that does not contradict it.
    """
    times: dict[int, list[int]] = {}
    for batch, numbers in batches:
        for number, moment in zip(numbers, batch.times, strict=True):
            times.setdefault(number, []).append(moment)
    kept: dict[Key, Kept] = {}
    for number, wanted in times.items():
        for moment, arrived, *known in fetch(number, wanted):
            key = (number, moment)
            kept[key] = Kept(key, arrived, known, known, arrived == revision)
    found = [_examine(batch, numbers, kept, revision) for batch, numbers in batches]
    return found, [known for known in kept.values() if known.values is not known.before]


def _examine(
    batch: Batch, numbers: Sequence[int], kept: Mapping[Key, Kept], revision: int
) -> Examined:
    found = Examined()
    places = [COLUMNS.index(name) for name in batch.values]
    empty: list[Any] = [None] * len(COLUMNS)
    keys = zip(numbers, batch.times, strict=True)
    cells = zip(*batch.values.values(), strict=True) if places else iter([()] * len(batch))
    for row, (key, values) in enumerate(zip(keys, cells, strict=True)):
        known = kept[key]
        sent = empty.copy()
        for place, value in zip(places, values, strict=True):
            sent[place] = value
        late = known.revision < revision
        together = sent if sent == known.values else _together(known.values, sent, late=late)
        if together is None:
            found.keys.append(key)
            found.clashes.append(Clash(row, told(known.values), told(sent)))
            continue
        more = together != known.values
        if known.unclaimed:
            found.accepted += 1
        elif more:
            found.completed += 1
            if gone := _gave_way(known.values, together):
                found.gave_way.append((key, gone))
        else:
            found.duplicates += 1
        known.unclaimed = False
        if more:
            known.values = together
    return found


def _together(known: Sequence[Any], sent: Sequence[Any], *, late: bool) -> list[Any] | None:
    """One reading of two that hold nothing different; None where they contradict each other.

    late: the kept one is of an earlier revision, where it stays as it was. Then a number that is
    impossible counts as missing, so that a possible one completes the reading.
    """
    both: list[Any] = []
    for name, old, new in zip(COLUMNS, known, sent, strict=True):
        if old is None or new is None:
            both.append(new if old is None else old)
        elif old == new or (name != RAW and _alike(old, new)):
            both.append(old)
        elif late and name != RAW and not is_possible(name, old) and is_possible(name, new):
            both.append(new)
        else:
            return None
    if both[_RAW] is not None and any(both[place] is not None for place in _IN_PLACE):
        return None
    return both


def _alike(old: float, new: float) -> bool:
    """Whether two numbers differ by no more than a change of unit does to their last digits."""
    return math.isclose(old, new, rel_tol=ROUNDING, abs_tol=ROUNDING)


def _gave_way(known: Sequence[Any], together: Sequence[Any]) -> dict[str, Any]:
    """What a reading held before it was completed, where it holds something else now."""
    pairs = zip(COLUMNS, known, together, strict=True)
    return {name: old for name, old, new in pairs if old is not None and old != new}


def told(values: Sequence[Any]) -> dict[str, Any]:
    """The values that are there, by name, as JSON can hold them."""
    pairs = zip(COLUMNS, values, strict=True)
    return {
        name: unpacked(value) if name == RAW else value
        for name, value in pairs
        if value is not None
    }


def packed(record: Any) -> bytes:
    """A raw record as it is stored: JSON, compressed, the same bytes for the same record."""
    return zlib.compress(orjson.dumps(record, option=orjson.OPT_SORT_KEYS), 6)


def unpacked(stored: bytes) -> Any:
    """The raw record that was stored."""
    return orjson.loads(zlib.decompress(stored))


def kind_of(stored: bytes) -> str:
    """The kind of a raw record that was stored, without reading all of it."""
    beginning = zlib.decompressobj().decompress(stored, 40).decode("ascii", "replace")
    return beginning.split('"')[1]
