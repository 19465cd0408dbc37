"""A number to decide by: value, standard uncertainty and interval, between what is possible.

What a decision rests on is often defined with ends (a depletion is not below zero, a yield not
above all of it). The number behind it, without ends, is taken as normal; everything beyond an end
is that end. Quantiles go through such a definition as they are: the interval keeps its probability.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import ndtr

from models.relation import Array, column
from models.uncertainty.coverage import coverage_factor
from models.uncertainty.distributions import Distribution, Normal
from models.uncertainty.draws import Draws
from models.uncertainty.first_order import Input, propagate
from models.uncertainty.monte_carlo import simulate

DRAWS = Draws(4096)
ABOVE_ALL = 1e30
"""In place of a number that there is not."""
Known = ArrayLike | tuple[ArrayLike, ArrayLike]
"""An exact value, or a value and its standard uncertainty (k = 1)."""


@dataclass(frozen=True, slots=True)
class Outcome:
    """One row per decision, shape (n,); NaN where the inputs allow no number."""

    value: Array
    standard_uncertainty: Array
    """Root of the second moment about the value."""
    lower: Array
    upper: Array


def outcome(
    measurand: Callable[..., Array],
    given: Mapping[str, Known],
    *,
    low: ArrayLike = -np.inf,
    high: ArrayLike = np.inf,
    probability: float = 0.95,
) -> Outcome:
    """``measurand(**given)`` with the uncertainty of every input carried through it.

    measurand: elementwise, without its ends; low, high: its ends, scalars or shape (n,).
    given: by name; uncorrelated. An input that two outcomes share must go through one measurand
        for their difference to be right.
    """
    value, u = carried(measurand, given)
    return within(value, u, low=low, high=high, probability=probability)


def outcome_by_draws(
    measurand: Callable[..., Array],
    given: Mapping[str, Known],
    *,
    low: ArrayLike = -np.inf,
    high: ArrayLike = np.inf,
    probability: float = 0.95,
) -> Outcome:
    """The same where the measurand bends far: ends of shared draws, value and u as before.

    An error without an answer is above all others; where that many of them are that the upper end
    is among them, it is NaN.
    """
    plain = outcome(measurand, given, low=low, high=high, probability=probability)
    inputs: dict[str, Distribution] = {}
    for name, known in given.items():
        value, u = known if isinstance(known, tuple) else (known, 0.0)
        inputs[name] = Normal(*(np.broadcast_to(column(each), plain.value.shape)
                                for each in (value, np.nan_to_num(u))))  # fmt: skip

    def told(**at: Array) -> Array:
        found = measurand(**at)
        return np.where(np.isfinite(found), found, ABOVE_ALL)

    drawn = simulate(told, inputs, draws=DRAWS, probability=probability)
    lost, ends = np.isnan(plain.value), (column(low), column(high))
    lower = np.minimum(np.clip(drawn.lower, *ends), plain.value)
    upper = np.maximum(np.clip(drawn.upper, *ends), plain.value)
    upper = np.where(lost | (drawn.upper >= ABOVE_ALL), np.nan, upper)
    return replace(plain, lower=np.where(lost, np.nan, lower), upper=upper)


def carried(measurand: Callable[..., Array], given: Mapping[str, Known]) -> tuple[Array, Array]:
    """Value and standard uncertainty of a measurand without ends, shape (n,)."""
    pairs = {name: known if isinstance(known, tuple) else (known, 0.0)
             for name, known in given.items()}  # fmt: skip
    shape = np.broadcast_shapes((1,), *(np.shape(part) for pair in pairs.values() for part in pair))
    inputs = [
        Input(name, np.broadcast_to(column(value), shape), np.broadcast_to(column(u), shape))
        for name, (value, u) in pairs.items()
    ]
    with np.errstate(all="ignore"):
        value = measurand(**{known.name: known.value for known in inputs})
        spread = propagate(measurand, inputs, np.array(np.broadcast_to(value, shape)))
    u = np.sqrt(spread.per_reading + spread.shared)
    known = np.isfinite(value) & np.isfinite(u)
    return np.where(known, value, np.nan), np.where(known, u, np.nan)


def within(
    value: Array,
    standard_uncertainty: Array,
    *,
    low: ArrayLike = -np.inf,
    high: ArrayLike = np.inf,
    probability: float = 0.95,
) -> Outcome:
    """What is left of a normal quantity when all beyond an end is that end."""
    u = standard_uncertainty
    ends = column(low), column(high)
    held = np.clip(value, *ends)
    half = coverage_factor(probability) * u
    return Outcome(
        held,
        np.sqrt(_second_moment(value, u, held, *ends)),
        np.clip(value - half, *ends),
        np.clip(value + half, *ends),
    )


def exceedance(value: Array, standard_uncertainty: Array) -> Array:
    """Probability that a normal quantity is above zero; 0, 0.5 or 1 where it is exact."""
    u = standard_uncertainty
    with np.errstate(invalid="ignore", divide="ignore"):
        z = np.where(u > 0, value / u, np.where(value == 0, 0.0, np.sign(value) * np.inf))
    return column(ndtr(np.where(np.isnan(value) | np.isnan(u), np.nan, z)))


def _second_moment(value: Array, u: Array, about: Array, low: Array, high: Array) -> Array:
    """Of a normal quantity brought within its ends, about a point between them."""
    scale = np.where(u > 0, u, 1.0)
    a, b = (low - value) / scale, (high - value) / scale
    below, above = ndtr(a), ndtr(-b)
    shift, middle = value - about, 1.0 - below - above
    inner = (
        np.square(shift) * middle
        + 2.0 * shift * scale * (_density(a) - _density(b))
        + np.square(scale) * (middle - (_times_density(b) - _times_density(a)))
    )
    outer = _at_end(low - about, below) + _at_end(high - about, above)
    return np.where(u > 0, np.maximum(inner + outer, 0.0), np.where(np.isnan(u), np.nan, 0.0))


def _density(z: Array) -> Array:
    return column(np.exp(-0.5 * np.square(z)) / np.sqrt(2.0 * np.pi))


def _times_density(z: Array) -> Array:
    return np.where(np.isinf(z), 0.0, np.where(np.isinf(z), 0.0, z) * _density(z))


def _at_end(distance: Array, mass: Array) -> Array:
    return np.where(
        np.isinf(distance), 0.0, np.square(np.where(np.isinf(distance), 0.0, distance)) * mass
    )
