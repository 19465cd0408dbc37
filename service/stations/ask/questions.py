"""Questions about stored readings. Everything here blocks: call it from a thread."""

import hashlib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import orjson
import polars as pl

from models.quantity import QUANTITIES
from service import __version__
from service.errors import Unprocessable
from service.faults import Fault
from service.routes.stored.documents import absent, revision_of
from service.schemas.echo import units_of_answer
from service.stations.ask.answers import frame_of, numbers, slugs
from service.stations.ask.asked import Asked, cursor_of, now
from service.stations.ask.estimating import Estimated, estimated
from service.stations.ask.joining import doubled, newest_of_each, probe_names
from service.stations.ask.planning import within_effort
from service.stations.ask.selecting import at_place, left_out, wanted
from service.stations.ask.stored import Stored, newest, raw_rows, stored
from service.stations.ask.wording import refuse_words
from service.stations.documents import Documents, Shelf
from service.stations.station import Station
from service.stations.times import text_of
from service.store.append import unpacked
from service.store.interface import RAW, VALUES, Channel, Row, Span


@dataclass(frozen=True, slots=True)
class Scene:
    """One station as a question finds it."""

    shelf: Shelf
    revision: int
    """Of the store: with it, the same question has the same answer again."""
    upto: int | None
    """Set where the caller asked for an earlier revision."""
    documents: Documents
    station: Station
    channels: Sequence[Channel]
    place: str | None = None
    """Of the depth that is asked about; None: all of them."""

    def here(self, rows: Sequence[Row]) -> Sequence[Row]:
        """Those rows of the series that are of the depth asked about."""
        return at_place(rows, self.channels, self.station, self.place)

    def columns(self) -> list[str]:
        """Numbers that any of the series holds."""
        held = frozenset[str]().union(*(c.held_at(self.upto) for c in self.channels))
        return [name for name in VALUES if name in held]


@dataclass(frozen=True, slots=True)
class Page:
    """A table, what JSON says beside it, and where the next page begins."""

    frame: pl.DataFrame
    rest: Mapping[str, Any]
    after: str | None = None
    found: Estimated | None = None


def scene_of(shelf: Shelf, name: str, asked: Asked) -> Scene:
    """The station, its documents and the series asked for. Raises NotFound, Unprocessable."""
    head, documents = shelf.fresh()
    upto = None
    if asked.at_revision is not None:
        upto = revision_of(asked.at_revision, head.revision)
        documents = shelf.at(upto)
    station = documents.station(name)
    if station is None:
        raise absent("station", name, documents, upto)
    known = shelf.store.channels(name)
    channels = wanted(known, station, asked.probe, asked.place)
    refuse_words(asked.estimate, documents, known, upto)
    reached = head.revision if upto is None else upto
    return Scene(shelf, reached, upto, documents, station, channels, asked.place)


def span_of(scene: Scene, asked: Asked, columns: Sequence[str], limit: int | None) -> Span:
    """The readings a question is about."""
    return Span(scene.channels, columns, asked.start, asked.end, asked.after, scene.upto, limit)


def tag_of(scene: Scene, asked: Asked, question: str) -> str | None:
    """The entity tag of an answer about a time that is over; None where the time goes on.

    question: everything of the request that the answer depends on.
    Late readings and changed soils change it: what it stands for is compared, not computed.
    """
    if scene.upto is None and (asked.end is None or asked.end > now()):
        return None
    stamp = scene.shelf.store.stamp(span_of(scene, asked, (), None))
    told = f"{__version__} {question} {stamp} {scene.documents.revision} {scene.channels}"
    return f'"{hashlib.sha256(told.encode()).hexdigest()[:32]}"'


def readings_page(scene: Scene, asked: Asked) -> Page:
    """Readings as they are kept, in the unit of the API."""
    columns = scene.columns()
    raw = [RAW] if any(RAW in c.held_at(scene.upto) for c in scene.channels) else []
    rows = scene.shelf.store.readings(span_of(scene, asked, (*columns, *raw), asked.limit + 1))
    page, after = _cut(rows, asked.limit)
    page = scene.here(page)
    records = [unpacked(row[-1]) if row[-1] else None for row in page] if raw else []
    found = stored([row[: 3 + len(columns)] for row in page], scene.channels, columns)
    own = np.where(np.isnan(d := _named_depth(found)), found.values.get("depth", d), d)
    columns_out = {
        **_keys(found, own),
        **{name: numbers(v) for name, v in found.values.items() if name != "depth"},
        "revision": pl.Series(found.revision),
    }
    if any(records):
        columns_out["raw_record"] = pl.Series(
            [None if r is None else _text(r) for r in records], dtype=pl.String
        )
    rest = {"units": units_of_answer([n for n in columns_out if _is_quantity(n)], {})}
    return Page(frame_of(columns_out), {**_about(scene), **rest}, after)


