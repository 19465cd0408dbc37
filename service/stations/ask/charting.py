"""The chart of a station: what is asked, worked out and handed to the page that draws it."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from models.conversion import unit_of
from models.series import series, usual_step
from service.errors import Unprocessable
from service.faults import Fault, hint
from service.page.chart import Change, Line, Panel, lines_by_depth, time_chart
from service.page.chart_lanes import shortened
from service.schemas.estimates import ESTIMATED
from service.stations.ask.asked import Asked, now
from service.stations.ask.estimating import Estimated, estimated
from service.stations.ask.joining import series_of
from service.stations.ask.questions import Scene, readings_between
from service.stations.ask.resampled import GAP_STEPS, MOST_READINGS
from service.stations.ask.stored import Stored
from service.stations.series_edges import zone_of
from service.stations.times import SECOND
from service.store.interface import Span

USUAL_DAYS = 7
"""Days up to the last reading that are shown where no start is asked for."""
MOST_NOTES = 3
"""Reasons for readings without a number that stand under a chart."""
TITLES = {
    "water_content": "Water content",
    "bulk_conductivity_25": "Bulk conductivity at 25 Cel",
    "pore_water_conductivity": "Pore-water conductivity at 25 Cel",
    "saturation_extract_conductivity": "Saturation-extract conductivity at 25 Cel",
}


def chart_of(scene: Scene, asked: Asked) -> str:
    """An SVG document of water content and salinity over time, a line for each depth.

    Raises Unprocessable, ParameterError.
    """
    wanted = _wanted(asked.quantity)
    end = asked.end if asked.end is not None else _last(scene) + 1
    start = asked.start if asked.start is not None else end - USUAL_DAYS * 86_400 * SECOND
    found = readings_between(scene, start, end, MOST_READINGS)
    result = estimated(found, scene.documents, asked.estimate, asked.units, scene.upto)
    shown = wanted or [n for n in (ESTIMATED[0], ESTIMATED[2]) if n in result.columns]
    document = scene.documents.find("station", scene.station.name)
    title = (document.body or {}).get("title") if document else None
    probability = asked.estimate.get("coverage_probability", 0.95)
    notes = [f"Bands hold the truth with probability {probability:g}, of the inputs stated."]
    notes += [shortened(text, 130) for text in dict.fromkeys(result.troubles[:MOST_NOTES])]
    return time_chart(
        [_panel(name, scene, found, result, asked) for name in shown or ESTIMATED[:1]],
        title=f"{scene.station.name}: {title}" if title else scene.station.name,
        span=(start / SECOND, end / SECOND),
        zone=zone_of(asked.zone or scene.station.zone),
        gap=GAP_STEPS * (scene.station.interval or 3600.0),
        notes=notes,
        changes=_changes(found, result),
    )


def _wanted(text: str) -> list[str]:
    names = [name for name in text.split(",") if name]
    for name in names:
        if name not in ESTIMATED:
            detail = f"{name[:80]} is not drawn{hint(name, ESTIMATED)}; {', '.join(ESTIMATED)} are"
            raise Unprocessable(detail, [Fault(detail, "?quantity")])
    return names


def _last(scene: Scene) -> int:
    rows = scene.shelf.store.newest(Span(scene.channels, (), upto=scene.upto))
    return max((row[1] for row in rows), default=now())


def _gap(scene: Scene, line: Line) -> float:
    """Seconds without a number that are a gap of a line: three of its steps."""
    step = scene.station.interval or usual_step(series(line.seconds, np.zeros(line.seconds.size)))
    return GAP_STEPS * (step if np.isfinite(step) else 3600.0)


def _panel(name: str, scene: Scene, found: Stored, result: Estimated, asked: Asked) -> Panel:
    unit = unit_of(name, asked.units).code
    nothing = np.full(len(found), np.nan)
    rows = np.concatenate([*series_of(found, result).values(), np.zeros(0, np.intp)])
    band = [result.columns.get(name + suffix, nothing)[rows] for suffix in ("", "_lower", "_upper")]
    lines: Sequence[Line] = lines_by_depth(
        result.depth[rows], found.time[rows] / SECOND, band, result.flags[rows] != 0
    )
    lines = [replace(line, gap=_gap(scene, line)) for line in lines]
    return Panel(TITLES[name], unit, lines)


def _changes(found: Stored, result: Estimated) -> list[Change]:
    """Where the readings of a depth begin to rest on another soil or another probe."""
    changes = []
    for depth in np.unique(result.depth[result.source >= 0]).tolist():
        rows = np.flatnonzero((result.depth == depth) & (result.source >= 0))
        rows = rows[np.argsort(found.time[rows], kind="stable")]
        sources = result.source[rows]
        for at in (np.flatnonzero(np.diff(sources)) + 1).tolist():
            before, after = result.grounds[sources[at - 1]], result.grounds[sources[at]]
            new = [n for n, o in ((after.soil, before.soil), (after.probe, before.probe)) if n != o]
            if new:
                words = f"{depth:.2f} m: {', '.join(new)}"
                changes.append(Change(found.time[rows[at]] / SECOND, words))
    return sorted(changes, key=lambda change: change.seconds)
