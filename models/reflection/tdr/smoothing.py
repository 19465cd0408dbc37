"""Smoothing and slope of traces, over a window that follows the steepest rise they show."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import correlate1d

from models.reflection.tdr.record import Traces
from models.relation import Array

NARROWEST = 5
"""Points; fewer do not make a parabola and a check on it."""
SHARPER = 1.12
"""A window of half the width that shows a slope steeper by this was too wide."""
WIDEST_SHARE = 1 / 24
"""Of a trace, for the widest window that is tried."""
LEAST = 1e-6
"""Noise of a point that no record is below: they are rounded to five or six decimals."""
ROUNDING = 1e-9
"""Difference of two points that arithmetic makes."""
NORMAL = 0.67448975
"""Median of the absolute value of a standard normal number."""


@dataclass(frozen=True, slots=True, eq=False)
class Smoothed:
    """Local parabolas through traces of one window; shapes (traces, points) and (traces,)."""

    level: Array
    slope: Array
    """1/s"""
    noise: Array
    """Standard uncertainty of one point as it came."""
    level_noise: Array
    slope_noise: Array
    points: int
    """Of the window."""
    width: float
    """s, of the window"""


@lru_cache(maxsize=128)
def kernels(width: int) -> tuple[Array, Array, float, float, float]:
    """Weights for level and slope of the local cubic through ``width`` points (odd).

    Also what they make of noise, and the factor on the noise of what they leave. Savitzky and
    Golay (1964); computed here by least squares. The narrowest window is exact to fourth order.
    """
    half = width // 2
    order = 4 if width == NARROWEST else 3
    basis = np.vander(np.arange(-half, half + 1) / half, order + 1, increasing=True)
    inverse = np.linalg.pinv(basis)
    level, slope = inverse[0], inverse[1] / half
    left = float(np.sqrt(max(1.0 - level[half], 1e-12)))
    return level, slope, float(np.linalg.norm(level)), float(np.linalg.norm(slope)), left


def ladder(points: int) -> tuple[int, ...]:
    """Widths that are tried, from narrow to wide, in points."""
    widths, width = [NARROWEST], NARROWEST
    while 2 * width - 1 <= max(points * WIDEST_SHARE, NARROWEST):
        width = 2 * width - 1
        widths.append(width)
    return tuple(widths)


def following_widths(given: Traces) -> NDArray[np.intp]:
    """For each trace the widest window that still shows its steepest slope, in points.

    From wide to narrow: once half the width no longer shows a slope steeper than noise and SHARPER
    explain, the wider one follows the rise.
    """
    widths = ladder(given.points)
    noise = noise_of(given)
    chosen = np.full(given.count, widths[0], dtype=np.intp)
    wider: Array | None = None
    settled = np.zeros(given.count, dtype=np.bool_)
    for place in range(len(widths) - 1, -1, -1):
        _, weights, _, gain, _ = kernels(widths[place])
        steepest = np.abs(correlate1d(given.rho, weights, axis=-1, mode="nearest")).max(axis=-1)
        if wider is not None:
            enough = steepest <= SHARPER * wider + 3.0 * gain * noise
            chosen[enough & ~settled] = widths[place + 1]
            settled |= enough
            if settled.all():
                break
        wider = steepest
    return chosen


def noise_of(given: Traces) -> Array:
    """Standard uncertainty of one point: as stated, else from what a narrow parabola leaves.

    It is no less than that of the steps in which a trace was written down.
    """
    stated = given.stated_noise
    if not np.isnan(stated).any():
        return stated
    half = 3
    level, _, _, _, left = kernels(2 * half + 1)
    rest = np.abs(given.rho - correlate1d(given.rho, level, axis=-1, mode="nearest"))
    found = np.median(rest[:, half:-half], axis=-1) / (NORMAL * left)
    return np.where(np.isnan(stated), np.maximum(np.maximum(found, LEAST), step_u(given)), stated)


def step_u(given: Traces) -> Array:
    """Standard uncertainty of a point from the steps in which a trace was written down.

    Of the smallest difference between neighbouring points that is none of rounding; 0: none differ.
    """
    apart = np.abs(np.diff(given.rho, axis=-1))
    least = np.where(apart > ROUNDING, apart, np.inf).min(axis=-1)
    return np.where(np.isfinite(least), least, 0.0) / np.sqrt(12.0)


def still_u(given: Traces) -> Array:
    """What means over many points keep of the steps: all where noise does not cross them."""
    steps = step_u(given)
    return np.where(noise_of(given) <= (1.0 + ROUNDING) * steps, steps, 0.0)


def smooth(given: Traces, width: int) -> Smoothed:
    """Level and slope of every trace over one window, in points (odd)."""
    level, slope, level_gain, slope_gain, _ = kernels(width)
    noise = noise_of(given)
    return Smoothed(
        level=correlate1d(given.rho, level, axis=-1, mode="nearest"),
        slope=correlate1d(given.rho, slope, axis=-1, mode="nearest") / given.step,
        noise=noise,
        level_noise=noise * level_gain,
        slope_noise=noise * slope_gain / given.step,
        points=width,
        width=width * given.step,
    )
