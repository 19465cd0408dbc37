"""The time each reading stands for in each bin, by straight lines between neighbours."""

import numpy as np

from models.relation import Array, column
from models.uncertainty.aggregation import Labels


def time_weights(seconds: Array, edges: Array, gap: float) -> tuple[Labels, Labels, Array]:
    """Weights of the time-weighted mean: places of rows, bins, and s; each pair at most once.

    seconds: shape (n,), in time order; edges: shape (m + 1,), rising; gap: s, how far apart
    neighbours may be and still be joined.

    The integral of a line over a part of it is linear in its two ends, so every mean is a weighted
    sum of readings, and its uncertainty follows like that of any other.
    """
    apart = np.diff(seconds)
    left = np.flatnonzero((apart > 0) & (apart <= gap))
    first = np.maximum(np.searchsorted(edges, seconds[left], side="right") - 1, 0)
    last = np.minimum(np.searchsorted(edges, seconds[left + 1], side="left") - 1, edges.size - 2)
    parts = np.maximum(last - first + 1, 0)
    left, first = np.repeat(left, parts), np.repeat(first, parts)
    bins = first + np.arange(left.size) - np.repeat(np.cumsum(parts) - parts, parts)
    begin = np.maximum(seconds[left], edges[bins])
    end = np.minimum(seconds[left + 1], edges[bins + 1])
    length = end - begin
    nearness = ((begin - seconds[left]) + (end - seconds[left])) / (2.0 * apart[left])
    ending = length * nearness
    rows = np.stack([left, left + 1], axis=1).ravel()
    bins = np.repeat(bins, 2)
    weights = np.stack([length - ending, ending], axis=1).ravel()
    return _merged(rows, bins, weights)


def _merged(rows: Labels, bins: Labels, weights: Array) -> tuple[Labels, Labels, Array]:
    """Adds up the two parts of a reading that ends one line and begins the next.

    They stand side by side: only a line that leaves the bin could come between.
    """
    anew = np.append(True, (np.diff(rows) != 0) | (np.diff(bins) != 0))[: rows.size]
    whole = np.bincount(np.cumsum(anew) - 1, weights, minlength=int(anew.sum()))
    return rows[anew], bins[anew], column(whole)
