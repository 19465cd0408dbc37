"""True quantiles at the price of a few evaluations: along the gradient, with a curvature term.

In the space of independent standard-normal variables an end of the interval is the extreme of the
measurand at distance z from the medians (inverse first-order reliability), plus half the
curvature across that direction a, t = (tr H - a'H a) / 2. Where the measurand bends more, direction
and curvature are found again at each end; where that is not enough, or the domain is left, the
row takes shared draws. Which way a row went stands beside it.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from enum import IntEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.numerics.added import added, dotted
from models.relation import Array
from models.uncertainty.correlation import correlation_matrix, triangular
from models.uncertainty.coverage import coverage_factor
from models.uncertainty.distributions import Distribution, rows_of
from models.uncertainty.draws import Counts, Draws
from models.uncertainty.monte_carlo import simulate
from models.uncertainty.quantiles.closed_form import monotone_interval
from models.uncertainty.quantiles.standard_space import STEP, StandardSpace, along, direction_of

BLOCK = 16_384
"""Rows computed at a time."""
CURVED = 0.01
"""Curvature term, in half-widths, from which each end is looked at again;"""
LOPSIDED = 0.08
"""how much longer one arm is than the mean of both, from which it is;"""
UNEVEN = 0.005
"""how far that mean is from what the gradient promises: a curvature not seen at the centre."""
ENTANGLED = 0.1
"""Terms of products of inputs, along one slanting line and by the number of inputs, likewise;"""
OPPOSED = 0.14
"""curvatures across the gradient, root of the sum of squares, in slopes, likewise."""
LOST = 0.05
"""Curvature term or second step, in half-widths, from which only draws will do,"""
FURTHER = 1.0
"""and how much further out the measurand must still be in its domain, and going the same way."""
FINE = 1e-8
"""Share of the value below which a band is too narrow to bend by more than its own rounding."""


class Method(IntEnum):
    """How a row's interval was found."""

    NO_NUMBER = 0
    EXACT = 1
    """Nothing uncertain, or one input and a monotone measurand."""
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
    """Of a row's draws, how many were outside the domain; 0 where none were needed."""


def band(
    measurand: Callable[..., Array],
    inputs: Mapping[str, Distribution],
    *,
    correlation: ArrayLike | None = None,
    probability: float = 0.95,
    draws: Draws | None = None,
    sharp: bool = False,
) -> Band:
    """Coverage interval of ``measurand(**inputs)``, to about half a per cent of its half-width.

    measurand: elementwise on columns; NaN outside its domain. Whatever differs from row to row must
        be among the inputs. For rows that need draws it is called as ``simulate`` calls it.
    correlation: of the inputs' normal scores, in the order of ``inputs``.
    draws: for rows that need them; 16 384 quasi-random ones.
    sharp: look at both ends again in every row, whether it seems to bend or not.
    Raises ParameterError when the correlation matrix is none.

    With k inputs: 2 k + 5 evaluations; for rows that bend 6 k + 10 and one per pair of inputs more.
    """
    factor = None
    if correlation is not None:
        factor = triangular(correlation_matrix(correlation, len(inputs)))
    count, z = rows_of(inputs.values()), coverage_factor(probability)
    parts = []
    for start in range(0, max(count, 1), BLOCK):
        rows = slice(start, min(start + BLOCK, count))
        some = {name: given.take(rows) for name, given in inputs.items()}
        space = StandardSpace(measurand, some, factor, rows.stop - start)
        with np.errstate(all="ignore"):
            found = _found(space, probability, z, sharp=sharp)
        needy = np.flatnonzero(found.method == Method.DRAWS)
        if needy.size:
            drawn = simulate(
                measurand,
                {name: given.take(needy) for name, given in some.items()},
                draws=draws or Draws(16_384),
                correlation=correlation,
                probability=probability,
            )
            found.lower[needy], found.upper[needy] = drawn.lower, drawn.upper
            found.outside[needy] = drawn.outside
        parts.append(found)
    return Band(
        *(
            np.concatenate([getattr(part, name) for part in parts])
            for name in ("value", "lower", "upper", "method", "outside")
        )
    )


def _found(space: StandardSpace, probability: float, z: float, *, sharp: bool) -> Band:
    """By the cheapest way that the number of variables allows."""
    if not space.variables:
        value = space({})
        return _settled(value, value, value, np.full(value.shape, Method.EXACT, dtype=np.int_))
    if len(space.variables) == 1:
        return _one_input(space, probability)
    return _along_gradient(space, z, sharp=sharp)


