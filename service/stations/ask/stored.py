"""Rows of the store as columns, and the raw records among them."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from models.relation import Array
from service.stations.ask.records import EFFORT
from service.store.interface import RAW, Channel, Row, Span, Store


@dataclass(frozen=True, slots=True)
class Stored:
    """Rows of the store as columns; values in the unit of the API, NaN where there is none."""

    channels: Mapping[int, Channel]
    number: NDArray[np.int64]
    """Of the channel of each row."""
    time: NDArray[np.int64]
    revision: NDArray[np.int64]
    values: Mapping[str, Array]
    raw: Mapping[int, bytes] = field(default_factory=dict)
    """Raw records as they are kept, by row."""

    def __len__(self) -> int:
        return len(self.time)


def stored(
    rows: Sequence[Row], channels: Sequence[Channel], columns: Sequence[str],
    raw: Sequence[Row] = (),
) -> Stored:  # fmt: skip
    """Rows of channel, time, revision and numbers, as a store gives them.

    raw: rows of channel, time, revision and raw record, of which some may be of other readings.
    """
    table = np.array(rows, dtype=np.float64).reshape(len(rows), 3 + len(columns))
    keys = table[:, :3].astype(np.int64)
    values = {name: np.ascontiguousarray(table[:, 3 + i]) for i, name in enumerate(columns)}
    places = {row[:2]: place for place, row in enumerate(rows)} if raw else {}
    records = {places[row[:2]]: row[3] for row in raw if row[:2] in places}
    numbers = {channel.number: channel for channel in channels}
    return Stored(numbers, keys[:, 0], keys[:, 1], keys[:, 2], values, records)


def raw_rows(store: Store, span: Span, rows: Sequence[Row]) -> list[Row]:
    """The raw records of rows that a span gave: no more than one answer reads, and one."""
    if not rows or not any(RAW in known.held_at(span.upto) for known in span.channels):
        return []
    most = min(len(rows), EFFORT + 1)
    return store.readings(replace(span, columns=(RAW,), holding=RAW, limit=most))


def newest(store: Store, span: Span) -> tuple[list[Row], list[Row]]:
    """The last reading of each channel: rows of numbers, and of raw records."""
    held = any(RAW in known.held_at(span.upto) for known in span.channels)
    found = store.newest(replace(span, columns=(*span.columns, RAW)) if held else span)
    if not held:
        return found, []
    return [row[:-1] for row in found], [(*row[:3], row[-1]) for row in found if row[-1]]
