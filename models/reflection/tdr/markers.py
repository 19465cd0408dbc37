"""Where a trace first rises and where the end of the rods answers, each in two ways."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from models.reflection.tdr.probe import RISE_OVER_SPREAD
from models.reflection.tdr.record import Traces
from models.reflection.tdr.smoothing import Smoothed, kernels
from models.relation import Array, column

FIRST_SHARE = 0.15
"""Of the steepest slope of a trace, for the first reflection to count as one."""
DETECTED = 8.0
"""Times its noise, for a slope to be a reflection."""
STANDS_OUT = 0.4
"""Of its slope, by which a reflection is steeper than what is one rise before and after."""
LONGEST_HEAD = 1.5e-9
"""s, two-way, within which the rods begin after the first rise."""
FIRST_FALL = 0.6
"""Of the steepest fall within that time, for an earlier one to be where the head ends."""
HALF_ROOT_TAU = float(np.sqrt(0.5 * np.pi))


@dataclass(frozen=True, slots=True, eq=False)
class Edge:
    """A reflection of every trace, shape (traces,); times in s, NaN where there is none."""

    tangent: Array
    """Where the tangent at the steepest point meets the level before."""
    steepest: Array
    tangent_u: Array
    """Standard uncertainty from noise alone."""
    steepest_u: Array
    level: Array
    """Before the edge."""
    rise: Array
    """10 to 90 %, s, of a symmetric edge with this slope and half height."""
    signal: Array
    """Slope over its noise."""

    def or_else(self, other: "Edge", there: NDArray[np.bool_]) -> "Edge":
        """The other's rows ``there``."""
        return Edge(*(np.where(there, getattr(other, name), getattr(self, name))
                      for name in self.__slots__))  # fmt: skip


@np.errstate(all="ignore")
def first_rise(given: Traces, smoothed: Smoothed) -> Edge:
    """The first reflection, up or down: where the cable ends.

    It is the steepest point, of one sign, within one window of where the slope first exceeds
    FIRST_SHARE of the steepest slope and DETECTED times the noise.
    """
    size = np.abs(smoothed.slope)
    threshold = np.maximum(FIRST_SHARE * size.max(axis=-1), DETECTED * smoothed.slope_noise)
    over = size > threshold[:, None]
    begins = over.argmax(axis=-1)
    near = np.minimum(begins[:, None] + np.arange(smoothed.points + 1), given.points - 1)
    rows = np.arange(given.count)
    ahead = smoothed.slope[rows[:, None], near] * np.sign(smoothed.slope[rows, begins])[:, None]
    peak = begins + ahead.argmax(axis=-1)
    before = np.maximum(peak - 2 * smoothed.points, 1)
    counted = np.arange(given.points) < before[:, None]
    level = np.where(counted, given.rho, 0.0).sum(axis=-1) / before
    level_u = smoothed.noise / np.sqrt(before)
    return _edge(given, smoothed, peak, (level, level_u), over.any(axis=-1))


@np.errstate(all="ignore")
def rod_start(given: Traces, smoothed: Smoothed, start: Edge) -> Edge:
    """Where the head ends: the first steep slope soon after the first rise, of the other sign.

    NaN where none stands out from noise.
    """
    place = np.arange(given.points)
    begins = np.nan_to_num(_index(given, start.steepest))
    soon = begins + np.ceil(LONGEST_HEAD / given.step)
    inside = (place > begins[:, None]) & (place <= soon[:, None])
    rows = np.arange(given.count)
    sign = np.sign(smoothed.slope[rows, np.clip(begins, 0, given.points - 1).astype(np.intp)])
    falls = np.where(inside, -sign[:, None] * smoothed.slope, -np.inf)
    steep = falls >= FIRST_FALL * falls.max(axis=-1, keepdims=True)
    near = steep.argmax(axis=-1)[:, None] + np.arange(smoothed.points + 1)
    near = np.minimum(near, given.points - 1)
    peak = near[rows, falls[rows[:, None], near].argmax(axis=-1)]
    between = inside & (place <= peak[:, None])
    top = np.where(between, sign[:, None] * smoothed.level, -np.inf).max(axis=-1)
    found = np.isfinite(top) & (falls[rows, peak] > DETECTED * smoothed.slope_noise)
    return _edge(given, smoothed, peak, (sign * top, smoothed.level_noise), found)


