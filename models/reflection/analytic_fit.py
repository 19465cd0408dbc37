"""Least squares for one complex unknown: what a permittivity is, where several readings tell it."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from models.relation import Array, ComplexArray

Model = Callable[[ComplexArray], tuple[ComplexArray, ComplexArray]]
"""k predictions, shape (k, f), and their derivatives, from the unknown, shape (f,)."""
MOST = 60
CLOSE = 1e-14


@dataclass(frozen=True, slots=True)
class Found:
    """The unknown at every frequency, shape (f,)."""

    value: ComplexArray
    spread: Array
    """Standard uncertainty of each part, for the spread of the readings as given."""
    residual: ComplexArray
    """Read minus predicted, shape (k, f)."""
    response: ComplexArray
    """Derivative of the unknown by each reading, shape (k, f)."""


@np.errstate(all="ignore")
def solve(model: Model, start: ComplexArray, read: ComplexArray, spread: Array) -> Found:
    """Weighted Gauss-Newton steps, elementwise over frequencies, none of them uphill.

    start: shape (f,). read, spread: shape (k, f); spread: standard uncertainty of each part.

    Predictions are analytic in the unknown, so that one complex derivative does the work of four
    real ones, and equal noise in both parts of the readings is equal noise in both of the answer.
    """
    value, weight = start + 0j, 1 / np.square(spread)
    predicted, slope = model(value)
    cost = _cost(read - predicted, weight)
    damping = np.full(value.shape, 1e-3)
    for _ in range(MOST):
        pull = (np.conj(slope) * (read - predicted) * weight).sum(axis=0)
        hold = (np.square(np.abs(slope)) * weight).sum(axis=0)
        step = pull / (hold * (1 + damping))
        size = np.maximum(np.abs(step), 1e-300)
        step = step * np.minimum(1.0, 0.5 * np.abs(value) / size)
        there, slope_there = model(value + step)
        new = _cost(read - there, weight)
        better = new < cost
        value = np.where(better, value + step, value)
        predicted, slope = np.where(better, there, predicted), np.where(better, slope_there, slope)
        cost = np.where(better, new, cost)
        damping = np.where(better, damping * 0.1, damping * 10 + 1e-12)
        done = (np.abs(step) <= CLOSE * np.abs(value)) | (damping > 1e12) | ~np.isfinite(cost)
        if done.all():
            break
    hold = (np.square(np.abs(slope)) * weight).sum(axis=0)
    response = np.conj(slope) * weight / hold
    finite = np.isfinite(cost)
    return Found(np.where(finite, value, np.nan), 1 / np.sqrt(hold), read - predicted, response)


def _cost(residual: ComplexArray, weight: Array) -> Array:
    cost: Array = (np.square(np.abs(residual)) * weight).sum(axis=0)
    return cost
