"""Sweeps that were taken again: their mean, and what their scatter says about it."""

from dataclasses import dataclass

import numpy as np

from models.relation import Array, ComplexArray

WINDOW = 11
"""Frequencies over which the scatter is averaged: it changes slowly, its estimate does not."""


@dataclass(frozen=True, slots=True)
class Repeated:
    """The mean of r sweeps, shape (f,)."""

    mean: ComplexArray
    spread: Array | None
    """Standard uncertainty of each part of the mean; None: one sweep says nothing about it."""
    degrees_of_freedom: float
    scatter: float
    """Median standard deviation of each part of one sweep; NaN for a single one."""


def repeated(sweeps: ComplexArray) -> Repeated:
    """Mean of sweeps, shape (r, f), and its uncertainty from their scatter.

    Where neighbouring frequencies err together, as they do when a tip is set down anew, the
    average over them adds no degrees of freedom; where they err apart, it does.
    """
    count, points = sweeps.shape
    mean = sweeps.mean(axis=0)
    if count < 2:
        return Repeated(mean, None, np.inf, float("nan"))
    away = sweeps - mean
    variance = np.square(np.abs(away)).sum(axis=0) / (2 * (count - 1))
    width = min(WINDOW, points)
    box = np.ones(width)
    smooth = np.convolve(variance, box, "same") / np.convolve(np.ones(points), box, "same")
    independent = 1.0
    total = float(np.square(np.abs(away)).sum())
    if points > 2 and total > 0:
        product = np.real(np.conj(away[:, :-1]) * away[:, 1:]).sum()
        likeness = min(max(float(product) / total, 0.0), 1.0)
        independent = max(width * (1 - likeness) / (1 + likeness), 1.0)
    return Repeated(
        mean,
        np.sqrt(smooth / count),
        2 * (count - 1) * independent,
        float(np.sqrt(np.median(smooth))),
    )
