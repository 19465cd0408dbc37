"""Means over time and sums over depth: what averages out, and what all readings share.

The part of an uncertainty that readings do not share is independent from one to the next and
shrinks in a mean; the shared part (calibration, model, properties of the site) does not shrink,
and in a sum it adds up in full.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.errors import Complaint, ParameterError
from models.relation import Array, column

Labels = NDArray[np.intp]


@dataclass(frozen=True, slots=True)
class Aggregate:
    """One row per group, shape (g,)."""

    value: Array
    standard_uncertainty: Array
    shared: Array
    """The part of it that is shared, so that aggregates can be aggregated again."""
    count: Labels
    """How many estimates went in."""


def weighted_sum(
    value: ArrayLike,
    standard_uncertainty: ArrayLike,
    shared: ArrayLike,
    *,
    weights: ArrayLike = 1.0,
    groups: ArrayLike | None = None,
    sources: ArrayLike | None = None,
) -> Aggregate:
    """Sum of weight x estimate in each group: a profile's water, layer by layer.

    value: shape (n,); one that is no number leaves its whole group without a number.
    standard_uncertainty: both parts together; shared: that part of it. Scalars or shape (n,).
    groups: shape (n,), 0, 1, 2, ...; None: all are one group.
    sources: shape (n,), who shares an error with whom, 0, 1, 2, ...; None: all do, which is the
        cautious answer where one calibration or one model served for all.
    Raises ParameterError when a shared part exceeds the whole, or labels do not fit.
    """
    known = column(value)
    weight = np.broadcast_to(column(weights), known.shape)
    return _summed(known, (standard_uncertainty, shared), weight, groups, sources)


def weighted_mean(
    value: ArrayLike,
    standard_uncertainty: ArrayLike,
    shared: ArrayLike,
    *,
    weights: ArrayLike = 1.0,
    groups: ArrayLike | None = None,
    sources: ArrayLike | None = None,
) -> Aggregate:
    """Mean of the estimates in each group that are numbers: a day's readings.

    weights: for instance the time each reading stands for; positive. Else as ``weighted_sum``.
    NaN for a group without any number; ``count`` says how many there were.
    """
    known = column(value)
    present = np.isfinite(known)
    weight = np.where(present, column(weights), 0.0)
    labels = _labels(groups, known.shape)
    whole = np.bincount(labels, weight)
    with np.errstate(invalid="ignore", divide="ignore"):
        weight = np.where(present, weight / whole[labels], 0.0)
    u, common = (np.where(present, column(part), 0.0) for part in (standard_uncertainty, shared))
    found = _summed(np.where(present, known, 0.0), (u, common), weight, labels, sources)
    empty = whole == 0
    return Aggregate(
        np.where(empty, np.nan, found.value),
        np.where(empty, np.nan, found.standard_uncertainty),
        np.where(empty, np.nan, found.shared),
        np.bincount(labels, present).astype(np.intp),
    )


def mean_band(
    ends: tuple[ArrayLike, ArrayLike],
    value: ArrayLike,
    standard_uncertainty: ArrayLike,
    shared: ArrayLike,
    *,
    weights: ArrayLike = 1.0,
    groups: ArrayLike | None = None,
    sources: ArrayLike | None = None,
) -> tuple[Array, Array]:
    """Lower and upper end of the mean of the estimates in each group, from the ends of theirs.

    ends: lower and upper, shape (n,), around each value; NaN: there is none, and the mean of its
        group has none on that side. Else as ``weighted_mean``.

    The arm from the value to an end is divided as the uncertainty is: its shared part stays, the
    other shrinks, each side for itself. So the mean of one has the band of that one, and no end
    lies beyond the outermost of its readings' (Minkowski's inequality; rounding is cut off).
    """
    known = column(value)
    present = np.isfinite(known)
    whole, common = (
        np.broadcast_to(column(p), known.shape) for p in (standard_uncertainty, shared)
    )
    labels = _labels(groups, known.shape)
    share = np.divide(common, whole, out=np.ones(known.shape), where=whole > 0)
    number = int(labels.max(initial=-1)) + 1
    found = []
    for side, outermost in enumerate((np.fmin, np.fmax)):
        end = np.broadcast_to(column(ends[side]), known.shape)
        arm = np.maximum(end - known if side else known - end, 0.0)
        mean = weighted_mean(
            known, arm, share * arm, weights=weights, groups=labels, sources=sources
        )
        limit = np.full(number, np.inf if side == 0 else -np.inf)
        outermost.at(limit, labels[present], end[present])
        sign = 1.0 if side else -1.0
        inner = np.minimum if side else np.maximum
        found.append(inner(mean.value + sign * mean.standard_uncertainty, limit))
    return found[0], found[1]


def _summed(
    value: Array,
    uncertainty: tuple[ArrayLike, ArrayLike],
    weight: Array,
    groups: ArrayLike | None,
    sources: ArrayLike | None,
) -> Aggregate:
    whole, shared = (np.broadcast_to(column(part), value.shape) for part in uncertainty)
    own = np.square(whole) - np.square(shared)
    if np.any((shared < 0) | (own < -1e-9 * np.square(whole))):
        detail = "shared must be between 0 and standard_uncertainty, of which it is a part"
        raise ParameterError("uncertainty", [Complaint("shared", detail)])
    labels, source = _labels(groups, value.shape), _labels(sources, value.shape)
    number = labels.max(initial=-1) + 1
    if source.size and np.ptp(source) == 0:
        common = np.square(np.bincount(labels, weight * shared, minlength=number))
    else:
        several = source.max(initial=0) + 1
        pairs, pair = np.unique(labels * several + source, return_inverse=True)
        of_pair = np.square(np.bincount(pair, weight * shared))
        common = np.bincount(pairs // several, of_pair, minlength=number)
    alone = np.bincount(labels, np.square(weight) * np.maximum(own, 0.0), minlength=number)
    return Aggregate(
        column(np.bincount(labels, weight * value, minlength=number)),
        np.sqrt(common + alone),
        np.sqrt(common),
        np.bincount(labels, minlength=number),
    )


def _labels(given: ArrayLike | None, shape: tuple[int, ...]) -> Labels:
    if given is None:
        return np.zeros(shape, dtype=np.intp)
    labels = np.asarray(given)
    if labels.shape != shape or labels.dtype.kind not in "iu" or labels.min(initial=0) < 0:
        detail = "labels must be whole numbers from 0, one per estimate"
        raise ParameterError("uncertainty", [Complaint("groups", detail)])
    return labels.astype(np.intp)
