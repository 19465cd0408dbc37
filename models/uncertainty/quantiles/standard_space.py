"""A measurand as a function of independent standard-normal variables, one per uncertain input."""

from collections.abc import Callable, Mapping
from typing import Any, Self

import numpy as np

from models.relation import Array
from models.uncertainty.distributions import Distribution
from models.uncertainty.exact import Exact

STEP = 0.1
"""Of differences: wide enough for second ones."""
REACH = 2.0
"""Of the slanting probe, about where a 95 % interval ends."""
GOLDEN = 0.6180339887498949
Point = Mapping[int, Any]
"""Variables by number, as columns or scalars; those left out are 0."""
Columns = dict[int, Array]
"""One column per variable, by number."""


class StandardSpace:
    """The measurand of some rows around the medians of its inputs.

    factor: lower triangular, of the correlation of the inputs' normal scores; None: independent.
    """

    def __init__(
        self,
        measurand: Callable[..., Array],
        inputs: Mapping[str, Distribution],
        factor: Array | None,
        rows: int,
    ) -> None:
        self.measurand, self.inputs, self.factor, self.rows = measurand, inputs, factor, rows
        self._medians = {name: given.from_normal(0.0) for name, given in inputs.items()}
        self._names = tuple(
            name
            for name, given in inputs.items()
            if factor is not None or not isinstance(given, Exact)
        )

    @property
    def variables(self) -> tuple[str, ...]:
        """The inputs that are variables, in the order of their numbers."""
        return self._names

    def take(self, index: Any, rows: int) -> Self:
        """So many of the rows."""
        some = {name: given.take(index) for name, given in self.inputs.items()}
        return type(self)(self.measurand, some, self.factor, rows)

    def __call__(self, point: Point) -> Array:
        """The measurand at a point, shape (rows,); NaN outside its domain, never a warning."""
        with np.errstate(all="ignore"):
            result = self.measurand(**{**self._medians, **self._moved(point)})
        return np.broadcast_to(result, (self.rows,))

    def differences(self, point: Point, value: Array) -> tuple[Columns, Columns]:
        """First and second derivative along each variable; ``value`` is the measurand there."""
        slopes: Columns = {}
        bends: Columns = {}
        twice = 2.0 * value
        for j in range(len(self._names)):
            at = point.get(j, 0.0)
            above, below = self({**point, j: at + STEP}), self({**point, j: at - STEP})
            slopes[j] = (above - below) * (0.5 / STEP)
            bends[j] = (above + below - twice) * (1.0 / STEP**2)
        return slopes, bends

    def entangled(self, bends: Columns, value: Array) -> Array:
        """Off the diagonal of H at the medians: g'Hg without it, for one slanting unit vector g.

        No two parts of g are alike, so that products of inputs hardly ever cancel.
        """
        parts = 0.5 + np.mod(GOLDEN * np.arange(1, len(self._names) + 1), 1.0)
        parts /= np.sqrt(np.square(parts).sum())
        both = sum(self(dict(enumerate(side * parts))) for side in (REACH, -REACH))
        return (both - 2.0 * value) / REACH**2 - sum(
            part**2 * bends[j] for j, part in enumerate(parts)
        )

    def hessian(self, value: Array) -> Array:
        """All second derivatives at the medians, shape (k, k, rows)."""
        count = len(self._names)
        hessian = np.empty((count, count, self.rows))
        single = [self({j: STEP}) for j in range(count)]
        for i in range(count):
            hessian[i, i] = single[i] + self({i: -STEP}) - 2.0 * value
            for j in range(i):
                corner = self({i: STEP, j: STEP})
                hessian[i, j] = hessian[j, i] = corner - single[i] - single[j] + value
        return hessian / STEP**2

    def _moved(self, point: Point) -> dict[str, Array]:
        """The inputs that are not at their medians."""
        names = self._names
        if self.factor is None:
            return {names[j]: self.inputs[names[j]].from_normal(u) for j, u in point.items()}
        scores = {
            name: sum(weight * point[j] for j, weight in enumerate(row) if j in point)
            for name, row in zip(names, self.factor, strict=True)
        }
        return {name: self.inputs[name].from_normal(z) for name, z in scores.items()}


def direction_of(slopes: Mapping[int, Array]) -> tuple[Columns, Array]:
    """Unit vector along a gradient, and the gradient's length; NaN where that is 0."""
    length = np.sqrt(sum(np.square(slope) for slope in slopes.values()))
    return {j: slope / length for j, slope in slopes.items()}, length


def along(direction: Mapping[int, Array], distance: float, start: Point | None = None) -> Point:
    """The point so far from the start (the medians) in a direction."""
    if start is None:
        return {j: distance * part for j, part in direction.items()}
    return {j: start[j] + distance * part for j, part in direction.items()}
