"""Ends of the interval of a measurand that is nearly a sum of curves of its inputs.

The steps of one standard uncertainty that first order takes anyway give each input a curve
(``curves.py``); one intermediate quantity, which many inputs move, has a curve of its own. On their
sum the ends are closed forms (``sums.py``, ``through.py``). The measurand itself is then taken at
the two points found, so that only the way to them is approximate; how far both are apart says
whether the sum is good enough.

A curve that ends leaves some of its input's probability beyond, once the measurand itself was seen
to end there. Where more of it runs off upwards, or downwards, than the interval leaves out on that
side, there is no end: infinity.
"""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

from models.relation import Array
from models.uncertainty.coverage import coverage_factor
from models.uncertainty.quantiles.curves import Steps
from models.uncertainty.quantiles.intermediate import Intermediate
from models.uncertainty.quantiles.sums import Measurand, Sum
from models.uncertainty.quantiles.through import SumThrough

APART = 0.2
"""In half-widths, of measurand and sum of curves at an end: beyond, the row is not settled."""

TURNED = 0.15
"""In half-widths, of the curvature across the way: it is a second order, and of more than that
nothing is known. Such an end is better without."""

MOST_LEFT_OUT = 0.1
"""Probability beyond the ends of curves, from which the other end feels it as well."""


@dataclass(frozen=True, slots=True)
class Ends:
    """Ends of the interval, shape (n,); infinite where there is none, NaN where not settled."""

    lower: Array
    upper: Array
    settled: NDArray[np.bool_]


@np.errstate(all="ignore")
def ends(
    measurand: Measurand,
    value: Array,
    direct: Mapping[str, Steps],
    through: Intermediate | None = None,
    *,
    straight: Array | float = 0.0,
    probability: float,
    within: float = APART,
) -> Ends:
    """Interval that leaves the same probability on both sides of a measurand.

    measurand: elementwise, at a point. value: shape (n,), where nothing is moved.
    direct: steps of inputs that work not only through the intermediate; None: there is none.
        Inputs are independent and standard-normal.
    straight: standard uncertainty of all together that adds to the measurand and is not part of it.
    within: of measurand and sum of curves at an end, in half-widths, for a row to be settled.
    """
    own = np.broadcast_to(straight, value.shape)
    sums: Sum | SumThrough
    if through is None:
        sums = Sum.of(value, direct, own)
    else:
        sums = SumThrough.of(value, direct, own, through)
    low, high = sums.left_out(measurand)
    z = coverage_factor(probability)
    tail = float(ndtr(-z))
    below, above = sums.end(-z), sums.end(z)
    at_lower = measurand(below.point) + below.straight
    at_upper = measurand(above.point) + above.straight
    # What the inputs do together shows along the way; half of its square is missing across it.
    off_below, off_above = at_lower - below.value, at_upper - above.value
    both, one = 0.5 * (at_upper - at_lower), np.fmax(value - at_lower, at_upper - value)
    way = TURNED * np.where(np.isfinite(both), both, one)
    lower = at_lower + _damped(below.curvature, way) - off_below / z**2
    upper = at_upper + _damped(above.curvature, way) - off_above / z**2
    unbounded = low > tail, high > tail
    lower, upper = np.where(unbounded[0], -np.inf, lower), np.where(unbounded[1], np.inf, upper)
    off = _larger(off_below, off_above, unbounded)
    half = np.minimum(0.5 * (upper - lower), np.maximum(value - lower, upper - value))
    half = np.where(np.isinf(half), np.minimum(value - lower, upper - value), half)
    settled = sums.sound & (off <= within * half)
    settled &= (lower <= value) & (value <= upper) & (np.maximum(low, high) <= MOST_LEFT_OUT)
    return Ends(np.where(settled, lower, np.nan), np.where(settled, upper, np.nan), settled)


def _damped(curvature: Array, way: Array) -> Array:
    """The same where it is little beside the way, next to nothing where it is more."""
    return curvature / (1.0 + np.square(np.square(curvature / way)))


def _larger(
    below: Array, above: Array, unbounded: tuple[NDArray[np.bool_], NDArray[np.bool_]]
) -> Array:
    """The larger size of both, of ends that there are."""
    parts = (
        np.where(none, 0.0, np.abs(each))
        for each, none in zip((below, above), unbounded, strict=True)
    )
    return np.maximum(*parts)
