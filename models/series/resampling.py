"""Bins over time: how many, how much of it, mean with its band, extremes, last."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from models.errors import Complaint, ParameterError
from models.flags import Flags
from models.relation import Array, column
from models.series.bounds import Bounds
from models.series.rules import MEAN_RULES
from models.series.series import Series
from models.series.time_weights import time_weights
from models.uncertainty.aggregation import Labels, mean_band, weighted_mean


@dataclass(frozen=True, slots=True)
class Mean:
    """Means by one rule, one row per bin, NaN where the rule gives none."""

    value: Array
    standard_uncertainty: Array
    shared: Array
    """The part of it that does not shrink, however many readings there are."""
    lower: Array
    upper: Array


@dataclass(frozen=True, slots=True)
class Bins:
    """One row per bin, in time order; a bin holds its start and not its end."""

    start: Array
    end: Array
    row_count: Labels
    """Rows, with a number or without."""
    count: Labels
    """Rows with a number."""
    flagged_count: Labels
    """Rows with a flag, with a number or without."""
    flags: Flags
    """Every bit that one of its rows carries."""
    coverage_fraction: Array
    """By ``COVERAGE_RULE``; 0 in a bin without a number."""
    means: Mapping[str, Mean]
    """By key of ``MEAN_RULES``."""
    minimum: Array
    maximum: Array
    last: Array
    last_seconds: Array


def resample(
    rows: Series,
    edges: ArrayLike,
    *,
    step: float,
    gap: float,
    rules: Sequence[str] = tuple(MEAN_RULES),
    bounds: Bounds = Bounds(),  # noqa: B008 - frozen
) -> Bins:
    """Counts, coverage, means with bands, extremes and last value of each bin.

    edges: shape (m + 1,), s since the epoch, rising: bin i is from edge i to just before edge
        i + 1. Bins may differ in length, as days do.
    step: s, how far apart readings are expected. gap: s, how far apart neighbouring readings may be
        and still be joined by a line (``time-weighted``).
    bounds: what is physically possible, in the unit of the values, and the probability of bands,
        for rows that state no ends of their own.

    A time-weighted mean takes in lines from readings just outside: give rows from ``gap`` before
    the first edge to ``gap`` after the last, so that a bin does not depend on what was asked
    beside it. The uncertainty of a mean keeps what its readings share; it does not hold what
    happened between them. The band of a mean of one is that reading's own.
    Raises ParameterError when edges do not rise, or step or gap is not positive; UnknownName for
    a rule that is none.
    """
    limits = _edges(edges)
    _positive(step=step, gap=gap)
    bins = limits.size - 1
    numbers = rows.numbers()
    inside, of_row, rows_in = _binned(rows, limits)
    within, of_number, count = _binned(numbers, limits)
    filled, first = np.flatnonzero(count), _firsts(count)
    last = first + count[filled] - 1
    marked = np.zeros(bins, dtype=np.uint64)
    if inside.seconds.size:
        marked[rows_in > 0] = np.bitwise_or.reduceat(inside.flags, _firsts(rows_in))

    def spread(values: Array) -> Array:
        """Values of the bins that hold a number, NaN in the others."""
        whole = np.full(bins, np.nan)
        whole[filled] = values
        return whole

    some = filled.size > 0
    return Bins(
        start=limits[:-1],
        end=limits[1:],
        row_count=rows_in,
        count=count,
        flagged_count=np.bincount(of_row[inside.flags != 0], minlength=bins),
        flags=marked,
        coverage_fraction=_coverage(within.seconds, of_number, first, limits, step),
        means={key: _mean(key, numbers, limits, gap, bounds) for key in rules},
        minimum=spread(np.minimum.reduceat(within.value, first) if some else within.value),
        maximum=spread(np.maximum.reduceat(within.value, first) if some else within.value),
        last=spread(within.value[last]),
        last_seconds=spread(within.seconds[last]),
    )


def _mean(key: str, numbers: Series, edges: Array, gap: float, bounds: Bounds) -> Mean:
    """Means of all bins by one rule."""
    if MEAN_RULES[key].key == "plain":
        held, bins, _ = _binned(numbers, edges)
        weights = np.ones(held.seconds.size)
    else:
        row, bins, weights = time_weights(numbers.seconds, edges, gap)
        held = numbers.rows(row)
    parts = (held.value, held.standard_uncertainty, held.shared)
    among = {"weights": weights, "groups": bins, "sources": held.sources}
    found = weighted_mean(*parts, **among)
    ends = held.ends
    if ends is None:
        band = bounds.band(held.value, held.standard_uncertainty)
        ends = (band.lower, band.upper)
    lower, upper = mean_band(ends, *parts, **among)
    missing = edges.size - 1 - found.value.size
    columns = (found.value, found.standard_uncertainty, found.shared, lower, upper)
    return Mean(*(np.concatenate([known, np.full(missing, np.nan)]) for known in columns))


def _coverage(seconds: Array, bins: Labels, first: Labels, edges: Array, step: float) -> Array:
    """Distinct steps with a number over whole steps with room for one."""
    size = np.diff(edges)
    taken = np.zeros(size.size, dtype=np.intp)
    if seconds.size:
        start_of = np.zeros(size.size)
        start_of[bins[first]] = seconds[first]
        place = np.floor((seconds - start_of[bins]) / step + 0.5)
        anew = np.append(True, (np.diff(place) > 0) | (np.diff(bins) > 0))
        taken = np.bincount(bins[anew], minlength=size.size)
    room = np.maximum(np.floor(size / step + 1e-9), 1.0)
    return np.minimum(taken / room, 1.0)


def _binned(rows: Series, edges: Array) -> tuple[Series, Labels, Labels]:
    """The rows between the edges, the bin of each, and how many each bin holds."""
    cuts = np.searchsorted(rows.seconds, edges)
    count = np.diff(cuts)
    return rows.rows(slice(cuts[0], cuts[-1])), np.repeat(np.arange(count.size), count), count


def _firsts(count: Labels) -> Labels:
    """Where the rows of each bin that holds any begin."""
    return (np.cumsum(count) - count)[count > 0]


def _edges(given: ArrayLike) -> Array:
    edges = column(given)
    if (
        edges.ndim != 1
        or edges.size < 2
        or not np.isfinite(edges).all()
        or np.any(np.diff(edges) <= 0)
    ):
        detail = "takes edges that rise, at least two, as seconds since the epoch"
        raise ParameterError("series", [Complaint("edges", detail)])
    return edges


def _positive(**given: float) -> None:
    complaints = [
        Complaint(name, f"takes {name} above 0 s, found {value:g}")
        for name, value in given.items()
        if not value > 0
    ]
    if complaints:
        raise ParameterError("series", complaints)
