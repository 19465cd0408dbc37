"""The chart of a station: quantities over time, line by line, with bands, flags and gaps visible.

Lines are told apart by dash and marker as well as by colour, so that the chart can be read in print
and by colour-blind eyes. Under each panel a lane per line shows when it was read, where nothing
was, and which readings carry a flag.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import datetime
from zoneinfo import ZoneInfo

import numpy as np

from models.errors import Complaint, ParameterError
from service.page.axes import Axis, axis_for
from service.page.chart_changes import Change, draw_changes
from service.page.chart_key import draw_key
from service.page.chart_lanes import LANE, draw_lanes, shortened
from service.page.chart_lines import Look, draw_band, draw_flagged, draw_line, look_of
from service.page.chart_rows import Drawn, Line, Panel, drawn, lines_by_depth
from service.page.svg import MEDIA_TYPE, Drawing
from service.page.time_axis import Tick, date, time_ticks
from service.stations.series_edges import FIRST, LAST

__all__ = ["MEDIA_TYPE", "Change", "Line", "Panel", "lines_by_depth", "time_chart"]

WIDTH, LEFT, RIGHT = 960.0, 66.0, 150.0
TOP, HEIGHT, BETWEEN, BOTTOM = 96.0, 230.0, 44.0, 56.0
INK, QUIET, GRID = "#1c1c1c", "#555555", "#dcdcdc"
REACH = 2.0
"""How far a band widens the axis beyond the values: times their range, or half the largest."""
TICKS_APART, DATE_WIDTH = 54.0, 84.0
"""Pixels between the ticks of the time axis at least, and that a date takes under them."""


@dataclass(frozen=True, slots=True)
class _Placed:
    """A panel with what is drawn in it and where."""

    panel: Panel
    lines: Sequence[tuple[str, Drawn, Look]]
    top: float

    @property
    def bottom(self) -> float:
        """Of the lanes under it."""
        return self.top + HEIGHT + 6.0 + LANE * len(self.lines)


def time_chart(
    panels: Sequence[Panel],
    *,
    title: str,
    span: tuple[float, float],
    zone: ZoneInfo,
    gap: float,
    notes: Iterable[str] = (),
    changes: Sequence[Change] = (),
) -> str:
    """Panels one under the other over one time axis, as an SVG document.

    span: start and end of the axis, s since the epoch. zone: of its dates and clock times.
    gap: s, positive; numbers further apart are not joined, and the time between is shown as a gap.
    notes: a line each under the chart: what the bands hold, the rule of a mean.
    changes: moments from which on a line rests on something else; each has a rule and its words.

    Where readings lie closer than a pixel, the line is their mean and a darker strip reaches from
    the lowest to the highest of them. The same input gives the same bytes.
    Raises ParameterError when the span has no end after its start, or the gap is not positive.
    """
    _check(span, gap)
    time = Axis(*span, LEFT, WIDTH - RIGHT)
    names = dict.fromkeys(line.name for panel in panels for line in panel.lines)
    looks = {name: look_of(place) for place, name in enumerate(names)}
    placed: list[_Placed] = []
    for panel in panels:
        lines = [(line.name, drawn(line, time, gap), looks[line.name]) for line in panel.lines]
        placed.append(_Placed(panel, lines, placed[-1].bottom + BETWEEN if placed else TOP))
    bottom = placed[-1].bottom if placed else TOP
    said = [*notes, f"Hatched: no number for more than {_longest(panels, gap)}."]
    if any(line.lowest is not None for place in placed for _, line, _ in place.lines):
        said.append("Each pixel shows the mean of its readings, the dark strip their extremes.")
    if any(_cut(place) for place in placed):
        said.append("Bands that reach further than a panel are cut at its edge.")
    when = f"{_moment(span[0], zone)} to {_moment(span[1], zone)}, time zone {zone.key}"
    height = bottom + BOTTOM + 16.0 * len(said)
    drawing = Drawing(WIDTH, height, title=title, description=_described(placed, when))
    drawing.text(LEFT, 32, shortened(title, 75), font_size=19, font_weight=600, fill=INK)
    drawing.text(LEFT, 53, when, font_size=13, fill=QUIET)
    hatching = drawing.hatching("gap", "#8a8a8a", spacing=4.0)
    ticks = time_ticks(*span, zone, int((time.end - time.start) / TICKS_APART))
    for number, place in enumerate(placed):
        _draw_panel(drawing, place, f"panel-{number}", time, ticks)
        draw_changes(drawing, changes, time, (place.top, HEIGHT), named=number == 0)
        draw_lanes(drawing, place.lines, place.top + HEIGHT + 6.0, time, hatching)
    _draw_time(drawing, ticks, bottom, time)
    draw_key(drawing, looks, WIDTH - RIGHT + 18.0, TOP, hatching)
    for number, words in enumerate(said):
        drawing.text(LEFT, bottom + 60 + 16 * number, words, font_size=12, fill=QUIET)
    return str(drawing)


def _check(span: tuple[float, float], gap: float) -> None:
    complaints = []
    if not FIRST <= span[0] < span[1] <= LAST:
        detail = "takes an end after the start, between years 12 and 9979"
        complaints.append(Complaint("end", detail))
    if not gap > 0:
        complaints.append(Complaint("gap", f"takes gap above 0 s, found {gap:g}"))
    if complaints:
        raise ParameterError("chart", complaints)


def _draw_panel(
    drawing: Drawing, placed: _Placed, name: str, time: Axis, ticks: Sequence[Tick]
) -> None:
    top, panel = placed.top, placed.panel
    height = _height_axis([line for _, line, _ in placed.lines], top)
    heading = f"{panel.title}, {panel.unit}" if panel.unit else panel.title
    drawing.text(time.start, top - 10, heading, font_size=14, font_weight=600, fill=INK)
    empty = not any(line.seconds.size for _, line, _ in placed.lines)
    for value, label in () if empty else height.ticks():
        y = float(height.place(value))
        drawing.line(time.start, y, time.end, y, stroke=GRID)
        drawing.text(time.start - 8, y, label, font_size=12, fill=QUIET, text_anchor="end",
                     dominant_baseline="central")  # fmt: skip
    for tick in ticks:
        x = float(time.place(tick.seconds))
        drawing.line(x, top, x, placed.bottom, stroke=GRID)
    window = drawing.clip(name, time.start, top, time.end - time.start, HEIGHT)
    with drawing.group(clip_path=window):
        for _, line, look in placed.lines:
            draw_band(drawing, line, look, time, height)
        for _, line, look in placed.lines:
            draw_line(drawing, line, look, time, height)
        for _, line, _ in placed.lines:
            draw_flagged(drawing, line, time, height)
    drawing.rectangle(time.start, top, time.end - time.start, HEIGHT, fill="none", stroke="#999999")
    if empty:
        drawing.text(0.5 * (time.start + time.end), top + 0.5 * HEIGHT, "no number in this time",
                     font_size=14, fill=QUIET, text_anchor="middle")  # fmt: skip


def _height_axis(lines: Sequence[Drawn], top: float) -> Axis:
    """Holds every value, and of the bands what does not dwarf the values."""
    held = [np.empty(0)]
    for line in lines:
        held += [line.value, line.flagged_value]
        held += [part for part in (line.lowest, line.highest) if part is not None]
    values = np.concatenate(held)
    values = values[np.isfinite(values)]
    if values.size:
        low, high = values.min(), values.max()
        reach = REACH * max(high - low, 0.5 * np.abs(values).max())
        ends = np.concatenate([part for line in lines for part in (line.lower, line.upper)])
        values = np.concatenate([values, np.clip(ends, low - reach, high + reach)])
    floor = -np.inf if np.any(values < 0) else 0.0
    return axis_for(values, top + HEIGHT, top, floor=floor)


def _cut(placed: _Placed) -> bool:
    """Whether a band leaves the panel."""
    lines = [line for _, line, _ in placed.lines]
    height = _height_axis(lines, placed.top)
    return any(
        bool(np.any(line.lower < height.low) or np.any(line.upper > height.high)) for line in lines
    )


def _draw_time(drawing: Drawing, ticks: Sequence[Tick], bottom: float, time: Axis) -> None:
    """Labels of the time axis; below them what changes more rarely, where there is room."""
    free = -np.inf
    for place, tick in enumerate(ticks):
        x = float(time.place(tick.seconds))
        drawing.line(x, bottom, x, bottom + 5, stroke="#999999")
        drawing.text(x, bottom + 19, tick.label, font_size=12, fill=INK, text_anchor="middle")
        coming = [float(time.place(t.seconds)) for t in ticks[place + 1 :] if t.under][:1]
        crowded = place == 0 and bool(coming) and coming[0] - x < DATE_WIDTH
        if tick.under and x >= free and not crowded:
            drawing.text(x, bottom + 35, tick.under, font_size=12, fill=QUIET, text_anchor="middle")
            free = x + DATE_WIDTH


def _described(placed: Sequence[_Placed], when: str) -> str:
    """In words, for those who do not see it."""
    told = [f"{when}."]
    for place in placed:
        unit = f" {place.panel.unit}" if place.panel.unit else ""
        for name, line, _ in place.lines:
            known = line.value[np.isfinite(line.value)]
            ends = f"{known.min():.3g} to {known.max():.3g}{unit}" if known.size else "no number"
            told.append(
                f"{place.panel.title}, {name}: {ends}; {line.count} readings, "
                f"{line.flagged_count} flagged, {line.gaps.start.size} gaps."
            )
    return " ".join(told)


def _moment(seconds: float, zone: ZoneInfo) -> str:
    local = datetime.fromtimestamp(seconds, zone)
    return f"{date(local)} {local:%H:%M}"


def _longest(panels: Sequence[Panel], gap: float) -> str:
    """How long a line may be without a number and still be joined."""
    own = [line.gap for panel in panels for line in panel.lines if line.gap is not None]
    short, long = (_duration(end(own, default=gap)) for end in (min, max))
    return short if short == long else f"{short} to {long}, line by line"


def _duration(seconds: float) -> str:
    for length, name in ((86_400.0, "d"), (3600.0, "h"), (60.0, "min")):
        if seconds >= 2 * length or seconds == length:
            return f"{seconds / length:.3g} {name}"
    return f"{seconds:.3g} s"