@np.errstate(all="ignore")
def end_reflection(
    given: Traces, smoothed: Smoothed, rods: Array, earliest: Array, latest: Array
) -> Edge:
    """The end of the rods: the steepest rise within bounds, after the lowest level before it.

    rods: two-way time at which the rods begin, s, shape (traces,). earliest, latest: bounds of the
    steepest point.
    NaN where no rise stands out from noise and from its surroundings, where it lies at a bound, and
    where nothing is lower before it: the largest peak of noise is no reflection.
    """
    place = np.arange(given.points)
    low = np.maximum(np.nan_to_num(_index(given, earliest), nan=1.0), 1.0)
    high = np.minimum(np.nan_to_num(_index(given, latest), nan=0.0), given.points - 2)
    inside = (place >= low[:, None]) & (place <= high[:, None])
    peak = np.where(inside, smoothed.slope, -np.inf).argmax(axis=-1)
    begins = _index(given, rods)
    between = (place >= begins[:, None]) & (place <= peak[:, None])
    level = np.where(between, smoothed.level, np.inf).min(axis=-1)
    found = (peak > low) & (peak < high) & np.isfinite(level)
    edge = _edge(given, smoothed, peak, (level, smoothed.level_noise), found)
    rows = np.arange(given.count)
    beside = np.nan_to_num(np.maximum(edge.rise, smoothed.width) / given.step, nan=1.0)
    away = np.clip(beside, 1, given.points).astype(np.intp)
    before = smoothed.slope[rows, np.maximum(peak - away, 0)]
    after = smoothed.slope[rows, np.minimum(peak + away, given.points - 1)]
    top = smoothed.slope[rows, peak]
    stands = (top - np.maximum(before, after) > STANDS_OUT * top) & (edge.signal > DETECTED)
    return edge.or_else(edge_of_nothing(given.count), ~stands)


def edge_of_nothing(count: int) -> Edge:
    """No reflection in any trace."""
    nothing = np.full(count, np.nan)
    return Edge(*(nothing for _ in Edge.__slots__))


def _index(given: Traces, time: Array) -> Array:
    return np.floor((time - given.start) / given.step)


@lru_cache(maxsize=128)
def _parabola(width: int) -> tuple[NDArray[np.float64], float, float]:
    """Weights of height, slope and bend of the parabola through ``width // 2`` slopes either side.

    Also the noise of height and slope, for unit noise of a point.
    """
    half = max(width // 2, 1)
    offsets = np.arange(-half, half + 1, dtype=np.float64)
    weights = column(np.linalg.pinv(np.vander(offsets, 3, increasing=True)))
    slope = kernels(width)[1]
    return (
        weights,
        float(np.linalg.norm(np.convolve(slope, weights[0]))),
        float(np.linalg.norm(np.convolve(slope, weights[1]))),
    )


def _edge(
    given: Traces,
    smoothed: Smoothed,
    peak: NDArray[np.intp],
    before: tuple[Array, Array],
    found: NDArray[np.bool_],
) -> Edge:
    """Both times of an edge whose steepest point lies at an index, with what noise does to them.

    before: level ahead of the edge, and its standard uncertainty.

    The steepest point is the top of a parabola through the slopes around. For a Gaussian slope of
    spread w the tangent meets the level sqrt(pi / 2) w before the steepest point, where half of
    the height is reached: that gives the spread.
    """
    rows = np.arange(given.count)
    weights, height_gain, slope_gain = _parabola(smoothed.points)
    half = weights.shape[1] // 2
    window = np.clip(peak[:, None] + np.arange(-half, half + 1), 0, given.points - 1)
    top, lean, bend = weights @ smoothed.slope[rows[:, None], window].T
    shift = np.where(bend != 0, np.clip(-0.5 * lean / bend, -half, half), 0.0)
    slope = top + 0.5 * lean * shift
    at = np.clip(peak + shift, 0, given.points - 1.001)
    left = at.astype(np.intp)
    part = at - left
    reached = (1 - part) * smoothed.level[rows, left] + part * smoothed.level[rows, left + 1]
    level, level_u = before
    lead = (reached - level) / slope
    slope_noise = smoothed.noise * height_gain / given.step
    steepest_u = np.abs(0.5 * smoothed.noise * slope_gain / bend)  # s: the step cancels
    spread = np.maximum(lead / HALF_ROOT_TAU, 0.0)
    steepest = given.start + given.step * at
    lost = np.where(found, 0.0, np.nan)
    return Edge(
        tangent=steepest - lead + lost,
        steepest=column(steepest + lost),
        tangent_u=np.hypot(np.hypot(smoothed.level_noise, level_u), lead * slope_noise)
        / np.abs(slope)
        + lost,
        steepest_u=np.minimum(steepest_u, half * given.step) + lost,
        level=level + lost,
        rise=spread * RISE_OVER_SPREAD + lost,
        signal=smoothed.slope[rows, peak] / smoothed.slope_noise + lost,
    )
