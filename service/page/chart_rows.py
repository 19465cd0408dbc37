"""What is drawn of a line: no more points than pixels, broken at gaps, flags and gaps marked."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.relation import Array, column
from models.series import Gaps, Series, find_gaps, resample, series
from models.uncertainty.aggregation import Labels
from service.page.axes import Axis

CROWDED = 1.5
"""Numbers per pixel above which they are drawn by the pixel."""
RINGS_APART, MOST_RINGS = (8.0, 24.0), 40
"""Pixels between flagged readings that are ringed, at least about; wider where that is many."""


@dataclass(frozen=True, slots=True)
class Line:
    """One line of a panel: one depth, or one probe; columns of equal length in any order."""

    name: str
    seconds: Array
    """Since the epoch."""
    value: Array
    """In the unit of the panel; NaN where there is no number."""
    lower: Array
    """Ends of the band; NaN where there is none."""
    upper: Array
    flagged: NDArray[np.bool_]
    """Rows that carry a flag, with a number or without."""
    gap: float | None = None
    """s, how far apart its numbers may be and still be joined; None: as in the whole chart."""


@dataclass(frozen=True, slots=True)
class Panel:
    """One quantity; lines of the same name look alike in every panel."""

    title: str
    unit: str
    lines: Sequence[Line]


@dataclass(frozen=True, slots=True)
class Drawn:
    """A line as it is drawn: points in time order, NaN between those that are not joined."""

    seconds: Array
    value: Array
    lower: Array
    upper: Array
    lowest: Array | None
    """Of the readings behind each point; None where a point is a reading."""
    highest: Array | None
    doubtful: NDArray[np.bool_]
    """Points behind which there are none but flagged readings."""
    flagged: Array
    """Times of flagged rows, at most one per pixel."""
    flagged_seconds: Array
    """Times and values of flagged rows that have a number, some pixels apart."""
    flagged_value: Array
    gaps: Gaps
    count: int
    """Rows in the time that is shown."""
    flagged_count: int


def lines_by_depth(
    depth: ArrayLike, seconds: ArrayLike, band: Sequence[ArrayLike], flagged: ArrayLike
) -> tuple[Line, ...]:
    """Columns of all depths, shape (n,), as one line per depth from the top down.

    depth: m; band: value, lower and upper end.
    """
    depths, marked = column(depth), np.asarray(flagged).astype(bool)
    value, lower, upper = (column(part) for part in band)
    times = column(seconds)
    return tuple(
        Line(f"{z:.2f} m", times[at], value[at], lower[at], upper[at], marked[at])
        for z in np.unique(depths[np.isfinite(depths)]).tolist()
        for at in [depths == z]
    )


def drawn(line: Line, time: Axis, gap: float) -> Drawn:
    """The part of a line that a time axis shows; numbers further apart than gap (s) not joined."""
    gap = gap if line.gap is None else line.gap
    shown = np.flatnonzero((line.seconds >= time.low) & (line.seconds <= time.high))
    shown = shown[np.lexsort((line.value[shown], line.seconds[shown]))]
    seconds, value = line.seconds[shown], line.value[shown]
    numbers = np.flatnonzero(np.isfinite(value))
    columns = [part[shown][numbers] for part in (line.seconds, line.value, line.lower, line.upper)]
    place = np.arange(numbers.size)
    lowest = highest = None
    pixels = int(abs(time.end - time.start))
    if numbers.size > CROWDED * pixels:
        edges = np.linspace(time.low, np.nextafter(time.high, np.inf), pixels + 1)
        place, columns, lowest, highest = _by_pixel(columns, edges)
    doubtful = np.ones(columns[0].size, dtype=np.bool_)
    doubtful[place[~line.flagged[shown][numbers]]] = False
    apart = np.flatnonzero(np.diff(seconds[numbers]) > gap)
    apart = apart[place[apart] != place[apart + 1]] if apart.size else apart

    def broken(part: Array) -> Array:
        return np.insert(part, place[apart] + 1, np.nan)

    marked = shown[line.flagged[shown]]
    with_number = marked[np.isfinite(line.value[marked])]
    for apart_by in RINGS_APART:
        if apart_by == RINGS_APART[0] or with_number.size > MOST_RINGS:
            with_number = with_number[_one_per(apart_by, line.seconds[with_number], time)]
    rows = series(seconds, value)
    moments, values, lower, upper = (broken(part) for part in columns)
    return Drawn(
        seconds=moments,
        value=values,
        lower=lower,
        upper=upper,
        lowest=None if lowest is None else broken(lowest),
        highest=None if highest is None else broken(highest),
        doubtful=np.insert(doubtful, place[apart] + 1, False),
        flagged=line.seconds[marked[_one_per(1.0, line.seconds[marked], time)]],
        flagged_seconds=line.seconds[with_number],
        flagged_value=line.value[with_number],
        gaps=find_gaps(rows, gap, start=time.low, end=time.high),
        count=int(shown.size),
        flagged_count=int(marked.size),
    )


def _by_pixel(columns: list[Array], edges: Array) -> tuple[Labels, list[Array], Array, Array]:
    """For each reading its point; the points; the lowest and highest value behind each."""
    seconds, value, lower, upper = columns
    width = edges[1] - edges[0]

    def binned(values: Array) -> Series:
        return series(seconds, np.where(np.isfinite(values), values, np.nan))

    found, low, high = (
        resample(binned(part), edges, step=width, gap=width, rules=rules)
        for part, rules in ((value, ["plain"]), (lower, []), (upper, []))
    )
    filled = np.flatnonzero(found.count)
    place = np.searchsorted(filled, np.searchsorted(edges, seconds, side="right") - 1)
    points = [
        0.5 * (found.start + found.end)[filled],
        found.means["plain"].value[filled],
        low.minimum[filled],
        high.maximum[filled],
    ]
    return place, points, found.minimum[filled], found.maximum[filled]


def _one_per(pixels: float, seconds: Array, time: Axis) -> Labels:
    """Places of the first row of each so many pixels."""
    return np.unique(np.rint(time.place(seconds) / pixels), return_index=True)[1]
