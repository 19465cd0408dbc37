"""Plots of one quantity over another: points, lines and bands, linear or logarithmic, gaps kept.

What is measured is drawn as markers, what is computed as lines; series are told apart by shape and
dash as well as by colour, so that a plot can be read in print and by colour-blind eyes.
"""

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from models.relation import Array
from service.page.axes import Axis, axis_for
from service.page.chart_lanes import shortened
from service.page.chart_lines import Look, look_of
from service.page.svg import Drawing

WIDTH, LEFT, RIGHT = 860.0, 78.0, 210.0
TOP, HEIGHT, BETWEEN, BOTTOM = 96.0, 250.0, 74.0, 62.0
TALL = 480.0
"""Height of a panel whose axes have one scale."""
INK, QUIET, GRID, EDGE = "#1c1c1c", "#555555", "#dcdcdc", "#999999"
MOST_MARKERS = 160
"""Of a series; of a longer one, evenly spaced points are drawn."""
ROW, SAMPLE = 22.0, 34.0
FEW_DECADES = 300.0
"""Ratio of the ends of a logarithmic axis up to which decades alone are too few ticks."""
ONE_SCALE = 6.0
"""Where one axis spans more than this many times the other, they keep scales of their own."""


@dataclass(frozen=True, slots=True)
class Series:
    """Points with a name; NaN leaves a gap."""

    name: str
    x: Array
    y: Array
    measured: bool = False
    """Drawn as markers, not joined."""
    lower: Array | None = None
    upper: Array | None = None
    """Ends of its band."""


@dataclass(frozen=True, slots=True)
class Panel:
    """Series over one pair of axes. Labels hold the quantity and its unit."""

    x_label: str
    y_label: str
    series: Sequence[Series]
    x_logarithmic: bool = False
    y_logarithmic: bool = False
    one_scale: bool = False
    """A unit is as long up as it is across, so that circles are round."""
    y_least: float = 0.0
    """What a linear axis of y spans at least, so that the last digits do not fill the plot."""


@dataclass(frozen=True, slots=True)
class _Placed:
    panel: Panel
    x: Axis
    y: Axis

    @property
    def top(self) -> float:
        return self.y.end

    @property
    def bottom(self) -> float:
        return self.y.start


def plot(
    panels: Sequence[Panel], *, title: str, subtitle: str = "", notes: Iterable[str] = ()
) -> str:
    """Panels one under the other, as an SVG document; the same input gives the same bytes.

    notes: a line each under the plot.
    """
    placed: list[_Placed] = []
    for panel in panels:
        placed.append(_placed(panel, placed[-1].bottom + BETWEEN if placed else TOP))
    names = dict.fromkeys(one.name for panel in panels for one in panel.series)
    looks = {name: look_of(place) for place, name in enumerate(names)}
    measured = {one.name for panel in panels for one in panel.series if one.measured}
    banded = any(one.lower is not None for panel in panels for one in panel.series)
    said = [*notes]
    if any(len(one.x) > MOST_MARKERS for p in panels for one in p.series if one.measured):
        said.append(f"Of the points, {MOST_MARKERS} evenly spaced ones are drawn.")
    if any(p.panel.one_scale and not _is_one_scale(p.x, p.y) for p in placed):
        said.append("The axes have scales of their own: one spans far more than the other.")
    bottom = placed[-1].bottom + BOTTOM
    height = bottom + 17.0 * len(said) + 6.0
    drawing = Drawing(WIDTH, height, title=title, description=_described(panels))
    drawing.text(LEFT, 30, shortened(title, 70), font_size=19, font_weight=600, fill=INK)
    if subtitle:
        drawing.text(LEFT, 51, shortened(subtitle, 110), font_size=13, fill=QUIET)
    for number, place in enumerate(placed):
        _draw(drawing, place, looks, f"panel-{number}")
    _draw_key(drawing, looks, measured, banded=banded)
    for number, words in enumerate(said):
        drawing.text(LEFT, bottom + 17 * number, words, font_size=12, fill=QUIET)
    return str(drawing)


def _placed(panel: Panel, top: float) -> _Placed:
    tall = TALL if panel.one_scale else HEIGHT
    across = _held(panel, [one.x for one in panel.series])
    up = [part for one in panel.series for part in (one.y, one.lower, one.upper)
          if part is not None]  # fmt: skip
    x = axis_for(across, LEFT, WIDTH - RIGHT, logarithmic=panel.x_logarithmic)
    y = axis_for(_held(panel, up), top + tall, top, logarithmic=panel.y_logarithmic,
                 least=panel.y_least)  # fmt: skip
    if panel.one_scale:
        x, y = _one_scale(x, y)
    return _Placed(panel, x, y)


def _held(panel: Panel, columns: Sequence[Array]) -> Array:
    """All values of a panel's columns; none where it is empty."""
    return np.concatenate([np.empty(0), *columns]) if panel.series else np.empty(0)


def _one_scale(x: Axis, y: Axis) -> tuple[Axis, Axis]:
    """Both axes with as many pixels a unit as the one that has fewer."""
    wide, high = abs(x.end - x.start), abs(y.end - y.start)
    spans = (x.high - x.low) / wide, (y.high - y.low) / high
    if max(spans) > ONE_SCALE * min(spans):
        return x, y
    unit = max(spans)
    return (
        Axis(x.low, x.low + unit * wide, x.start, x.end),
        Axis(y.low, y.low + unit * high, y.start, y.end),
    )


