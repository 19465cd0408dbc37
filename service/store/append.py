"""What became of readings whose keys are not all new: accepted, the same again, or in conflict."""

import zlib
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import orjson
from sqlalchemy import Column

from service.store.interface import COLUMNS, RAW, Batch, Clash, Outcome, Row, Span
from service.store.schema import reading

Key = tuple[int, int]
"""Channel number and time."""
Fetch = Callable[[int, Sequence[int]], list[Row]]
"""The kept readings of a channel at some times: time, revision, every column."""


@dataclass(slots=True)
class Examined:
    """What was found about one batch."""

    accepted: int = 0
    duplicates: int = 0
    clashes: list[Clash] = field(default_factory=list)
    keys: list[Key] = field(default_factory=list)
    """Of the clashes."""

    def outcome(self) -> Outcome:
        """As the caller is told."""
        return Outcome(self.accepted, self.duplicates, self.clashes)


def examine(
    batches: Sequence[tuple[Batch, Sequence[int]]], revision: int, fetch: Fetch
) -> list[Examined]:
    """Compare batches, in order, with what is kept after they were inserted at ``revision``.

    batches: each with the channel number of every row.
    A key that this revision brought in belongs to the first row that has it.
    """
    times: dict[int, list[int]] = {}
    for batch, numbers in batches:
        for number, moment in zip(numbers, batch.times, strict=True):
            times.setdefault(number, []).append(moment)
    kept = {
        (number, row[0]): row for number, wanted in times.items() for row in fetch(number, wanted)
    }
    taken: set[Key] = set()
    return [_examine(batch, numbers, revision, kept, taken) for batch, numbers in batches]


def _examine(
    batch: Batch,
    numbers: Sequence[int],
    revision: int,
    kept: Mapping[Key, Row],
    taken: set[Key],
) -> Examined:
    found = Examined()
    places = [COLUMNS.index(name) for name in batch.values]
    empty: list[Any] = [None] * len(COLUMNS)
    keys = zip(numbers, batch.times, strict=True)
    cells = zip(*batch.values.values(), strict=True) if places else iter([()] * len(batch))
    for row, (key, values) in enumerate(zip(keys, cells, strict=True)):
        _, arrived, *known = kept[key]
        if arrived == revision and key not in taken:
            taken.add(key)
            found.accepted += 1
            continue
        sent = empty.copy()
        for place, value in zip(places, values, strict=True):
            sent[place] = value
        if sent == known:
            found.duplicates += 1
        else:
            found.keys.append(key)
            found.clashes.append(Clash(row, told(known), told(sent)))
    return found


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


def columns_of(span: Span) -> Iterator[Column[Any]]:
    """What a row of a span holds."""
    r = reading.c
    yield from (r.channel, r.time, r.revision)
    for name in span.columns:
        yield r[name]
