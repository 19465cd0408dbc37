"""A station as readings meet it: installations by probe and depth, sentinels, the first moment."""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from service.faults import Fault
from service.stations.times import microseconds, rfc3339
from service.store.interface import VALUES, Channel, Document, place_at

EARLIEST = microseconds("2001-01-01T00:00:00Z")
"""Before it are the moments that clocks are reset to: 1970, 1980, the first days of 2000."""
EVER, NEVER = -(2**62), 2**62


@dataclass(frozen=True, slots=True)
class Installation:
    """A probe in a soil at a depth, start <= time < end in microseconds."""

    probe: str
    soil: str
    depth: float
    start: int = EVER
    end: int = NEVER

    def overlaps(self, other: "Installation") -> bool:
        """Whether both were there at some moment."""
        return self.start < other.end and other.start < self.end


@dataclass(frozen=True, slots=True)
class Station:
    """One revision of a station."""

    name: str
    revision: int
    zone: str
    interval: float | None
    earliest: int
    sentinels: Mapping[str, frozenset[float]]
    installations: Sequence[Installation]

    def installed(self, channel: Channel) -> list[Installation]:
        """The installations of the probe, or at the depth, that a series names; by time.

        At a depth where two probes are at once, none is told: its readings must name the probe.
        """
        if channel.probe is not None:
            found = [i for i in self.installations if i.probe == channel.probe]
        else:
            found = [i for i in self.installations if place_at(i.depth) == channel.place]
            found = [i for i in found if not any(i.overlaps(o) for o in found if o is not i)]
        return sorted(found, key=lambda i: i.start)


def station_of(document: Document) -> Station:
    """A station from what was put; its body was checked before it was kept."""
    body: Mapping[str, Any] = document.body or {}
    given = body.get("sentinels", [])
    by_column = given if isinstance(given, Mapping) else dict.fromkeys(VALUES, given)
    return Station(
        name=document.name,
        revision=document.revision,
        zone=body.get("zone", "UTC"),
        interval=body.get("interval"),
        earliest=microseconds(body["earliest"]) if body.get("earliest") else EARLIEST,
        sentinels={name: frozenset(map(float, found)) for name, found in by_column.items()},
        installations=[
            Installation(
                probe=item["probe"],
                soil=item["soil"],
                depth=float(item["depth"]),
                start=microseconds(item["from"]) if item.get("from") else EVER,
                end=microseconds(item["until"]) if item.get("until") else NEVER,
            )
            for item in body.get("installations", [])
        ],
    )


def faults_of_station(
    station: Station, soils: Iterable[str], probes: Iterable[str], sentinels: Any
) -> list[Fault]:
    """What is wrong with a station beside its form: unknown names, a probe in two places."""
    found = [
        Fault(f"{name} is no number a reading may hold", f"#/sentinels/{name}")
        for name in (sentinels if isinstance(sentinels, Mapping) else ())
        if name not in VALUES
    ]
    known = {"soil": frozenset(soils), "probe": frozenset(probes)}
    for place, item in enumerate(station.installations):
        where = f"#/installations/{place}"
        for kind, names in known.items():
            name = getattr(item, kind)
            if name not in names:
                detail = f"there is no {kind} {name}: PUT /v1/{kind}s/{name} first"
                found.append(Fault(detail, f"{where}/{kind}"))
        if item.end <= item.start:
            found.append(Fault("until must be after from", f"{where}/until"))
        for earlier in station.installations[:place]:
            if earlier.probe == item.probe and earlier.overlaps(item):
                since = "" if earlier.start == EVER else f" since {rfc3339(earlier.start)}"
                until = "" if earlier.end == NEVER else f" until {rfc3339(earlier.end)}"
                detail = (
                    f"{item.probe} is at {earlier.depth:g} m{since}{until} already: say with until "
                    "and from when it moved"
                )
                found.append(Fault(detail, f"{where}/probe"))
                break
    return found