def _is_one_scale(x: Axis, y: Axis) -> bool:
    across, up = ((axis.high - axis.low) / abs(axis.end - axis.start) for axis in (x, y))
    return math.isclose(across, up, rel_tol=1e-9)


def _draw(drawing: Drawing, placed: _Placed, looks: dict[str, Look], name: str) -> None:
    x, y, panel = placed.x, placed.y, placed.panel
    _draw_axes(drawing, placed)
    window = drawing.clip(name, x.start, placed.top, x.end - x.start, placed.bottom - placed.top)
    with drawing.group(clip_path=window):
        for one in panel.series:
            _draw_band(drawing, one, looks[one.name], x, y)
        for one in sorted(panel.series, key=lambda one: not one.measured):
            look = looks[one.name]
            across, up = x.place(one.x), y.place(one.y)
            if one.measured:
                kept = _spaced(len(across))
                drawing.markers(look.shape, across[kept], up[kept], fill="none",
                                stroke=look.colour, stroke_width=1.2)  # fmt: skip
            else:
                drawing.curve(across, up, stroke=look.colour, stroke_width=2,
                              stroke_linejoin="round", **_dashed(look))  # fmt: skip
    drawing.rectangle(x.start, placed.top, x.end - x.start, placed.bottom - placed.top,
                      fill="none", stroke=EDGE)  # fmt: skip


def _draw_axes(drawing: Drawing, placed: _Placed) -> None:
    x, y, panel = placed.x, placed.y, placed.panel
    for value, label in _ticks(x, 7):
        at = float(x.place(value))
        drawing.line(at, placed.top, at, placed.bottom, stroke=GRID)
        drawing.text(at, placed.bottom + 18, label, font_size=12, fill=QUIET,
                     text_anchor="middle")  # fmt: skip
    for value, label in _ticks(y, 6):
        at = float(y.place(value))
        drawing.line(x.start, at, x.end, at, stroke=GRID)
        drawing.text(x.start - 8, at, label, font_size=12, fill=QUIET, text_anchor="end",
                     dominant_baseline="central")  # fmt: skip
    drawing.text(0.5 * (x.start + x.end), placed.bottom + 38, panel.x_label, font_size=13,
                 fill=INK, text_anchor="middle")  # fmt: skip
    drawing.text(x.start, placed.top - 9, panel.y_label, font_size=13, font_weight=600, fill=INK)


def _ticks(axis: Axis, most: int) -> Sequence[tuple[float, str]]:
    """As the axis has them; on a short logarithmic one also twice and five times the decades."""
    if not axis.logarithmic or axis.high > FEW_DECADES * axis.low:
        return axis.ticks(most)
    powers = range(math.floor(math.log10(axis.low)), math.ceil(math.log10(axis.high)) + 1)
    values = [factor * 10.0**power for power in powers for factor in (1, 2, 5)]
    return [(value, f"{value:g}") for value in values if axis.low <= value <= axis.high]


def _draw_band(drawing: Drawing, one: Series, look: Look, x: Axis, y: Axis) -> None:
    if one.lower is None or one.upper is None:
        return
    across, low, high = x.place(one.x), y.place(one.lower), y.place(one.upper)
    drawing.area(across, low, high, fill=look.colour, fill_opacity=0.16)
    for end in (low, high):
        drawing.curve(across, end, stroke=look.colour, stroke_width=0.7, stroke_opacity=0.6)


def _draw_key(
    drawing: Drawing, looks: dict[str, Look], measured: set[str], *, banded: bool
) -> None:
    """Samples with their names, right of the first panel."""
    left, y = WIDTH - RIGHT + 18.0, TOP + 8.0
    for name, look in looks.items():
        if name in measured:
            drawing.markers(look.shape, np.array([left + SAMPLE / 2]), np.array([y]), fill="none",
                            stroke=look.colour, stroke_width=1.2)  # fmt: skip
        else:
            drawing.line(left, y, left + SAMPLE, y, stroke=look.colour, stroke_width=2,
                         **_dashed(look))  # fmt: skip
        _write(drawing, left, y, name)
        y += ROW
    if banded:
        drawing.rectangle(left, y - 6, SAMPLE, 12, fill="#555555", fill_opacity=0.16,
                          stroke="#555555", stroke_width=0.7)  # fmt: skip
        _write(drawing, left, y, "band")


def _write(drawing: Drawing, left: float, y: float, words: str) -> None:
    drawing.text(left + SAMPLE + 8, y, shortened(words, 22), font_size=12, fill=INK,
                 dominant_baseline="central")  # fmt: skip


def _dashed(look: Look) -> dict[str, object]:
    return {"stroke_dasharray": look.dash} if look.dash else {}


def _spaced(count: int) -> "np.ndarray[tuple[int], np.dtype[np.intp]]":
    return np.unique(np.linspace(0, count - 1, min(count, MOST_MARKERS)).round().astype(np.intp))


def _described(panels: Sequence[Panel]) -> str:
    """In words, for those who do not see it."""
    told = []
    for panel in panels:
        for one in panel.series:
            known = one.y[np.isfinite(one.y)]
            ends = f"{known.min():.3g} to {known.max():.3g}" if known.size else "no number"
            told.append(f"{panel.y_label} over {panel.x_label}, {one.name}: {ends}.")
    return " ".join(told)
