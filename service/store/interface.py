"""What the service asks of a place that keeps readings: one Protocol, and what crosses it.

Every transaction that changes something takes the next number of one counter, the revision of
the store. Readings and documents carry it, so that one number tells everything that was known.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Literal, Protocol

from models.quantity import NOISE, QUANTITIES, READING
from service.store.errors import Stale

Kind = Literal["soil", "probe", "station"]

VALUES: tuple[str, ...] = (
    *(name for name in READING if QUANTITIES[name].unit),
    *(f"{name}_u" for name in NOISE),
)
"""Numbers a reading may hold, in the unit of the API."""
RAW = "raw"
"""The compressed raw record of a reading: a trace, a sweep."""
COLUMNS = (*VALUES, RAW)
IN_PLACE_OF_RAW = ("apparent_permittivity", "real_permittivity", "travel_time")
"""What a reading holds instead of a raw record, never beside it."""

Row = tuple[Any, ...]
"""Channel, time, revision, then the values asked for."""


@dataclass(frozen=True, slots=True)
class Head:
    """How far a store has come."""

    revision: int
    documents: int
    """The revision of the last change of a soil, probe or station."""


@dataclass(frozen=True, slots=True)
class Document:
    """One revision of a soil, probe or station."""

    kind: Kind
    name: str
    revision: int
    changed: int
    """Microseconds since 1970."""
    author: str | None
    """The label of the key that changed it."""
    body: Mapping[str, Any] | None
    """None: it was deleted."""


@dataclass(frozen=True, slots=True)
class Channel:
    """The series of one probe or depth at one station."""

    number: int
    station: str
    place: str
    """The name of a probe, or @ and a depth in micrometres."""
    held: Mapping[str, int]
    """Columns that any of its readings holds, each with the revision that brought the first."""

    @property
    def probe(self) -> str | None:
        """The probe its readings name."""
        return None if self.place.startswith("@") else self.place

    @property
    def depth(self) -> float | None:
        """The depth its readings name, m."""
        return int(self.place[1:]) / 1e6 if self.place.startswith("@") else None

    def held_at(self, revision: int | None) -> frozenset[str]:
        """Columns that any reading held at a revision; None: by now."""
        return frozenset(n for n, r in self.held.items() if revision is None or r <= revision)


def place_at(depth: float) -> str:
    """The place of readings that name a depth, m, instead of a probe."""
    return f"@{round(depth * 1e6)}"


@dataclass(frozen=True, slots=True)
class Batch:
    """Readings of one station, by column."""

    station: str
    documents: int
    """The revision of the documents these readings were checked against."""
    places: Sequence[str]
    times: Sequence[int]
    """Microseconds since 1970."""
    values: Mapping[str, Sequence[float | bytes | None]]
    """By column; at least one value of each is not None."""

    def __len__(self) -> int:
        return len(self.times)


@dataclass(frozen=True, slots=True)
class Clash:
    """A reading with the key of one that is kept and other values."""

    row: int
    kept: Mapping[str, Any]
    sent: Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of a batch."""

    accepted: int
    duplicates: int = 0
    clashes: Sequence[Clash] = field(default=())
    completed: int = 0
    """Kept readings that got values they lacked, or had only impossible ones for."""
    gave_way: int = 0
    """Impossible values in whose place there are possible ones now."""


@dataclass(frozen=True, slots=True)
class Span:
    """Which readings are asked for, ordered by channel, then time."""

    channels: Sequence[Channel]
    columns: Sequence[str]
    start: int | None = None
    end: int | None = None
    """Times with start <= time < end, in microseconds."""
    after: tuple[int, int] | None = None
    """Channel number and time of the last row of the page before."""
    upto: int | None = None
    """Only what was known at this revision."""
    limit: int | None = None
    holding: str | None = None
    """Only readings that hold this column."""


class Store(Protocol):
    """Append-only for readings; documents keep every revision. Methods block: call from a thread.

    Everything raises StoreUnavailable where the database does not answer.
    """

    def head(self) -> Head:
        """How far the store has come."""
        ...

    def append(self, batches: Sequence[Batch]) -> list[Outcome | Stale]:
        """Keep the readings, all in one transaction; durable once this returns.

        The same reading twice, or less of it, is one reading. What the kept one lacks completes
        it, at a new revision; at the earlier one it is as it was. An impossible value counts as
        lacking, and is shown among the conflicts from then on. One that contradicts it is kept
        as a conflict. A batch checked against older documents is handed back, nothing kept.
        """
        ...

    def documents(self, after: int = 0, upto: int | None = None) -> list[Document]:
        """Every change of a soil, probe or station with after < revision <= upto, oldest first."""
        ...

    def put(self, document: Document, seen: int, expected: int | None) -> Document:
        """Keep a new revision of a document (body None: its deletion); its number is set here.

        seen: the revision of the documents it was checked against; else Stale.
        expected: the revision the document must be at, 0: absent, None: any; else Changed.
        Raises InUse when readings refer to what should be deleted.
        """
        ...

    def channels(self, station: str | None = None) -> list[Channel]:
        """The series of a station, or of all, by station and place."""
        ...

    def readings(self, span: Span) -> list[Row]:
        """Rows of channel, time, revision and the columns asked for."""
        ...

    def newest(self, span: Span) -> list[Row]:
        """The last reading of each channel within the span."""
        ...

    def stamp(self, span: Span) -> tuple[int, int]:
        """How many readings the span holds, and the highest revision among them."""
        ...

    def conflicts(self, station: str, limit: int) -> list[Mapping[str, Any]]:
        """Readings that came with the key of a kept one and other values, newest first."""
        ...

    def check(self) -> Iterator[str]:
        """A sentence for everything that is not as it should be."""
        ...

    def backup(self, target: Path) -> None:
        """A complete copy in one file, while the store is in use."""
        ...

    def close(self) -> None:
        """Let go of the database."""
        ...
