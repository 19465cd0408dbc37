"""How a line looks, and how it is drawn: band, strip, line, markers, flagged readings."""

from dataclasses import dataclass

import numpy as np

from models.relation import Array
from service.page.axes import Axis
from service.page.chart_rows import Drawn
from service.page.svg import Drawing, runs

COLOURS = ("#0b62a4", "#c2500a", "#007a5a", "#a2437f", "#1c1c1c", "#3f9fd8", "#b07d00", "#6b4fb3")
"""Told apart with any common kind of colour vision, and dark enough on paper."""
DASHES = ("", "9 4", "2.5 3", "11 3 2.5 3", "6 3 2 3 2 3")
SHAPES = ("circle", "square", "triangle", "diamond", "plus", "cross", "wedge")
MARKERS_APART = 88.0
"""Pixels between the markers of a line."""
FEW = 10
"""Points of a line up to which each has its marker."""


@dataclass(frozen=True, slots=True)
class Look:
    """Colour, dash and marker of a line, and which of them it is."""

    place: int
    colour: str
    dash: str
    shape: str


def look_of(place: int) -> Look:
    """The look of the line that is drawn as number ``place``: no two of the first 280 are alike."""
    return Look(
        place,
        COLOURS[place % len(COLOURS)],
        DASHES[place % len(DASHES)],
        SHAPES[place % len(SHAPES)],
    )


def draw_band(drawing: Drawing, line: Drawn, look: Look, time: Axis, height: Axis) -> None:
    """The area between the ends of the band, each end with a thin edge of its own."""
    x, low, high = time.place(line.seconds), height.place(line.lower), height.place(line.upper)
    low, high = (_within(end, height) for end in (low, high))
    drawing.area(x, low, high, fill=look.colour, fill_opacity=0.11)
    for end in (low, high):
        drawing.curve(x, end, stroke=look.colour, stroke_width=0.7, stroke_opacity=0.6)
    alone = np.array([run.start for run in runs(x, low, high) if run.stop - run.start == 1], int)
    for at in alone.tolist():
        drawing.line(x[at], low[at], x[at], high[at], stroke=look.colour, stroke_width=1.2,
                     stroke_opacity=0.35)  # fmt: skip


def draw_line(drawing: Drawing, line: Drawn, look: Look, time: Axis, height: Axis) -> None:
    """The line itself over a strip from lowest to highest, with markers along it.

    A marker is hollow where every reading behind it is flagged.
    """
    x, y = time.place(line.seconds), height.place(line.value)
    if line.lowest is not None and line.highest is not None:
        low, high = height.place(line.lowest), height.place(line.highest)
        drawing.area(x, low, high, fill=look.colour, fill_opacity=0.32)
    dash = {"stroke_dasharray": look.dash} if look.dash else {}
    drawing.curve(x, y, stroke=look.colour, stroke_width=1.8, stroke_linejoin="round", **dash)
    at = _marked(x, time, look.place)
    for doubtful, fill in ((False, look.colour), (True, "#ffffff")):
        some = at[line.doubtful[at] == doubtful]
        drawing.markers(look.shape, x[some], y[some], fill=fill, stroke=look.colour,
                        stroke_width=1.2)  # fmt: skip


def draw_flagged(drawing: Drawing, line: Drawn, time: Axis, height: Axis) -> None:
    """A ring round each flagged reading that has a number."""
    x, y = time.place(line.flagged_seconds), height.place(line.flagged_value)
    drawing.markers("circle", x, y, fill="#ffffff", fill_opacity=0.75, stroke="#1c1c1c",
                    stroke_width=1.1)  # fmt: skip


def _within(pixels: Array, height: Axis) -> Array:
    """Ends that lie far outside the panel, brought to just outside it."""
    return np.clip(pixels, height.end - 50.0, height.start + 50.0)


def _marked(x: Array, time: Axis, place: int) -> "np.ndarray[tuple[int], np.dtype[np.intp]]":
    """Points nearest to evenly spaced places, and those joined to no other; all where few are."""
    known = np.flatnonzero(np.isfinite(x))
    alone = [run.start for run in runs(x) if run.stop - run.start == 1]
    if known.size <= FEW:
        return known
    wanted = np.arange(time.start + 14.0 + 23.0 * (place % 4), time.end, MARKERS_APART)
    after = np.clip(np.searchsorted(x[known], wanted), 0, known.size - 1)
    before = np.maximum(after - 1, 0)
    nearer = np.abs(x[known[before]] - wanted) < np.abs(x[known[after]] - wanted)
    nearest = known[np.where(nearer, before, after)]
    near = np.abs(x[nearest] - wanted) < 0.3 * MARKERS_APART
    return np.unique(np.concatenate([nearest[near], np.array(alone, dtype=np.intp)]))
