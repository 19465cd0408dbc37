"""JCGM 100, 5.1.2, note: second-order terms, for measurands whose slope vanishes or turns."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations

import numpy as np

from models.relation import Array
from models.uncertainty.first_order import Input

STEP = 0.1
"""Of every difference, in standard uncertainties."""


@dataclass(frozen=True, slots=True)
class SecondOrder:
    """Variance of a measurand in two parts, and how far its mean is from its value; shape (n,)."""

    first: Array
    second: Array
    """Sum over pairs of inputs of f_ij^2 / 2 + f_i f_ijj, in standard uncertainties."""
    shift: Array
    """Half the sum of f_ii: to be added to the value for the mean of a curved measurand."""

    @property
    def standard_uncertainty(self) -> Array:
        """Of both parts; NaN where the second is below minus the first: it does not converge."""
        variance = self.first + self.second
        return np.sqrt(np.where(variance >= 0, variance, np.nan))


def propagate_to_second_order(
    measurand: Callable[..., Array], inputs: Sequence[Input], value: Array
) -> SecondOrder:
    """Variance of ``measurand(**inputs)`` around ``value``, terms of second order included.

    value: shape (n,), the measurand at the inputs' values. Inputs are uncorrelated and normal: the
    note's formula holds their fourth moment to be three times the squared variance.

    For k uncertain inputs the measurand is called 2 k (k + 1) times.
    """
    uncertain = [given for given in inputs if np.any(given.total > 0)]
    at = {given.name: given.value for given in inputs}

    def moved(**steps: float) -> Array:
        to = {g.name: g.value + steps[g.name] * g.total for g in uncertain if g.name in steps}
        with np.errstate(all="ignore"):
            return measurand(**{**at, **to})

    first, second, shift = np.zeros_like(value), np.zeros_like(value), np.zeros_like(value)
    slopes: dict[str, Array] = {}
    for name in (given.name for given in uncertain):
        high, low = moved(**{name: STEP}), moved(**{name: -STEP})
        far = moved(**{name: 2 * STEP}) - moved(**{name: -2 * STEP})
        slopes[name] = (high - low) / (2 * STEP)
        bend = (high + low - 2 * value) / STEP**2
        third = (far - 2 * (high - low)) / (2 * STEP**3)
        first += np.square(slopes[name])
        second += 0.5 * np.square(bend) + slopes[name] * third
        shift += 0.5 * bend
    for one, other in combinations(slopes, 2):
        corners = {
            (i, j): moved(**{one: i * STEP, other: j * STEP}) for i in (1, -1) for j in (1, -1)
        }
        second += _of_pair(corners, slopes[one], slopes[other])
    return SecondOrder(first, second, shift)


def _of_pair(
    corners: Mapping[tuple[int, int], Array], slope_one: Array, slope_other: Array
) -> Array:
    """Both terms of two different inputs: f_ij^2 + f_i f_ijj + f_j f_jii."""
    up_up, up_down = corners[1, 1], corners[1, -1]
    down_up, down_down = corners[-1, 1], corners[-1, -1]
    mixed = (up_up - up_down - down_up + down_down) / (4 * STEP**2)
    third_one = (up_up + up_down - down_up - down_down) / (2 * STEP**3) - 2 * slope_one / STEP**2
    third_other = (up_up + down_up - up_down - down_down) / (
        2 * STEP**3
    ) - 2 * slope_other / STEP**2
    return np.square(mixed) + slope_one * third_one + slope_other * third_other
