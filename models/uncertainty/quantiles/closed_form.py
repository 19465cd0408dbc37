"""Coverage intervals that need neither gradient nor draws: one input, and a ratio of two.

Fieller (1954): the values r for which numerator - r denominator is not told apart from 0.
"""

from collections.abc import Callable
from dataclasses import dataclass
from enum import IntEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.relation import Array, column
from models.uncertainty.coverage import coverage_factor
from models.uncertainty.distributions import Distribution

LEAST = float(np.finfo(np.float64).smallest_subnormal)


class Reason(IntEnum):
    """Why an end is not a number."""

    NONE = 0
    UNBOUNDED_ABOVE = 1
    """The denominator may be 0: no number, however large, is above all of the interval."""
    UNBOUNDED_BELOW = 2
    UNBOUNDED = 3
    """Nothing at all is known of the ratio."""
    NOT_MONOTONE = 4
    NO_NUMBER = 5
    """There was none to begin with, or an end is outside the domain."""


@dataclass(frozen=True, slots=True)
class Ends:
    """Ends of an interval, NaN where there is none, and why; shape (n,)."""

    lower: Array
    upper: Array
    reason: NDArray[np.uint8]
    """Codes of ``Reason``."""


def ratio_interval(
    numerator: ArrayLike,
    numerator_u: ArrayLike,
    denominator: ArrayLike,
    denominator_u: ArrayLike,
    *,
    covariance: ArrayLike = 0.0,
    probability: float = 0.95,
) -> Ends:
    """Interval of numerator / denominator, both normal, elementwise; exact (Fieller 1954).

    covariance: of numerator and denominator.
    Where the denominator is within the coverage factor times its uncertainty of 0, the side on
    which the ratio runs off has no end: NaN and the reason, never a large number.
    """
    n, d = column(numerator), column(denominator)
    square = coverage_factor(probability) ** 2
    a = np.square(d) - square * np.square(column(denominator_u))
    bounded = a > 0
    a = np.where(a == 0, -LEAST, a)  # the far root has just gone round to the other side
    b = n * d - square * column(covariance)
    c = np.square(n) - square * np.square(column(numerator_u))
    with np.errstate(all="ignore"):
        ratio = n / d
        root = np.sqrt(np.square(b) - a * c)
        # q / a and c / q are the two roots, neither of them a difference of near equals
        q = b + np.copysign(root, b)
        one, other = q / a, np.where(q == 0, 0.0, c / q)
        low, high = np.minimum(one, other), np.maximum(one, other)
    above = ~bounded & (ratio >= high) & (d != 0)
    below = ~bounded & (ratio <= low) & (d != 0)
    reason = np.select(
        [np.isnan(ratio), bounded, above, below],
        [Reason.NO_NUMBER, Reason.NONE, Reason.UNBOUNDED_ABOVE, Reason.UNBOUNDED_BELOW],
        Reason.UNBOUNDED,
    ).astype(np.uint8)
    return Ends(
        np.where(bounded, low, np.where(above, high, np.nan)),
        np.where(bounded, high, np.where(below, low, np.nan)),
        reason,
    )


def monotone_interval(
    function: Callable[[Array], Array], given: Distribution, *, probability: float = 0.95
) -> Ends:
    """Interval of a monotone function of one input: the function at the input's own ends; exact.

    function: elementwise, rising or falling. It is tried at five points across the interval; a row
    in which they are not in order is no such function and has no ends.
    """
    z = coverage_factor(probability)
    with np.errstate(all="ignore"):
        tried = [function(given.from_normal(share * z)) for share in (-1.0, -0.5, 0.0, 0.5, 1.0)]
    found = np.stack(np.broadcast_arrays(*map(np.atleast_1d, tried)))
    steps = np.diff(found, axis=0)
    known = np.isfinite(found).all(axis=0)
    ordered = known & ((steps >= 0).all(axis=0) | (steps <= 0).all(axis=0))
    reason = np.where(ordered, Reason.NONE, np.where(known, Reason.NOT_MONOTONE, Reason.NO_NUMBER))
    return Ends(
        np.where(ordered, np.minimum(found[0], found[-1]), np.nan),
        np.where(ordered, np.maximum(found[0], found[-1]), np.nan),
        reason.astype(np.uint8),
    )