def _one_input(space: StandardSpace, probability: float) -> Band:
    (name,) = space.variables
    given = space.inputs[name]
    known = {n: d.mean for n, d in space.inputs.items() if n != name}
    ends = monotone_interval(
        lambda x: space.measurand(**known, **{name: x}), given, probability=probability
    )
    method = np.where(np.isnan(ends.lower), Method.DRAWS, Method.EXACT)
    return _settled(space({}), ends.lower, ends.upper, method)


def _along_gradient(space: StandardSpace, z: float, *, sharp: bool) -> Band:
    """One step for all rows; those that bend are looked at again."""
    value = space({})
    slopes, bends = space.differences({}, value)
    total = sum(bends.values())
    towards, length = direction_of(slopes)
    lower, upper = space(along(towards, -z)), space(along(towards, z))
    half, middle = 0.5 * (upper - lower), 0.5 * (upper + lower) - value
    curvature = 0.5 * total - middle / z**2
    entangled = 0.5 * len(slopes) * z**2 * space.entangled(bends, value)
    fine = np.maximum(z * length, np.maximum(np.abs(total), np.abs(entangled)))
    fine = fine <= FINE * np.abs(value)
    lost = ~((np.abs(curvature) <= LOST * half) & (half > 0.0))
    bent = (np.abs(curvature) > CURVED * half) | sharp
    bent |= np.abs(middle) > LOPSIDED * half
    bent |= np.abs(half - z * length) > UNEVEN * half
    bent |= np.abs(entangled) > ENTANGLED * half
    opposed = sum(np.square((1.0 - a**2) * bends[j]) for j, a in towards.items())
    bent |= np.sqrt(opposed) > OPPOSED * length
    lower = np.where(fine, value - z * length, lower + curvature)
    upper = np.where(fine, value + z * length, upper + curvature)
    method = np.select(
        [fine & (length == 0.0), fine, lost, bent],
        [Method.EXACT, Method.GRADIENT, Method.DRAWS, Method.CURVATURE],
        Method.GRADIENT,
    )
    rows = np.flatnonzero(method == Method.CURVATURE)
    if rows.size:
        some, first = space.take(rows, rows.size), {j: a[rows] for j, a in towards.items()}
        lower[rows], upper[rows], holds = _again(some, first, z, (value[rows], half[rows]))
        method[rows[~holds]] = Method.DRAWS
    return _settled(value, lower, upper, method)


def _again(
    space: StandardSpace, towards: Mapping[int, Array], z: float, found: tuple[Array, Array]
) -> tuple[Array, Array, NDArray[np.bool_]]:
    """Both ends with direction and curvature taken there, widened by what bends across both.

    found: value, and half-width of the first step. Also returns for which rows all this holds.
    """
    value, half = found
    lower, down = _at_end(space, towards, -z, half)
    upper, up = _at_end(space, towards, z, half)
    hessian = space.hessian(value)
    a = np.stack(list(towards.values()))
    turned = np.stack([dotted(row, a) for row in hessian])
    across = added(np.stack([dotted(row, row) for row in hessian])) - 2.0 * dotted(turned, turned)
    across += np.square(dotted(turned, a))
    # Curvatures of both signs leave the middle where it is and add to the variance, tr H^2 / 2.
    wider = half * (np.sqrt(1.0 + 0.5 * across * np.square(z / half)) - 1.0)
    return lower - wider, upper + wider, down & up & (wider <= LOST * half)


def _at_end(
    space: StandardSpace, towards: Mapping[int, Array], z: float, half: Array
) -> tuple[Array, NDArray[np.bool_]]:
    """One end with direction and curvature taken there, and which rows it holds for."""
    first = along(towards, z)
    value = space(first)
    slopes, bends = space.differences(first, value)
    better, _ = direction_of(slopes)
    second = space(along(better, z))
    across = space(along(better, STEP, first)) + space(along(better, -STEP, first)) - 2.0 * value
    curvature = 0.5 * (sum(bends.values()) - across / STEP**2)
    sign = np.sign(z)
    beyond = space(along(better, z + sign * FURTHER))
    holds = (np.abs(curvature) <= LOST * half) & (np.abs(second - value) <= LOST * half)
    holds &= sign * (beyond - second) > 0.0
    # An end is an extreme: where the second step falls short of the first, the first is better.
    return sign * np.maximum(sign * value, sign * second) + curvature, holds


def _settled(value: Array, lower: Array, upper: Array, method: NDArray[np.int_]) -> Band:
    nothing = ~np.isfinite(value)
    method = np.where(nothing, Method.NO_NUMBER, method)
    unset = nothing | (method == Method.DRAWS)
    return Band(
        np.where(nothing, np.nan, value),
        np.where(unset, np.nan, lower),
        np.where(unset, np.nan, upper),
        method.astype(np.uint8),
        np.zeros(value.shape, dtype=np.intp),
    )
