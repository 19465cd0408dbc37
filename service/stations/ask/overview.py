"""What all stations say now, in one question to the store."""

from collections.abc import Collection, Mapping
from typing import Any

import numpy as np
import polars as pl

from service.schemas.echo import units_of_answer
from service.stations.ask.answers import slugs
from service.stations.ask.asked import Asked, now
from service.stations.ask.estimating import estimated
from service.stations.ask.joining import newest_of_each
from service.stations.ask.planning import within_effort
from service.stations.ask.questions import Page, table_of
from service.stations.ask.stored import newest, stored
from service.stations.ask.wording import refuse_words
from service.stations.documents import Documents, Shelf
from service.store.interface import VALUES, Span


def latest_page(shelf: Shelf, asked: Asked, allowed: Collection[str]) -> tuple[Page, Documents]:
    """The last reading of every sensor of every station, estimated.

    allowed: names of the stations that may be told; empty: all.
    """
    head, documents = shelf.fresh()
    refuse_words(asked.estimate, documents)
    stations = documents.by_kind["station"]
    channels = [
        c
        for c in shelf.store.channels()
        if c.station in stations and (not allowed or c.station in allowed)
    ]
    held = frozenset[str]().union(*(c.held for c in channels))
    columns = [name for name in VALUES if name in held]
    rows, raw = newest(shelf.store, Span(channels, columns))
    found = stored(rows, channels, columns, raw)
    fits = within_effort(found, documents, None)
    result = estimated(found, documents, asked.estimate, asked.units, None, fits)
    numbers, places = np.unique(found.number, return_inverse=True)
    names = [found.channels[number].station for number in numbers.tolist()]
    table = table_of(found, result).select(
        pl.Series("station", names, dtype=pl.String).gather(places),
        pl.all().exclude("flags"),
        pl.Series("age_seconds", (now() - found.time) / 1e6),
        slugs(result.flags).alias("flags"),
    )
    rest = {
        "revision": head.revision,
        "units": units_of_answer(("depth", *result.columns), asked.units),
        "advisories": result.advisories(),
    }
    table = newest_of_each(table, "station").sort("station", "depth", "time")
    return Page(table, rest), documents


def features_of(page: Page, documents: Documents, allowed: Collection[str]) -> Mapping[str, Any]:
    """The stations as GeoJSON (RFC 7946), each with its last values; depth is a property."""
    values: dict[str, list[Mapping[str, Any]]] = {}
    for row in page.frame.iter_rows(named=True):
        values.setdefault(row.pop("station"), []).append(row)
    features = []
    for name, document in sorted(documents.by_kind["station"].items()):
        if allowed and name not in allowed:
            continue
        body = document.body or {}
        place = body.get("position")
        geometry = None
        if place:
            height = [place["altitude"]] if place.get("altitude") is not None else []
            point = [place["longitude"], place["latitude"], *height]
            geometry = {"type": "Point", "coordinates": point}
        told = {"name": name, "title": body.get("title"), "latest": values.get(name, [])}
        features.append({"type": "Feature", "id": name, "geometry": geometry, "properties": told})
    return {"type": "FeatureCollection", "features": features, **page.rest}
