"""True quantiles at the price of a few evaluations: along the gradient, with a curvature term.

In the space of independent standard-normal variables u, an end of the interval is the extreme of
the measurand at distance z from the centre (inverse first-order reliability), plus half the
curvature across that direction, t = (tr H - a'H a) / 2. Where the measurand bends more, the
direction and the curvature are found again at each end; where that is not enough, or the domain
is left, the row takes shared draws. Which of them a row took stands beside it.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from enum import IntEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.relation import Array, column
from models.uncertainty.closed_form import monotone_interval
from models.uncertainty.correlation import correlation_matrix, triangular
from models.uncertainty.coverage import coverage_factor
from models.uncertainty.distributions import Distribution, rows_of
from models.uncertainty.draw_statistics import Counts
from models.uncertainty.draws import Draws
from models.uncertainty.monte_carlo import simulate

BLOCK = 8192
"""Rows computed at a time."""
STEP = 0.1
"""Of differences, in standard-normal units: wide enough for second ones."""
CURVED = 0.01
"""Curvature term, in half-widths, from which each end is looked at again;"""
LOPSIDED = 0.08
"""how far one arm is longer than the mean of both, from which it is;"""
UNEVEN = 0.005
"""how far the mean arm is from the gradient's promise: the curvature that hides at the centre."""
LOST = 0.05
"""Curvature term, in half-widths, from which only draws will do,"""
FURTHER = 1.0
"""and how much further out the measurand must still be in its domain, and rise or fall on."""


class Method(IntEnum):
    """How a row's interval was found."""

    NO_NUMBER = 0
    EXACT = 1
    """One input, monotone."""
    GRADIENT = 2
    """One step along the gradient, curvature at the centre."""
    CURVATURE = 3
    """Two steps, curvature at each end."""
    DRAWS = 4


@dataclass(frozen=True, slots=True)
class Band:
    """Interval that leaves the same probability on both sides; shape (n,)."""

    value: Array
    """The measurand at the inputs' medians."""
    lower: Array
    upper: Array
    method: NDArray[np.uint8]
    """Codes of ``Method``."""
    outside: Counts
    """Of the draws of a row, how many were outside the domain; 0 where none were needed."""


def band(
    measurand: Callable[..., Array],
    inputs: Mapping[str, Distribution],
    *,
    correlation: ArrayLike | None = None,
    probability: float = 0.95,
    draws: Draws | None = None,
) -> Band:
    """Coverage interval of ``measurand(**inputs)``, to about half a per cent of its half-width.

    measurand: elementwise on columns; NaN outside its domain. Whatever differs from row to row must
        be among the inputs. For rows that need draws it is called with (rows, draws).
    correlation: of the inputs' normal scores, in the order of ``inputs``.
    draws: what rows that need them take; 16 384 quasi-random ones.
    Raises ParameterError when the correlation matrix is none.

    For k inputs: 2 k + 3 evaluations, 4 k + 8 more where the measurand bends.
    """
    how = _How(probability, correlation, draws or Draws(16_384))
    factor = None
    if correlation is not None:
        factor = triangular(correlation_matrix(correlation, len(inputs)))
    count = rows_of(inputs.values())
    parts = []
    for start in range(0, count, BLOCK):
        rows = slice(start, min(start + BLOCK, count))
        space = _Space(measurand, inputs, factor).take(rows, rows.stop - start)
        parts.append(_one_input(space, how) if len(inputs) == 1 else _along_gradient(space, how))
    columns = zip(*((p.value, p.lower, p.upper, p.method, p.outside) for p in parts), strict=True)
    return Band(*(np.concatenate(column_parts) for column_parts in columns))


@dataclass(frozen=True, slots=True)
class _How:
    probability: float
    correlation: ArrayLike | None
    draws: Draws

    @property
    def distance(self) -> float:
        return coverage_factor(self.probability)


