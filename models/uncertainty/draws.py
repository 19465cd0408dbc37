"""Draws: one matrix of them for every row of a request, and what the draws of a row establish.

Common draws make rows comparable and answers repeatable: a row's numbers depend on that row and
the seed, not on its neighbours or on how a file was cut into blocks.
"""

import importlib
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtri

from models.errors import Complaint, ParameterError
from models.relation import Array, column

Counts = NDArray[np.intp]
Interval = Literal["symmetric", "shortest"]
"""The same probability left on both sides, or the shortest of all (JCGM 101, 7.7)."""
KEPT = 2**18
"""Numbers in a matrix up to which it is kept for the next block."""
POINTS = "scipy.stats.qmc"
"""What makes quasi-random points: all of scipy's statistics, loaded when they are needed."""
HALF_STEP = 2.0**-31
"""Half the spacing of the points: none lies on 0, whose normal deviate is not finite."""


@dataclass(frozen=True, slots=True)
class Draws:
    """How many, of which kind, from which seed.

    kind: ``quasi-random`` (scrambled Sobol points; ``count`` is rounded up to a power of two)
        or ``pseudo-random``. About ten pseudo-random draws do the work of one quasi-random one.
    Raises ParameterError for a count below 2 or a negative seed.
    """

    count: int = 8192
    seed: int = 1
    kind: Literal["quasi-random", "pseudo-random"] = "quasi-random"

    def __post_init__(self) -> None:
        if self.count < 2 or self.seed < 0:
            found = f"{self.count} and {self.seed}"
            detail = f"needs at least 2 draws and a seed of at least 0, found {found}"
            raise ParameterError("uncertainty", [Complaint("draws", detail)])
        if self.kind == "quasi-random":
            object.__setattr__(self, "count", 1 << (self.count - 1).bit_length())

    def normal(self, inputs: int, batch: int = 0) -> Array:
        """Standard-normal draws, read-only, shape (inputs, count); each batch is independent."""
        make = _kept if inputs * self.count <= KEPT else _made
        return make(self, inputs, batch)


def _made(draws: Draws, inputs: int, batch: int) -> Array:
    generator = np.random.default_rng([draws.seed, batch])
    if draws.kind == "pseudo-random":
        normal = generator.standard_normal((inputs, draws.count))
    else:
        sobol = importlib.import_module(POINTS).Sobol(inputs, rng=generator)
        points = sobol.random_base2(draws.count.bit_length() - 1)
        normal = ndtri(np.ascontiguousarray(points.T) + HALF_STEP)
    normal.flags.writeable = False
    return normal


_kept = lru_cache(maxsize=8)(_made)


def interval_of(
    values: Array, count: Counts, *, probability: float, kind: Interval
) -> tuple[Array, Array]:
    """Ends of the coverage interval of each row (JCGM 101, 7.7).

    values: shape (n, m), what is no number as NaN. count: shape (n,), how many of a row are
        numbers; the ends are NaN where they are too few for the interval.

    Only the two tails are put in order: no end of the interval lies between them.
    """
    lower, upper = np.full(count.shape, np.nan), np.full(count.shape, np.nan)
    for number in np.unique(count):
        held = int(np.floor(probability * number + 0.5))
        spare = int(number) - held
        if spare < 1:
            continue
        rows = np.flatnonzero(count == number)
        low, high = _tails(values if rows.size == count.size else values[rows], int(number), spare)
        if kind == "symmetric":
            first = np.full(rows.shape, (spare + 1) // 2 - 1)
        else:
            first = np.argmin(high - low, axis=1)
        at = first[:, None]
        lower[rows] = np.take_along_axis(low, at, axis=1)[:, 0]
        upper[rows] = np.take_along_axis(high, at, axis=1)[:, 0]
    return lower, upper


def _tails(values: Array, number: int, spare: int) -> tuple[Array, Array]:
    """The ``spare`` smallest and the ``spare`` largest of ``number`` numbers a row, each sorted."""
    if 4 * spare > number:
        ordered = np.sort(values, axis=1)[:, :number]
        return ordered[:, :spare], ordered[:, number - spare :]
    parted = np.partition(values, spare, axis=1)  # NaN sorts last
    low, rest = np.sort(parted[:, :spare], axis=1), parted[:, spare:]
    rest.partition(number - 2 * spare, axis=1)
    return low, np.sort(rest[:, number - 2 * spare : number - spare], axis=1)


def count_of(values: Array) -> Counts:
    """How many of each row, shape (n, m), are numbers."""
    if np.isfinite(values.sum(axis=1)).all():  # takes half as long as to look at each
        return np.full(values.shape[0], values.shape[1], dtype=np.intp)
    return np.asarray(np.isfinite(values).sum(axis=1), dtype=np.intp)


def moments_of(values: Array, count: Counts) -> tuple[Array, Array]:
    """Mean and standard deviation of each row, shape (n, m), over what are numbers."""
    number = np.maximum(column(count), 1.0)
    if (count == values.shape[1]).all():
        mean = values.sum(axis=1) / number
        away = values - mean[:, None]
    else:
        known = np.isfinite(values)
        mean = np.where(known, values, 0.0).sum(axis=1) / number
        away = np.where(known, values - mean[:, None], 0.0)
    variance = np.square(away, out=away).sum(axis=1) / np.maximum(number - 1.0, 1.0)
    return np.where(count > 0, mean, np.nan), np.where(count > 1, np.sqrt(variance), np.nan)


def numerical_tolerance(standard_uncertainty: Array, digits: int) -> Array:
    """Half a unit in the last of so many significant digits, elementwise (JCGM 101, 7.9.2).

    0.35 to two digits is 35 x 10^-2, so its tolerance is 0.005. NaN where there is no uncertainty.
    """
    u = np.where(standard_uncertainty > 0, standard_uncertainty, np.nan)
    unit = np.floor(np.log10(u)) - (digits - 1)
    carried = np.rint(u / 10.0**unit) >= 10.0**digits  # 0.0996 is 10 x 10^-2, not 100 x 10^-3
    return column(0.5 * 10.0 ** (unit + carried))
