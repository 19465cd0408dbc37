"""Newton's method for increasing functions, elementwise, kept inside a bracket."""

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from models.relation import Array

Rows = NDArray[np.intp]
"""Places in the columns that are solved for."""

MOST = 200
"""Steps; a handful where the slope is not zero at the root."""
CLOSE = 1e-9
"""A Newton step this small, relative, leaves an error of the order of its square."""
LAST_DIGITS = 4.0 * np.finfo(np.float64).eps


@np.errstate(all="ignore")
def increasing_root(
    step: Callable[[Array, Rows], tuple[Array, Array]], low: Array, high: Array
) -> Array:
    """Where an increasing function crosses zero between ``low`` and ``high``.

    step: value and slope of the function at a column of points, for the rows they belong to.
    low, high: shape (n,); the function is below zero at the one and not below it at the other, and
        the search starts at ``high``.
    NaN where a bound or the function is NaN, and where MOST steps do not find it.

    A Newton step that leaves the bracket is replaced by halving it, so that it converges whatever
    the curvature. A row is done once another step would change nothing but its last digits, and
    is left alone from then on: its answer does not depend on its neighbours.
    """
    found = np.full(low.shape, np.nan)
    rows = np.flatnonzero(np.isfinite(low) & np.isfinite(high))
    left, right = low[rows], high[rows]
    here, least = right.copy(), LAST_DIGITS * (right - left)
    for _ in range(MOST):
        value, slope = step(here, rows)
        below = value < 0
        left, right = np.where(below, here, left), np.where(below, right, here)
        newton = here - value / slope
        inside = (newton > left) & (newton < right)
        there = np.where(inside, newton, 0.5 * (left + right))
        near = np.where(inside, CLOSE, LAST_DIGITS)
        done = (np.abs(there - here) <= near * np.abs(here) + least) | (value == 0)
        found[rows[done]] = np.where(value == 0, here, there)[done]
        still = ~done & ~np.isnan(value)
        if not still.any():
            break
        rows, here, least = rows[still], there[still], least[still]
        left, right = left[still], right[still]
    return found