class _Space:
    """The measurand of some rows as a function of independent standard-normal variables."""

    def __init__(
        self,
        measurand: Callable[..., Array],
        inputs: Mapping[str, Distribution],
        factor: Array | None,
        rows: int = 1,
    ) -> None:
        self.measurand, self.inputs, self.factor, self.rows = measurand, inputs, factor, rows
        self._centre = {name: given.from_normal(0.0) for name, given in inputs.items()}
        self._names = tuple(inputs)

    def take(self, index: Any, rows: int) -> "_Space":
        """Some of the rows."""
        some = {name: given.take(index) for name, given in self.inputs.items()}
        return _Space(self.measurand, some, self.factor, rows)

    def __call__(self, u: Mapping[int, Any]) -> Array:
        """The measurand where the variables with these numbers are moved off 0; no warnings."""
        with np.errstate(all="ignore"):
            result = self.measurand(**{**self._centre, **self._moved(u)})
        return np.broadcast_to(result, (self.rows,))

    def _moved(self, u: Mapping[int, Any]) -> dict[str, Array]:
        if self.factor is None:
            return {self._names[j]: self.inputs[self._names[j]].from_normal(u[j]) for j in u}
        z = {
            name: sum(self.factor[i, j] * u[j] for j in u if j <= i)
            for i, name in enumerate(self._names)
        }
        return {name: given.from_normal(z[name]) for name, given in self.inputs.items()}

    def slopes(self, around: Mapping[int, Any], value: Array) -> tuple[dict[int, Array], Array]:
        """First differences at a point, by variable, and the sum of the second ones (tr H)."""
        slopes: dict[int, Array] = {}
        bend = np.zeros(self.rows)
        for j in range(len(self._names)):
            at = around.get(j, 0.0)
            above, below = self({**around, j: at + STEP}), self({**around, j: at - STEP})
            slopes[j] = (above - below) / (2.0 * STEP)
            bend += above + below - 2.0 * value
        return slopes, bend / STEP**2


def _unit(slopes: Mapping[int, Array]) -> tuple[dict[int, Array], Array]:
    """Direction of a gradient, and its length; NaN where it vanishes."""
    length = np.sqrt(sum(np.square(slope) for slope in slopes.values()))
    with np.errstate(invalid="ignore", divide="ignore"):
        return {j: slope / length for j, slope in slopes.items()}, length


def _one_input(space: _Space, how: _How) -> Band:
    """Exact where the measurand is monotone in the one input there is."""
    ((name, given),) = space.inputs.items()
    ends = monotone_interval(
        lambda x: space.measurand(**{name: x}), given, probability=how.probability
    )
    found = _Found(space, how, space({}), ends.lower, ends.upper, Method.EXACT)
    return found.band(lost=np.isnan(ends.lower))


def _along_gradient(space: _Space, how: _How) -> Band:
    """One step, and the curvature at the centre; the rest for rows that need it."""
    z = how.distance
    value = space({})
    slopes, bend = space.slopes({}, value)
    direction, length = _unit(slopes)
    lower = space({j: -z * a for j, a in direction.items()})
    upper = space({j: z * a for j, a in direction.items()})
    half, middle = 0.5 * (upper - lower), 0.5 * (upper + lower) - value
    curvature = 0.5 * bend - middle / z**2
    found = _Found(space, how, value, lower + curvature, upper + curvature, Method.GRADIENT)
    flat = (length == 0.0) & (bend == 0.0)
    with np.errstate(invalid="ignore", divide="ignore"):
        lost = ~((np.abs(curvature) <= LOST * half) & (half > 0) | flat)
        bent = (
            (np.abs(curvature) > CURVED * half)
            | (np.abs(middle) > LOPSIDED * half)
            | (np.abs(half / (z * length) - 1.0) > UNEVEN)
        )
    found.settle(flat, value[flat], value[flat], Method.EXACT)
    rows = np.flatnonzero(bent & ~lost & ~flat)
    if rows.size:
        some, towards = space.take(rows, rows.size), {j: a[rows] for j, a in direction.items()}
        below = _at_end(some, towards, (lower - 0.0)[rows], -z)
        above = _at_end(some, towards, (upper - 0.0)[rows], z)
        found.settle(rows, below[0], above[0], Method.CURVATURE)
        lost[rows] = ~((below[1] | above[1]) <= 0)
    return found.band(lost)
