"""Which series, and which of their rows, a question names: by probe, or by depth.

A depth stands for readings that name it and for those of the probes that are installed there, as
long as they are.
"""

from collections.abc import Iterable, Sequence

from service.errors import Unprocessable
from service.faults import Fault, hint
from service.stations.station import Station
from service.stations.times import rfc3339
from service.store.interface import Channel, Row, place_at


def wanted(
    channels: Iterable[Channel], station: Station, probe: str | None, place: str | None
) -> list[Channel]:
    """The series that a question names, in the order of their numbers.

    Raises Unprocessable for a probe or a depth that the station does not have.
    """
    known = list(channels)
    if probe is not None:
        _refuse_probe(probe, station, known)
    if place is not None:
        _refuse_depth(place, station, known)
    found = [c for c in known if probe is None or c.probe == probe]
    found = [c for c in found if place is None or c.place == place or _ever_at(c, station, place)]
    return sorted(found, key=lambda c: c.number)


def at_place(
    rows: Sequence[Row], channels: Iterable[Channel], station: Station, place: str | None
) -> Sequence[Row]:
    """The rows that are of a place; all of them where none is asked for."""
    if place is None:
        return rows
    times = {
        channel.number: [
            (item.start, item.end)
            for item in station.installed(channel)
            if place_at(item.depth) == place
        ]
        for channel in channels
        if channel.place != place
    }
    return [
        row
        for row in rows
        if row[0] not in times or any(start <= row[1] < end for start, end in times[row[0]])
    ]


def left_out(rows: Sequence[Row], channels: Iterable[Channel]) -> list[dict[str, str]]:
    """What is said of series whose last reading is older than was asked for."""
    if not rows:
        return []
    named = {c.number: c.probe or f"{c.depth:g} m" for c in channels}
    told = [f"{named[row[0]]} of {rfc3339(row[1])}" for row in rows[:MOST_TOLD]]
    more = f" and {len(rows) - MOST_TOLD} more" if len(rows) > MOST_TOLD else ""
    text = f"left out are older last readings: {', '.join(told)}{more}; within says how old"
    return [{"code": "older-readings", "text": f"{text} they may be"}]


MOST_TOLD = 20
"""Series that an answer names; of the others it says how many there are."""


def _ever_at(channel: Channel, station: Station, place: str) -> bool:
    return channel.probe is not None and any(
        place_at(item.depth) == place for item in station.installed(channel)
    )


def _refuse_probe(probe: str, station: Station, known: Sequence[Channel]) -> None:
    names = {c.probe for c in known if c.probe} | {i.probe for i in station.installations}
    if probe not in names:
        near = hint(probe, names) or _listed(sorted(names))
        detail = f"{station.name} has no probe {probe[:80]}{near}"
        raise Unprocessable(detail, [Fault(detail, "?probe")])


def _refuse_depth(place: str, station: Station, known: Sequence[Channel]) -> None:
    places = {c.place: c.depth for c in known if c.depth is not None}
    places |= {place_at(item.depth): item.depth for item in station.installations}
    if place not in places:
        depths = [f"{depth:g} m" for depth in sorted(d for d in places.values() if d is not None)]
        detail = f"{station.name} has nothing at {int(place[1:]) / 1e6:g} m{_listed(depths)}"
        raise Unprocessable(detail, [Fault(detail, "?depth")])


def _listed(names: Sequence[str]) -> str:
    return f"; it has {', '.join(names[:10])}" if names else ""
