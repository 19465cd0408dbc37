"""JCGM 101 and 102: the distribution of a measurand by draws, whatever its shape.

A measurand is called as ``measurand(**columns)`` with arrays that broadcast to (rows, draws): rows
first, one draw after the other along the last axis. Whatever differs from row to row must be
among the inputs (with width 0 where it is exact); scalars may be held by the measurand itself.
Draws outside its domain give NaN, are left out, and are counted: they are never moved inside.
"""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, column
from models.uncertainty.correlation import correlation_matrix, triangular
from models.uncertainty.distributions import Distribution, rows_of
from models.uncertainty.draws import Draws
from models.uncertainty.order_statistics import Counts, Kind, interval_of, moments_of

BLOCK = 2**16
"""Values a measurand gives per call: its working columns stay near the processor."""


@dataclass(frozen=True, slots=True)
class Simulated:
    """What the draws say, shape (n,); NaN where too few of a row's draws are in the domain."""

    value: Array
    """Mean of the draws, which for a curved measurand is not the measurand of the means."""
    standard_uncertainty: Array
    lower: Array
    upper: Array
    outside: Counts
    """How many draws were outside the domain of the measurand."""
    draws: Counts
    """How many were made."""


@dataclass(frozen=True, slots=True)
class JointlySimulated:
    """Several outputs together: value (n, p), covariance (n, p, p), outside (n,)."""

    value: Array
    covariance: Array
    outside: Counts

    @property
    def standard_uncertainty(self) -> Array:
        """Shape (n, p)."""
        return np.sqrt(np.diagonal(self.covariance, axis1=-2, axis2=-1))


def simulate(
    measurand: Callable[..., Array],
    inputs: Mapping[str, Distribution],
    *,
    draws: Draws | None = None,
    correlation: ArrayLike | None = None,
    probability: float = 0.95,
    interval: Kind = "symmetric",
) -> Simulated:
    """Mean, standard uncertainty and coverage interval of each row by a fixed number of draws.

    correlation: of the inputs' normal scores, in the order of ``inputs``: for normal inputs their
        own correlation matrix.
    Raises ParameterError when the correlation matrix is none.
    """
    draws = draws or Draws()
    normal = _scores(draws, len(inputs), correlation, batch=0)
    parts = [
        _summary(_values(measurand, inputs, rows, [normal]), probability, interval)
        for rows in _blocks(rows_of(inputs.values()), draws.count)
    ]
    return _stacked(parts)


def simulate_until_stable(
    measurand: Callable[..., Array],
    inputs: Mapping[str, Distribution],
    *,
    draws: Draws | None = None,
    digits: int = 2,
    most: int = 1_000_000,
    correlation: ArrayLike | None = None,
    probability: float = 0.95,
    interval: Kind = "symmetric",
) -> Simulated:
    """Batches of draws until every figure of a row stands to so many digits (JCGM 101, 7.9).

    draws: of one batch, at least 10 000 and 100 / (1 - probability).
    digits: significant ones of the standard uncertainty; figures are stable when twice the
        standard deviation of their mean over the batches is below half a unit of the last.
    A row stops for good once it is stable, or when one batch more would exceed ``most``.
    """
    draws = draws or Draws(10_000, kind="pseudo-random")
    done = _Batches(measurand, inputs, draws, correlation)
    parts = []
    for rows in _blocks(rows_of(inputs.values()), draws.count):
        parts.append(done.run(rows, digits, max(most // draws.count, 2), probability, interval))
    return _stacked(parts)
