"""Readings that are kept and cannot be estimated where they are: what the answer tells of them."""

from collections.abc import Iterator, Sequence
from typing import Any

from models.quantity import QUANTITIES
from service.stations.documents import Documents
from service.stations.ingest.arrival import Rows, converter
from service.stations.raw_settings import settings_for
from service.stations.station import Installation, Station
from service.store.append import kind_of
from service.store.interface import RAW, Channel, Span, Store, place_at

MOST_COMPARED = 20_000
"""Readings of a probe that the depths of one batch are compared with."""
MOST_TOLD = 50
"""Advisories of one request; places beyond are not told."""
_DEPTH_UNITS = [unit.code for unit in QUANTITIES["depth"].units if unit.code != "m"]
_NEED_SETTINGS = frozenset({"waveform", "reflection", "scattering"})


class Misplaced:
    """Gathers, batch by batch, rows that are kept and rest on no installation."""

    def __init__(self) -> None:
        self._found: dict[str, tuple[int, int]] = {}
        """By what is wrong: the first row, and how many there are."""

    def note(self, rows: Rows, station: Station, documents: Documents) -> None:
        """Look at some rows of a station."""
        for place, where in _by_place(rows.places):
            installed = station.installed(Channel(0, station.name, place, {}))
            times = (
                [rows.times[row] for row in where] if len(where) < len(rows.times) else rows.times
            )
            first, last = min(times), max(times)
            if not any(i.start <= first and last < i.end for i in installed):
                outside = [row for row, moment in zip(where, times, strict=True)
                           if not any(i.start <= moment < i.end for i in installed)]  # fmt: skip
                if outside:
                    self._tell(_nothing_there(place, station, installed), rows, outside)
            if not place.startswith("@"):
                self._note_depths(rows, where, place, installed)
                self._note_records(rows, where, place, documents)

    def advisories(self) -> list[dict[str, Any]]:
        """What was found, each with the first row it is about."""
        told = []
        for text, (row, count) in list(self._found.items())[:MOST_TOLD]:
            rows = f"row {row}" + (f" and {count - 1} more" if count > 1 else "")
            told.append({"code": "not-placed", "text": f"{text} ({rows})", "row": row})
        return told

    def _tell(self, text: str, rows: Rows, where: Sequence[int]) -> None:
        first, count = self._found.get(text, (rows.numbers[where[0]], 0))
        self._found[text] = (first, count + len(where))

    def _note_depths(
        self, rows: Rows, where: Sequence[int], probe: str, installed: Sequence[Installation]
    ) -> None:
        """A depth beside the probe that is not the one it is installed at."""
        depths = rows.values.get("depth")
        odd: dict[str, list[int]] = {}
        for row in where if depths is not None else ():
            depth = depths[row] if depths is not None else None
            at = next((i for i in installed if i.start <= rows.times[row] < i.end), None)
            if at is None or not isinstance(depth, float):
                continue
            if place_at(depth) != place_at(at.depth):
                text = (
                    f"{probe} is installed at {at.depth:g} m, and the reading says {depth:g} m: it "
                    "is kept, and the installation counts"
                )
                odd.setdefault(text, []).append(row)
        for text, found in odd.items():
            self._tell(text, rows, found)

    def _note_records(
        self, rows: Rows, where: Sequence[int], probe: str, documents: Documents
    ) -> None:
        """A raw record that the probe does not say how to read."""
        records = rows.values.get(RAW)
        known = documents.find("probe", probe)
        body = (known and known.body) or {}
        lacking: dict[str, list[int]] = {}
        for row in where if records is not None else ():
            record = records[row] if records is not None else None
            if isinstance(record, bytes):
                kind = kind_of(record)
                if kind in _NEED_SETTINGS and settings_for(body, kind) is None:
                    lacking.setdefault(kind, []).append(row)
        for kind, found in lacking.items():
            own = "probe_length, or raw_records.waveform" if kind == "waveform" else ""
            text = (
                f"{probe} does not say how a {kind} is read, so it is kept and not estimated: give "
                f"it {own or f'raw_records.{kind}'} (PUT /v1/probes/{probe})"
            )
            self._tell(text, rows, found)


def beside_a_probe(rows: Rows, station: Station) -> bool:
    """Whether any row names a depth at which a probe is or was installed."""
    depths = {place for place in set(rows.places) if place.startswith("@")}
    return any(station.installed(Channel(0, station.name, place, {})) for place in depths)


def read_twice(store: Store, rows: Rows, station: Station) -> list[tuple[str, int]]:
    """Rows that name a depth while the probe there has a reading of its own. Blocks.

    Returns the probe and the number of each such row.
    """
    by_probe = {known.probe: known for known in store.channels(station.name) if known.probe}
    found = []
    for place, where in _by_place(rows.places):
        installed = station.installed(Channel(0, station.name, place, {}))
        for item in installed if place.startswith("@") else ():
            moments = {rows.times[row]: rows.numbers[row] for row in where
                       if item.start <= rows.times[row] < item.end}  # fmt: skip
            if item.probe in by_probe and moments:
                span = Span([by_probe[item.probe]], (), min(moments), max(moments) + 1,
                            limit=MOST_COMPARED)  # fmt: skip
                kept = store.readings(span)
                found += [(item.probe, moments[row[1]]) for row in kept if row[1] in moments]
    return found


def _by_place(places: Sequence[str]) -> Iterator[tuple[str, Sequence[int]]]:
    names = dict.fromkeys(places)
    if len(names) == 1:
        yield places[0], range(len(places))
        return
    rows: dict[str, list[int]] = {name: [] for name in names}
    for row, place in enumerate(places):
        rows[place].append(row)
    yield from rows.items()


def _nothing_there(place: str, station: Station, installed: Sequence[Installation]) -> str:
    """Why readings of a place are kept and not estimated, and how that is mended."""
    put = f"PUT /v1/stations/{station.name}"
    mend = f"they are estimated once it is among the installations ({put})"
    named = Channel(0, "", place, {})
    if installed:
        what = named.probe if named.probe else f"a probe at {named.depth:g} m"
        return f"{what} was not installed at the time of the readings: {mend}"
    if named.depth is None:
        return f"{named.probe} is not installed at {station.name}: {mend}"
    at = [item.depth for item in station.installations]
    if place in map(place_at, at):
        return f"more than one probe is at {named.depth:g} m: readings there must name theirs"
    listed = ", ".join(f"{depth:g} m" for depth in sorted(set(at))[:10])
    told = f"nothing is installed at {named.depth:g} m" + (f", but at {listed}" if at else "")
    for code in _DEPTH_UNITS:
        depth = float(converter("depth", code)(named.depth))
        if place_at(depth) in map(place_at, at):
            return f'{told}: is it in {code}? send {depth:g}, or "units": {{"depth": "{code}"}}'
    return f"{told}: {mend}"
