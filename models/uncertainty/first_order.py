"""JCGM 100 (GUM): first-order propagation, by half-differences over one standard uncertainty."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import stdtrit

from models.errors import Complaint, ParameterError
from models.relation import Array, column


@dataclass(frozen=True, slots=True)
class Input:
    """One input of a measurand: a value and what is not known of it.

    value, per_reading, shared: scalars or columns that broadcast; ``per_reading`` and ``shared``
    are standard uncertainties (k = 1), the second of an error all readings have in common.
    """

    name: str
    value: Any
    per_reading: Any = 0.0
    shared: Any = 0.0

    @property
    def total(self) -> Array:
        """Standard uncertainty, both parts together."""
        if not np.any(self.shared):
            return np.abs(column(self.per_reading))
        if not np.any(self.per_reading):
            return np.abs(column(self.shared))
        one, other = np.abs(column(self.per_reading)), np.abs(column(self.shared))
        both = np.sqrt(np.square(one) + np.square(other))
        if one.all() and other.all():
            return both
        # To the last digit what a column without the other part would give.
        return np.where(one == 0, other, np.where(other == 0, one, both))


@dataclass(frozen=True, slots=True)
class Propagated:
    """Variance of a measurand, in its two parts, and each input's contribution."""

    per_reading: Array
    shared: Array
    contributions: Mapping[str, Array]
    """Signed, one standard uncertainty of each input: its size is that input's share."""
    bends: Mapping[str, Array]
    """How far the middle over plus and minus one standard uncertainty is from the value; NaN where
    one of the two is outside the domain."""


def propagate(measurand: Callable[..., Array], inputs: Sequence[Input], value: Array) -> Propagated:
    """Variances of ``measurand(**inputs)`` around ``value``, elementwise.

    value: shape (n,), the measurand at the inputs' values.

    A contribution is half the difference over plus and minus one standard uncertainty (JCGM 100,
    5.1.3, note 2), which also carries the odd part of a curved measurand; where one of the two is
    outside the domain (NaN), the difference to the other. Inputs are uncorrelated.
    """
    at = {given.name: given.value for given in inputs}
    per_reading, shared = np.zeros_like(value), np.zeros_like(value)
    contributions: dict[str, Array] = {}
    bends: dict[str, Array] = {}
    for given in inputs:
        width = given.total
        if not np.any(width > 0):
            continue
        above = measurand(**{**at, given.name: given.value + width})
        below = measurand(**{**at, given.name: given.value - width})
        contribution = above - below
        contribution *= 0.5
        if np.isnan(contribution.sum()):  # any of them
            one_sided = np.where(np.isnan(above), value - below, above - value)
            contribution = np.where(np.isnan(contribution), one_sided, contribution)
        contributions[given.name] = contribution
        bend = above + below
        bend *= 0.5
        bend -= value
        bends[given.name] = bend
        variance = np.square(contribution)
        if not np.any(given.shared):
            per_reading += variance
        elif not np.any(given.per_reading):
            shared += variance
        else:
            common = _share(given.shared, width)
            shared += variance * common
            per_reading += variance * (1.0 - common)
    return Propagated(per_reading, shared, contributions, bends)


def _share(part: Any, width: Array) -> Array:
    """Share of the variance that the part makes up; 0 where there is no variance."""
    square = np.square(width)
    return np.divide(np.square(column(part)), square, out=np.zeros_like(square), where=square > 0)


def effective_degrees_of_freedom(
    contributions: Mapping[str, Array], degrees_of_freedom: Mapping[str, ArrayLike]
) -> Array:
    """Of the combined standard uncertainty: Welch-Satterthwaite (JCGM 100, G.4.1), elementwise.

    contributions: of uncorrelated inputs, as ``propagate`` gives them, in no way rounded: with the
        combined uncertainty rounded to two digits, the sum of its parts is no longer the whole.
    degrees_of_freedom: by input, > 0; infinite for those left out.
    Raises ParameterError for degrees of freedom that are not positive. Infinite where nothing is
    uncertain.
    """
    total, weighed = np.zeros(1), np.zeros(1)
    for name, contribution in contributions.items():
        variance = np.square(column(contribution))
        total = total + variance
        if name in degrees_of_freedom:
            known = column(degrees_of_freedom[name])
            if not np.all(known > 0):
                detail = f"degrees of freedom of {name} must be positive"
                raise ParameterError("uncertainty", [Complaint(name, detail)])
            weighed = weighed + np.square(variance) / known
    return np.divide(
        np.square(total), weighed, out=np.full(np.shape(total + weighed), np.inf), where=weighed > 0
    )


def expanded_factor(probability: float, degrees_of_freedom: ArrayLike) -> Array:
    """Half-width in standard uncertainties of Student's t, at the whole number below (G.4.1)."""
    whole = np.maximum(np.floor(np.minimum(column(degrees_of_freedom), 1e9)), 1.0)
    return column(stdtrit(whole, 0.5 * (1.0 + probability)))
