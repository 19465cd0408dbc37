"""Estimates in bins of a quarter of an hour, an hour or a day, series by series."""

from collections.abc import Iterator, Mapping
from typing import Any

import numpy as np
import polars as pl
from numpy.typing import NDArray

from models.flags import Flags
from models.relation import Array
from models.series import COVERAGE_RULE, MEAN_RULES, Bins, resample, series, usual_step
from service.schemas.estimates import ESTIMATED
from service.stations.ask.answers import frame_of, numbers, slugs
from service.stations.ask.asked import Asked, cursor_of
from service.stations.ask.estimating import Estimated, estimated
from service.stations.ask.joining import probe_names, series_of
from service.stations.ask.questions import Page, Scene, readings_between, rest_of
from service.stations.ask.stored import Stored
from service.stations.series_edges import EVERY, bin_edges, zone_of
from service.stations.times import SECOND, rfc3339, text_of

_NUMBER, _START = "#series", "#start"
"""Columns that lead to the next page and are not answered."""
MOST_READINGS = 2_000_000
"""Readings behind one answer."""
GAP_STEPS = 3.0
"""Steps without a reading over which a time-weighted mean draws no line."""


def resampled_page(scene: Scene, asked: Asked) -> Page:
    """Means with bands, counts, coverage, extremes and last values of every bin."""
    zone = zone_of(asked.zone or scene.station.zone)
    every = asked.every or "1h"
    start, end = _whole(asked, every, zone)
    found = readings_between(scene, start, end, MOST_READINGS)
    result = estimated(found, scene.documents, asked.estimate, asked.units, scene.upto)
    tables, gap = [], 0.0
    for number, rows in series_of(found, result).items():
        table, gap = _binned(scene, asked, found, result, rows, every, zone)
        tables.append(table.with_columns(pl.lit(number).alias(_NUMBER)))
    page, after = _page(tables, asked)
    rules: dict[str, Any] = {
        "every": every,
        "zone": zone.key,
        "mean": {"rule": asked.mean, "text": MEAN_RULES[asked.mean].text},
        "coverage_fraction": {"rule": COVERAGE_RULE.key, "text": COVERAGE_RULE.text},
    }
    if asked.mean != "plain":
        rules["gap_seconds"] = gap
    rest = rest_of(scene, asked, found, result)
    rest["advisories"] = [*_widened(asked, (start, end), every), *rest["advisories"]]
    return Page(page, {**rules, **rest}, after, result)


def _widened(
    asked: Asked, whole: tuple[int | None, int | None], every: str
) -> Iterator[dict[str, str]]:
    """That more was taken in than was asked for, where bins begin before or end after it."""
    ends = zip(("start", "end"), (asked.start, asked.end), whole, strict=True)
    beyond = [
        f"{name} {rfc3339(stated)} became {rfc3339(used)}"
        for name, stated, used in ends
        if stated is not None and used is not None and stated != used
    ]
    if beyond:
        text = f"means are of whole intervals of {every}: {' and '.join(beyond)}"
        yield {"code": "whole-intervals", "text": text}


def _whole(asked: Asked, every: str, zone: Any) -> tuple[int | None, int | None]:
    """The time asked for, widened to whole bins, so that a bin never depends on it."""
    start, end = asked.start, asked.end
    if start is not None:
        edges = bin_edges(start / 1e6, start / 1e6 + 1.0, every, zone)
        start = int(edges[0] * SECOND)
    if end is not None and (start is None or end > start):
        edges = bin_edges(end / 1e6 - 1e-3, end / 1e6, every, zone)
        end = int(edges[-1] * SECOND)
    return start, end


def _binned(
    scene: Scene,
    asked: Asked,
    found: Stored,
    result: Estimated,
    rows: NDArray[np.intp],
    every: str,
    zone: Any,
) -> tuple[pl.DataFrame, float]:
    """The bins of one series."""
    seconds = found.time[rows] / 1e6
    start, end = _whole(asked, every, zone)
    first = seconds[0] if start is None else start / 1e6
    last = np.nextafter(seconds[-1], np.inf) + 1e-6 if end is None else end / 1e6
    edges = bin_edges(float(first), float(last), every, zone)
    flags: Flags = result.flags[rows]
    table: dict[str, Any] = {}
    gap = 0.0
    for name in ESTIMATED:
        if name not in result.columns and name != ESTIMATED[0]:
            continue
        nothing = np.full(len(found), np.nan)  # where none of the readings can be estimated
        parts = (
            result.columns.get(name + suffix, nothing)[rows]
            for suffix in ("", "_u", "_u_shared", "_lower", "_upper")
        )
        sources = result.source[rows] + 1
        value, u, shared, lower, upper = map(_known, parts)
        line = series(seconds, value, u, shared, flags=flags, sources=sources, ends=(lower, upper))
        step = scene.station.interval or usual_step(line)
        step = step if np.isfinite(step) else EVERY[every]
        gap = GAP_STEPS * step
        bins = resample(line, edges, step=step, gap=gap, rules=(asked.mean,))
        if not table:
            table = _keys(bins, result, rows[_last_rows(seconds, bins)])
        table |= _told(name, bins, asked.mean, main=name == ESTIMATED[0])
    return frame_of(table), gap


def _known(values: Array) -> Array:
    return np.ascontiguousarray(values)


def _last_rows(seconds: Array, bins: Bins) -> NDArray[np.intp]:
    """The last row of each bin; the nearest one where it has none."""
    return np.clip(np.searchsorted(seconds, bins.end) - 1, 0, len(seconds) - 1)


def _keys(bins: Bins, result: Estimated, last: NDArray[np.intp]) -> dict[str, Any]:
    return {
        _START: pl.Series((bins.start * SECOND).astype(np.int64)),
        "time": text_of((bins.start * SECOND).astype(np.int64)),
        "end": text_of((bins.end * SECOND).astype(np.int64)),
        "probe": probe_names(result, last),
        "depth": numbers(result.depth[last]),
    }


def _told(name: str, bins: Bins, rule: str, *, main: bool) -> Mapping[str, Any]:
    mean = bins.means[rule]
    count = {("count" if main else f"{name}_count"): pl.Series(bins.count)}
    told: dict[str, Any] = {
        name: numbers(mean.value),
        f"{name}_u": numbers(mean.standard_uncertainty),
        f"{name}_u_shared": numbers(mean.shared),
        f"{name}_lower": numbers(mean.lower),
        f"{name}_upper": numbers(mean.upper),
        f"{name}_minimum": numbers(bins.minimum),
        f"{name}_maximum": numbers(bins.maximum),
        f"{name}_last": numbers(bins.last),
        **count,
    }
    if main:
        told["coverage_fraction"] = numbers(bins.coverage_fraction)
        told["flagged_count"] = pl.Series(bins.flagged_count)
        told["flags"] = slugs(bins.flags)
    return told


def _page(tables: list[pl.DataFrame], asked: Asked) -> tuple[pl.DataFrame, str | None]:
    """The bins of one page, and where the next one begins, by series and start."""
    if not tables:
        return frame_of({}), None
    table = pl.concat(tables, how="diagonal")
    number, start = pl.col(_NUMBER), pl.col(_START)
    if asked.after is not None:
        series_number, moment = asked.after
        later = (number == series_number) & (start > moment)
        table = table.filter((number > series_number) | later)
    page = table.head(asked.limit)
    after = None
    if page.height < table.height:
        after = cursor_of(*page.select(number, start).row(-1))
    return page.drop(_NUMBER, _START), after
