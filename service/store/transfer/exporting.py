"""Everything a store keeps, as lines from which another store can be made."""

from collections.abc import Iterator
from typing import Any

from service.store.append import told
from service.store.base import SqlStore
from service.store.interface import COLUMNS, Channel, Span
from service.store.transfer.restoring import FORM

PAGE = 20_000
"""Readings that are read at a time."""
Line = dict[str, Any]


def exported(opened: SqlStore) -> Iterator[Line]:
    """Everything that is kept up to one revision, oldest documents first; see Restoring.

    The last line says how many there are before it, so that a file that was cut off is known.
    """
    count = 0
    for line in _everything(opened):
        count += 1
        yield line
    yield {"end": {"lines": count}}


def _everything(opened: SqlStore) -> Iterator[Line]:
    head = opened.head()
    yield {"store": {"form": FORM, "revision": head.revision, "documents": head.documents}}
    for d in opened.documents(upto=head.revision):
        yield {"document": {name: getattr(d, name) for name in d.__slots__}}
    channels = [known for known in opened.channels() if _known(known, head.revision)]
    for channel in sorted(channels, key=lambda known: known.number):  # answers are in that order
        held = {name: n for name, n in channel.held.items() if n <= head.revision}
        yield {"series": {"station": channel.station, "place": channel.place, "held": held}}
        yield from _readings(opened, channel, head.revision)
    for station in sorted({channel.station for channel in channels}):
        for contradiction in opened.conflicts(station, 2**31 - 1):
            if contradiction["revision"] <= head.revision:
                yield {"conflict": {"station": station, **contradiction}}


def _known(channel: Channel, revision: int) -> bool:
    """Whether a series was there: its columns say when they came; one without any is empty."""
    return not channel.held or min(channel.held.values()) <= revision


def _readings(opened: SqlStore, channel: Channel, revision: int) -> Iterator[Line]:
    place = {"station": channel.station, "place": channel.place}
    after = None
    while True:
        span = Span([channel], COLUMNS, after=after, upto=revision, limit=PAGE)
        rows = opened.readings(span)
        for row in rows:
            yield {"reading": {**place, "time": row[1], "revision": row[2], **told(row[3:])}}
        if len(rows) < PAGE:
            break
        after = (rows[-1][0], rows[-1][1])
    for moment, arrived, until, *values in opened.completed(channel):
        if until <= revision:
            known = {"time": moment, "revision": arrived, "until": until}
            yield {"earlier": {**place, **known, **told(values)}}