def estimates_page(scene: Scene, asked: Asked) -> Page:
    """Estimates of the readings, one row a reading.

    A page ends early where it would hold more raw records than one answer reads.
    """
    columns = scene.columns()
    span = span_of(scene, asked, columns, asked.limit + 1)
    rows = scene.shelf.store.readings(span)
    page, after = _cut(rows, asked.limit)
    page = scene.here(page)
    found = stored(page, scene.channels, columns, raw_rows(scene.shelf.store, span, page))
    fits = within_effort(found, scene.documents, scene.upto)
    if fits < len(page):
        page, after = _cut(page, fits)
        found = stored(page, scene.channels, columns, raw_rows(scene.shelf.store, span, page))
    result = estimated(found, scene.documents, asked.estimate, asked.units, scene.upto)
    return Page(table_of(found, result), rest_of(scene, asked, found, result), after, result)


def readings_between(scene: Scene, start: int | None, end: int | None, most: int) -> Stored:
    """All readings of a time; raises Unprocessable where they are more than one answer holds."""
    store, columns = scene.shelf.store, scene.columns()
    span = Span(scene.channels, columns, start, end, None, scene.upto, most + 1)
    all_rows = store.readings(span)
    if len(all_rows) > most:
        _refuse_long(f"more than {most} readings lie in that time")
    rows = scene.here(all_rows)
    found = stored(rows, scene.channels, columns, raw_rows(store, span, rows))
    fits = within_effort(found, scene.documents, scene.upto)
    if fits < len(found):
        read = sum(place < fits for place in found.raw)
        _refuse_long(f"more raw records lie in that time than the {read} that one answer reads")
    return found


def _refuse_long(detail: str) -> None:
    detail = f"{detail}: ask for a shorter one, with start and end"
    raise Unprocessable(detail, [Fault(detail, "?start")])


def profile_page(scene: Scene, asked: Asked) -> Page:
    """The last estimate of each depth at or before a moment, from the top down."""
    columns = scene.columns()
    moment = now() if asked.moment is None else asked.moment
    span = Span(scene.channels, columns, end=moment + 1, upto=scene.upto)
    last, raw = newest(scene.shelf.store, span)
    here = scene.here(last)
    rows = [row for row in here if row[1] > moment - asked.within]
    older = [row for row in here if row[1] <= moment - asked.within]
    found = stored(rows, scene.channels, columns, raw)
    fits = within_effort(found, scene.documents, scene.upto)
    result = estimated(found, scene.documents, asked.estimate, asked.units, scene.upto, fits)
    ages = pl.Series((moment - found.time) / 1e6)
    table = newest_of_each(table_of(found, result).with_columns(age_seconds=ages))
    told = {"time": text_of([moment])[0]}
    rest = {**told, **rest_of(scene, asked, found, result)}
    rest["advisories"] = [*rest["advisories"], *left_out(older, scene.channels)]
    return Page(table.sort("depth", nulls_last=True), rest)


def table_of(found: Stored, result: Estimated) -> pl.DataFrame:
    """Time, probe, depth, the estimates and their flags."""
    return frame_of(
        {
            **_keys(found, result.depth),
            "probe": probe_names(result),
            **{name: numbers(values) for name, values in result.columns.items()},
            "flags": slugs(result.flags),
        }
    )


def rest_of(scene: Scene, asked: Asked, found: Stored, result: Estimated) -> dict[str, Any]:
    """What JSON says beside the estimates: units, what they rest on, what was in the way."""
    return {
        **_about(scene),
        "units": units_of_answer(("depth", *result.columns), asked.units),
        "grounds": result.echo(),
        "advisories": [*result.advisories(), *doubled(found, result)],
    }


def _about(scene: Scene) -> dict[str, Any]:
    return {"station": scene.station.name, "revision": scene.revision}


def _keys(found: Stored, depth: Any) -> dict[str, pl.Series]:
    numbers_, places = np.unique(found.number, return_inverse=True)
    probes = [found.channels[number].probe for number in numbers_.tolist()]
    return {
        "time": text_of(found.time),
        "probe": pl.Series(probes, dtype=pl.String).gather(places),
        "depth": numbers(depth),
    }


def _named_depth(found: Stored) -> Any:
    numbers_, places = np.unique(found.number, return_inverse=True)
    depths = [found.channels[number].depth for number in numbers_.tolist()]
    return np.array([np.nan if d is None else d for d in depths], dtype=np.float64)[places]


def _cut(rows: Sequence[Any], limit: int) -> tuple[Sequence[Any], str | None]:
    """The rows of a page, and where the next one begins, if there is one."""
    if len(rows) <= limit:
        return rows, None
    last = rows[limit - 1]
    return rows[:limit], cursor_of(last[0], last[1])


def _is_quantity(name: str) -> bool:
    return name in QUANTITIES or name.removesuffix("_u") in QUANTITIES


def _text(record: Any) -> str:
    return orjson.dumps(record).decode()
