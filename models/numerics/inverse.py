"""Turn an increasing function round, elementwise and without derivatives."""

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.relation import Array, column

EPSILON = float(np.finfo(np.float64).eps)
ROUNDING = 4 * EPSILON  # an end missed by no more than this is reached
STEPS = 200  # far more than any bracket needs; rows stop one by one, mostly after 5 to 12


@np.errstate(all="ignore")
def increasing_inverse(
    function: Callable[[Array], Array], values: ArrayLike, low: ArrayLike, high: ArrayLike
) -> Array:
    """Where in [low, high] the function takes the value, to double precision.

    function: increasing over [low, high], elementwise; it is called with arrays of the common
        shape of values, low, high and whatever arrays it holds itself.
    values: elementwise; NaN where the value is not finite, or an end is NaN.
    low, high: ends of the search, scalar or one per row.
    Returns NaN where the value is below ``function(low)`` or above ``function(high)``.

    Chandrupatla (1997): inverse quadratic steps where they are safe, halving where not. A row
    stops for good once its own bracket is closed, so its answer does not depend on its company.
    """
    target = column(values)
    shape = np.broadcast_shapes(target.shape, np.shape(low), np.shape(high))
    left, right = np.full(shape, low, np.float64), np.full(shape, high, np.float64)
    under, over = function(left) - target, function(right) - target
    rounding = ROUNDING * np.abs(target)
    under = np.where((under > 0) & (under <= rounding), 0.0, under)
    over = np.where((over < 0) & (over >= -rounding), 0.0, over)
    target, left, right, under, over = np.broadcast_arrays(target, left, right, under, over)
    reachable = (under <= 0) & (over >= 0) & (left <= right) & np.isfinite(target)
    floor = EPSILON**2 * np.maximum(np.abs(left), np.abs(right))
    near, far, last = (left, under), (right, over), (right, over)
    answer, finished = np.full(target.shape, np.nan), ~reachable
    for _ in range(STEPS):
        best = np.where(np.abs(near[1]) < np.abs(far[1]), near[0], far[0])
        width = np.abs(far[0] - near[0])
        closest = EPSILON * np.abs(best) + floor
        closed = (width <= 2 * closest) | (near[1] == 0) | (far[1] == 0)
        answer = np.where(closed & ~finished, best, answer)
        finished = finished | closed
        if finished.all():
            break
        share = np.clip(_step(near, far, last), closest / width, 1 - closest / width)
        x = near[0] + share * (far[0] - near[0])
        newest = (x, function(x) - target)
        near, far, last = _narrowed(newest, near, far)
    return answer


Point = tuple[Array, Array]
"""Abscissae, and how far the function is above the value there."""


def _step(near: Point, far: Point, last: Point) -> Array:
    """Where to look next, as a share of the way from ``near`` to ``far``."""
    (a, fa), (b, fb), (c, fc) = near, far, last
    xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
    safe = (phi**2 < xi) & ((1 - phi) ** 2 < 1 - xi)
    quadratic = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (
        fc - fb
    )
    return np.where(safe, quadratic, 0.5)


def _narrowed(newest: Point, near: Point, far: Point) -> tuple[Point, Point, Point]:
    """The bracket with the newest point as one end, and the point that fell out of it."""
    same: NDArray[np.bool_] = (newest[1] > 0) == (near[1] > 0)
    last = np.where(same, near[0], far[0]), np.where(same, near[1], far[1])
    far = np.where(same, far[0], near[0]), np.where(same, far[1], near[1])
    return newest, far, last
