"""JCGM 101 and 102: the distribution of a measurand by draws, whatever its shape.

A measurand is called as ``measurand(**columns)`` with arrays that broadcast to (rows, draws): one
draw after the other along the last axis. Whatever differs from row to row must be among the
inputs, with width 0 where it is exact; scalars may be held by the measurand itself. Draws outside
its domain give NaN, are left out, and are counted: they are never moved inside.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.relation import Array, column
from models.uncertainty.distributions import Distribution
from models.uncertainty.draws import (
    Counts,
    Draws,
    Interval,
    count_of,
    interval_of,
    moments_of,
    numerical_tolerance,
)
from models.uncertainty.evaluation import blocks_of, scores_of, values_of


@dataclass(frozen=True, slots=True)
class Simulated:
    """What the draws say, shape (n,); NaN where too few draws are in the domain."""

    value: Array
    """Mean of the draws: for a curved measurand not the measurand of the means."""
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


@dataclass(frozen=True, slots=True)
class Stopping:
    """When adaptive draws end: so many significant digits stand, or there were so many draws."""

    digits: int = 2
    most: int = 1_000_000


def simulate(
    measurand: Callable[..., Array],
    inputs: Mapping[str, Distribution],
    *,
    draws: Draws | None = None,
    correlation: ArrayLike | None = None,
    probability: float = 0.95,
    interval: Interval = "symmetric",
) -> Simulated:
    """Mean, standard uncertainty and coverage interval of each row from its draws.

    correlation: of the inputs' normal scores, in the order of ``inputs``; of normal inputs it is
        their own correlation matrix. Raises ParameterError when it is none.
    """
    draws = draws or Draws()
    scores = scores_of(draws, inputs, correlation)
    return _stacked(
        [
            _summary(values_of(measurand, inputs, rows, scores)[0], probability, interval)
            for rows in blocks_of(inputs, draws.count)
        ]
    )


def simulate_jointly(
    measurand: Callable[..., Any],
    inputs: Mapping[str, Distribution],
    *,
    draws: Draws | None = None,
    correlation: ArrayLike | None = None,
) -> JointlySimulated:
    """Means and covariance of several outputs (JCGM 102, 7).

    measurand: returns a sequence of columns; a complex one counts as its real and imaginary part.
    A draw counts where all outputs are numbers.
    """
    draws = draws or Draws()
    scores = scores_of(draws, inputs, correlation)
    parts = []
    for rows in blocks_of(inputs, draws.count):
        outputs = np.stack(values_of(measurand, inputs, rows, scores), axis=1)
        known = np.logical_and.reduce(np.isfinite(outputs), axis=1)
        count: Counts = known.sum(axis=1)
        outputs = np.where(known[:, None, :], outputs, 0.0)
        with np.errstate(invalid="ignore", divide="ignore"):
            mean = outputs.sum(axis=2) / count[:, None]
            away = np.where(known[:, None, :], outputs - mean[:, :, None], 0.0)
            products = [(away * away[:, i : i + 1]).sum(axis=2) for i in range(away.shape[1])]
            covariance = np.stack(products, axis=1) / (count - 1.0)[:, None, None]
        parts.append(JointlySimulated(mean, covariance, draws.count - count))
    return _stacked(parts)


def simulate_until_stable(
    measurand: Callable[..., Array],
    inputs: Mapping[str, Distribution],
    *,
    draws: Draws | None = None,
    stopping: Stopping | None = None,
    correlation: ArrayLike | None = None,
    probability: float = 0.95,
    interval: Interval = "symmetric",
) -> Simulated:
    """Batches of draws until every figure of a row is stable to so many digits (JCGM 101, 7.9).

    draws: of one batch; 10 000 pseudo-random ones, or 100 / (1 - probability) where that is more.
    stopping: when to stop; two digits, a million draws.

    Stable: twice the standard deviation of each figure's mean over the batches is below half a unit
    in the last digit of the standard uncertainty.
    """
    stopping = stopping or Stopping()
    batch = max(10_000, int(np.ceil(100.0 / (1.0 - probability))))
    draws = draws or Draws(batch, kind="pseudo-random")
    parts = []
    for rows in blocks_of(inputs, draws.count):
        run = _Run(np.arange(rows.start, rows.stop), probability, interval)
        for number in range(max(2, stopping.most // draws.count)):
            scores = scores_of(draws, inputs, correlation, number)
            run.add(values_of(measurand, inputs, run.going, scores)[0])
            run.retire(run.stable(stopping.digits))
            if not run.going.size:
                break
        run.retire(np.ones(run.going.size, dtype=bool))
        parts.append(run.result())
    return _stacked(parts)


class _Run:
    """The rows of one block that are still going, their batches, and the figures of each."""

    def __init__(self, rows: Counts, probability: float, interval: Interval) -> None:
        self.going = rows
        self._how: tuple[float, Interval] = (probability, interval)
        self._batches: list[Array] = []
        self._figures: list[Array] = []
        self._retired: list[tuple[Counts, Simulated]] = []

    def add(self, values: Array) -> None:
        """One batch more, shape (rows still going, draws of a batch)."""
        found = _summary(values, *self._how)
        self._batches.append(values)
        self._figures.append(
            np.stack([found.value, found.standard_uncertainty, found.lower, found.upper])
        )

    def stable(self, digits: int) -> NDArray[np.bool_]:
        """Which rows are; a row without any number is."""
        if len(self._figures) < 2:
            return np.zeros(self.going.size, dtype=bool)
        values = np.concatenate(self._batches, axis=1)
        u = moments_of(values, count_of(values))[1]
        spread = column(np.std(self._figures, axis=0, ddof=1)) / np.sqrt(len(self._figures))
        return (2.0 * spread.max(axis=0) < numerical_tolerance(u, digits)) | ~(u > 0)

    def retire(self, rows: NDArray[np.bool_]) -> None:
        """Take rows out of the run, with all their draws."""
        if np.any(rows):
            values = np.concatenate([batch[rows] for batch in self._batches], axis=1)
            self._retired.append((self.going[rows], _summary(values, *self._how)))
            self.going = self.going[~rows]
            self._batches = [batch[~rows] for batch in self._batches]
            self._figures = [figures[:, ~rows] for figures in self._figures]

    def result(self) -> Simulated:
        """In the order of the rows."""
        order = np.argsort(np.concatenate([rows for rows, _ in self._retired]))
        together = _stacked([found for _, found in self._retired])
        return Simulated(*(getattr(together, each.name)[order] for each in fields(together)))


def _summary(values: Array, probability: float, interval: Interval) -> Simulated:
    count = count_of(values)
    value, u = moments_of(values, count)
    lower, upper = interval_of(values, count, probability=probability, kind=interval)
    made = np.full(count.shape, values.shape[1], dtype=np.intp)
    return Simulated(value, u, lower, upper, made - count, made)


def _stacked(parts: Sequence[Any]) -> Any:
    kind = type(parts[0])
    return kind(
        *(np.concatenate([getattr(part, each.name) for part in parts]) for each in fields(kind))
    )
