"""The chart of a station: what is asked, worked out and handed to the page that draws it."""

from collections.abc import Sequence

import numpy as np

from models.conversion import unit_of
from models.series import series, usual_step
from service.errors import Unprocessable
from service.faults import Fault, hint
from service.page.chart import Line, Panel, lines_by_depth, time_chart
from service.schemas.estimates import ESTIMATED
from service.series_edges import zone_of
from service.stations.ask.asked import Asked, now
from service.stations.ask.estimating import Estimated, estimated
from service.stations.ask.joining import series_of
from service.stations.ask.questions import Scene, readings_between
from service.stations.ask.resampled import GAP_STEPS, MOST_READINGS
from service.stations.ask.stored import Stored
from service.stations.times import SECOND
from service.store.interface import Span

USUAL_DAYS = 7
"""Days up to the last reading that are shown where no start is asked for."""
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
    return time_chart(
        [_panel(name, found, result, asked) for name in shown or ESTIMATED[:1]],
        title=f"{scene.station.name}: {title}" if title else scene.station.name,
        span=(start / SECOND, end / SECOND),
        zone=zone_of(asked.zone or scene.station.zone),
        gap=_gap(scene, found),
        notes=notes,
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


def _gap(scene: Scene, found: Stored) -> float:
    """Seconds without a number that are a gap: three steps of the slowest series."""
    steps = [scene.station.interval] if scene.station.interval else []
    for number in np.unique(found.number).tolist() if not steps else ():
        times = found.time[found.number == number] / SECOND
        step = usual_step(series(times, np.zeros(times.size)))
        steps += [step] if np.isfinite(step) else []
    return GAP_STEPS * max(steps, default=3600.0)


def _panel(name: str, found: Stored, result: Estimated, asked: Asked) -> Panel:
    unit = unit_of(name, asked.units).code
    nothing = np.full(len(found), np.nan)
    rows = np.concatenate([*series_of(found, result).values(), np.zeros(0, np.intp)])
    band = [result.columns.get(name + suffix, nothing)[rows] for suffix in ("", "_lower", "_upper")]
    lines: Sequence[Line] = lines_by_depth(
        result.depth[rows], found.time[rows] / SECOND, band, result.flags[rows] != 0
    )
    return Panel(TITLES[name], unit, lines)
