"""Shortest coverage interval of a quantity that is known to lie in a range.

What is known of the quantity is a two-piece normal distribution (one scale below its peak, one
above) restricted to the range. The interval is the shortest that holds the coverage probability
(JCGM 101, 5.3.4), so it lies in the range by construction, always holds the most probable value,
may end exactly at an end of the range, and far from both ends is value -+ k u.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import ndtr, ndtri

from models.relation import Array, column

FAR = 3.5
"""Scales from an end beyond which it takes so little of the probability, 2.3e-4, that the interval
moves by 0.1 per cent of its half-width."""
ASTRAY = 6.0
"""Scales outside the range beyond which all that is left is its end."""


@dataclass(frozen=True, slots=True)
class Interval:
    """Ends of the interval and the most probable value, one per row."""

    lower: Array
    upper: Array
    peak: Array


def coverage_factor(probability: float) -> float:
    """Half-width in standard uncertainties of a normal distribution: 1.96 for 0.95."""
    return float(ndtri(0.5 * (1.0 + probability)))


def shortest_interval(
    value: Array,
    scale_below: Array,
    scale_above: Array,
    *,
    low: ArrayLike,
    high: ArrayLike,
    probability: float,
) -> Interval:
    """Shortest interval of a two-piece normal restricted to ``low`` to ``high``.

    value: shape (n,), peak of the unrestricted distribution, may lie outside the range.
    scale_below, scale_above: shape (n,), > 0 (0: the value is exact on that side).
    low, high: scalar or shape (n,).

    Densities of a two-piece normal are equal at equal distance from the peak in scales, so the
    shortest interval of the unrestricted one is (value - h below, value + h above); where an end
    of the range cuts it off, the interval starts there and the other end takes up the rest.
    """
    low, high = column(low), column(high)
    h = coverage_factor(probability)
    lower, upper = value - h * scale_below, value + h * scale_above
    peak = value.copy()
    near = np.flatnonzero((value - FAR * scale_below < low) | (value + FAR * scale_above > high))
    if near.size:
        bottom, top = _of_rows(low, near), _of_rows(high, near)
        peak[near] = np.clip(value[near], bottom, top)
        lower[near], upper[near] = _restricted(
            value[near], scale_below[near], scale_above[near], bottom, top, probability
        )
    return Interval(lower, upper, peak)


def _restricted(
    value: Array, below: Array, above: Array, low: Array, high: Array, probability: float
) -> tuple[Array, Array]:
    """Ends for rows that an end of the range touches; exact and astray rows keep one point."""
    held = np.clip(value, low, high)
    point = (low - value > ASTRAY * above) | (value - high > ASTRAY * below) | (below + above <= 0)
    below, above = np.where(below > 0, below, 1e-12), np.where(above > 0, above, 1e-12)
    mass_low, mass_high = np.zeros_like(value), np.ones_like(value)
    for mass, end, near in (
        (mass_low, low, value - FAR * below < low),
        (mass_high, high, value + FAR * above > high),
    ):
        rows = np.flatnonzero(near)
        mass[rows] = _mass(_of_rows(end, rows), value[rows], below[rows], above[rows])
    kept = probability * (mass_high - mass_low)
    h = ndtri(0.5 * (1.0 + kept))
    lower, upper = value - h * below, value + h * above
    cut = np.flatnonzero(lower < low)
    also = np.flatnonzero((upper > high) & (lower >= low))
    lower[cut], upper[also] = _of_rows(low, cut), _of_rows(high, also)
    rest = _point(mass_low[cut] + kept[cut], value[cut], below[cut], above[cut])
    upper[cut] = np.minimum(rest, _of_rows(high, cut))
    lower[also] = _point(mass_high[also] - kept[also], value[also], below[also], above[also])
    lower = np.minimum(np.maximum(lower, low), held)  # to the last digit
    upper = np.maximum(np.minimum(upper, high), held)
    return np.where(point, held, lower), np.where(point, held, upper)


@np.errstate(all="ignore")
def two_piece(z: ArrayLike, below: ArrayLike, above: ArrayLike) -> Array:
    """Where such a quantity with its peak at 0 is as likely exceeded as z by a standard normal one.

    z, below, above: elementwise; scales >= 0. The density has no step at the peak, so that the
    wider side holds the more of the probability.
    """
    score, down, up = column(z), column(below), column(above)
    share = np.where(down + up > 0, down / (down + up), 0.5)
    under = ndtr(score) < share
    low = ndtri(ndtr(score) / (2.0 * share)) * down
    high = -ndtri(ndtr(-score) / (2.0 * (1.0 - share))) * up
    found = np.where(under, low, np.where(up > 0, high, 0.0))
    return np.where(down == up, score * up, found)


def _of_rows(ends: Array, rows: NDArray[np.intp]) -> Array:
    """One end for all rows, or each row's own."""
    return ends[rows] if ends.ndim else ends


def _mass(point: Array, value: Array, below: Array, above: Array) -> Array:
    """Distribution function of the two-piece normal."""
    share = below / (below + above)
    z = (point - value) / np.where(point < value, below, above)
    normal = ndtr(z)
    return np.where(z < 0, 2.0 * share * normal, share + (1.0 - share) * (2.0 * normal - 1.0))


def _point(mass: Array, value: Array, below: Array, above: Array) -> Array:
    """Inverse of ``_mass``."""
    share = below / (below + above)
    under = mass < share
    tail = np.where(under, mass / (2.0 * share), 0.5 * (1.0 + (mass - share) / (1.0 - share)))
    return value + ndtri(tail) * np.where(under, below, above)
