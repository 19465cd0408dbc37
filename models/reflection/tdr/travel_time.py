"""Travel time along the rods, in two ways, and the apparent permittivity that follows."""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.constants import speed_of_light

from models.reflection.tdr.markers import Edge, edge_of_nothing, end_reflection, first_rise
from models.reflection.tdr.record import Traces
from models.reflection.tdr.smoothing import NARROWEST, Smoothed, following_widths, noise_of, smooth
from models.relation import Array

AIR_INDEX = 1.0003
Bounds = tuple[float, float]
BOUNDS: Bounds = (0.9, 9.4)
"""Refractive indices within which an end reflection is looked for."""
WIDER = 3
"""How often the window of the end reflection may double."""
FOLLOWS = 1.05
"""Rises of an end reflection that its window may be wide."""


@dataclass(frozen=True, slots=True, eq=False)
class Timing:
    """How the times of a trace become the refractive index of what surrounds the rods.

    Two media of known index fix a straight line between time and index, one for each way of
    reading a time: (tangents, steepest slopes).
    """

    low: tuple[float, float]
    """s, time of the end reflection in the medium of index ``low_index``."""
    high: tuple[float, float]
    low_index: float
    high_index: float
    low_u: float
    """s, standard uncertainty of ``low`` that all traces share."""
    high_u: float
    index_u: float = 0.0
    """Of ``high_index``."""
    fixed_start: float | None = None
    """s, when the step reaches the probe; None: each trace shows it by its own first rise."""
    width: float | None = None
    """s, of the smoothing; None: it follows each trace."""
    rises: tuple[float, float] | None = None
    """s, 10 to 90 %, of the end reflections in the two media; None: not measured."""

    @property
    def effective_length(self) -> tuple[float, float]:
        """Of the rods, m, by tangents and by steepest slopes."""
        a, b = (
            speed_of_light * (high - low) / (2.0 * (self.high_index - self.low_index))
            for low, high in zip(self.low, self.high, strict=True)
        )
        return a, b

    @property
    def offset(self) -> tuple[float, float]:
        """Time from the start to the beginning of the rods, s, in the same two ways."""
        a, b = (
            low - 2.0 * length * self.low_index / speed_of_light
            for low, length in zip(self.low, self.effective_length, strict=True)
        )
        return a, b

    @property
    def told(self) -> Mapping[str, float]:
        """Effective length and apparent offset, m: the mean of both ways, half their difference."""
        lengths = self.effective_length
        offsets = [0.5 * speed_of_light * time for time in self.offset]
        return {
            "effective_length": 0.5 * sum(lengths),
            "effective_length_u": 0.5 * abs(lengths[0] - lengths[1]),
            "probe_offset": 0.5 * sum(offsets),
            "probe_offset_u": 0.5 * abs(offsets[0] - offsets[1]),
        }


def plain_timing(
    length: float, length_u: float, offset: float, offset_u: float, width: float | None = None
) -> Timing:
    """Timing of rods that begin ``offset`` s after the first rise.

    length: m.
    """
    unit = 2.0 * length / speed_of_light
    low = offset + unit
    high = offset + unit * 9.0
    high_u = float(np.hypot(offset_u, 9.0 * unit * length_u / length))
    return Timing((low, low), (high, high), 1.0, 9.0, offset_u, high_u, width=width)


@dataclass(frozen=True, slots=True, eq=False)
class Arrivals:
    """First rise and end reflection of every trace."""

    start: Edge
    end: Edge
    width: Array
    """s, of the smoothing at the end reflection."""
    noise: Array
    """Standard uncertainty of one point."""

    def time(self, timing: Timing) -> tuple[Array, Array]:
        """From the start to the end reflection, s, by tangents and by steepest slopes."""
        if timing.fixed_start is not None:
            return self.end.tangent - timing.fixed_start, self.end.steepest - timing.fixed_start
        return self.end.tangent - self.start.tangent, self.end.steepest - self.start.steepest


def find(given: Traces, timing: Timing, within: Bounds = BOUNDS) -> Arrivals:
    """Look for the end reflections of traces.

    within: refractive indices that are looked for. A row depends on nothing but itself.
    """
    given = replace(given, noise=noise_of(given))
    if timing.width is not None:
        widths = np.full(given.count, width_in_points(timing.width, given))
    else:
        widths = following_widths(given)
    distinct = np.unique(widths)
    if distinct.size == 1:
        return _find(given, int(distinct[0]), timing, within)
    parts = [np.flatnonzero(widths == width) for width in distinct]
    found = [_find(given.rows(part), int(widths[part[0]]), timing, within) for part in parts]
    order = np.argsort(np.concatenate(parts))
    return Arrivals(
        _stacked([part.start for part in found], order),
        _stacked([part.end for part in found], order),
        np.concatenate([part.width for part in found])[order],
        np.concatenate([part.noise for part in found])[order],
    )


def width_in_points(width: float, given: Traces) -> int:
    """A window of smoothing, s, on the axis of traces: odd, never too narrow, never most of it."""
    widest = given.points // 4 * 2 + 1
    return min(max(round(width / given.step) // 2 * 2 + 1, NARROWEST), widest)


def _stacked(edges: list[Edge], order: NDArray[np.intp]) -> Edge:
    return Edge(*(np.concatenate([getattr(edge, name) for edge in edges])[order]
                  for name in Edge.__slots__))  # fmt: skip


def _find(given: Traces, width: int, timing: Timing, within: Bounds) -> Arrivals:
    """With one first window: it widens where the end reflection is slower, or drowns in noise."""
    smoothed = smooth(given, width)
    start = first_rise(given, smoothed)
    begin = np.full(given.count, timing.fixed_start) if timing.fixed_start else start.steepest
    end, taken = edge_of_nothing(given.count), np.full(given.count, smoothed.width)
    going: NDArray[np.intp] = np.arange(given.count)
    part = given
    for _ in range(WIDER + 1):
        edge = _end(part, smoothed, timing, begin[going], within)
        better = ~np.isnan(edge.tangent)
        end = _put(end, edge, going, better)
        taken[going[better]] = smoothed.width
        wider = 2 * smoothed.points - 1
        follows = wider * given.step <= FOLLOWS * edge.rise
        still = np.flatnonzero(follows | np.isnan(end.tangent[going]))
        if not still.size or wider > given.points // 4:
            break
        going = going[still]
        part = given.rows(going) if going.size < given.count else given
        smoothed = smooth(part, wider)
    return Arrivals(start, end, taken, given.stated_noise)


def _end(given: Traces, smoothed: Smoothed, timing: Timing, begin: Array, within: Bounds) -> Edge:
    offset, length = timing.offset[1], timing.effective_length[1]
    unit = 2.0 * length / speed_of_light
    rods = begin + offset
    return end_reflection(
        given,
        smoothed,
        rods + 0.5 * smoothed.width,
        rods + np.maximum(within[0] * unit, 0.75 * smoothed.width),
        rods + within[1] * unit,
    )


def _put(end: Edge, edge: Edge, rows: NDArray[np.intp], better: NDArray[np.bool_]) -> Edge:
    columns = []
    for name in Edge.__slots__:
        column = getattr(end, name).copy()
        column[rows[better]] = getattr(edge, name)[better]
        columns.append(column)
    return Edge(*columns)
