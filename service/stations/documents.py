"""Soils, probes and stations as of a revision, in memory; brought up to date by what changed."""

import threading
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from functools import cached_property, lru_cache

from service.stations.station import Station, station_of
from service.store.interface import Document, Head, Kind, Store

KINDS: tuple[Kind, ...] = ("soil", "probe", "station")


@dataclass(frozen=True)
class Documents:
    """What was there at a revision: the last change of each, deleted ones left out."""

    revision: int = 0
    """Of the last change."""
    by_kind: Mapping[Kind, Mapping[str, Document]] = field(
        default_factory=lambda: {kind: {} for kind in KINDS}
    )

    def find(self, kind: Kind, name: str) -> Document | None:
        """The document; None where there is none."""
        return self.by_kind[kind].get(name)

    def station(self, name: str) -> Station | None:
        """A station, taken apart; None where there is none."""
        known = self._stations.get(name)
        if known is None and (document := self.find("station", name)):
            known = self._stations[name] = station_of(document)
        return known

    @cached_property
    def _stations(self) -> dict[str, Station]:
        return {}

    def with_changes(self, changes: Iterable[Document]) -> "Documents":
        """What is there after these changes, oldest first."""
        by_kind = {kind: dict(known) for kind, known in self.by_kind.items()}
        revision = self.revision
        for change in changes:
            revision = change.revision
            if change.body is None:
                by_kind[change.kind].pop(change.name, None)
            else:
                by_kind[change.kind][change.name] = change
        return Documents(revision, by_kind)


class Shelf:
    """The current documents of a store. ``fresh`` and ``at`` block: call from a thread."""

    def __init__(self, store: Store) -> None:
        self.store = store
        self._lock = threading.Lock()
        self.current = Documents()
        """As last seen; another process may have changed them since."""
        self._earlier = lru_cache(maxsize=8)(self._load)

    def fresh(self) -> tuple[Head, Documents]:
        """The documents as they are now, and how far the store has come."""
        head = self.store.head()
        if head.documents != self.current.revision:
            with self._lock:
                if head.documents > self.current.revision:
                    changes = self.store.documents(self.current.revision)
                    self.current = self.current.with_changes(changes)
        if self.current.revision > head.documents:
            head = self.store.head()
        return head, self.current

    def at(self, revision: int) -> Documents:
        """The documents as they were at a revision that has been reached."""
        return self._earlier(revision)

    def _load(self, revision: int) -> Documents:
        return Documents().with_changes(self.store.documents(upto=revision))
