"""JCGM 101, clause 8: whether the first-order interval may stand in for the one from draws."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.relation import Array, column
from models.uncertainty.coverage import coverage_factor
from models.uncertainty.distributions import Distribution, rows_of
from models.uncertainty.draws import Draws, Interval, numerical_tolerance
from models.uncertainty.first_order import Input, propagate
from models.uncertainty.monte_carlo import Simulated, simulate


@dataclass(frozen=True, slots=True)
class Validation:
    """First-order interval against the one from draws, shape (n,)."""

    lower: Array
    """First-order end,"""
    upper: Array
    simulated: Simulated
    """and what the draws say."""
    tolerance: Array
    """Half a unit in the last digit of the standard uncertainty from the draws."""
    lower_difference: Array
    upper_difference: Array

    @property
    def holds(self) -> NDArray[np.bool_]:
        """Both ends agree within the tolerance; never where there is no number."""
        return np.maximum(self.lower_difference, self.upper_difference) <= self.tolerance


def validate_first_order(
    measurand: Callable[..., Array],
    inputs: Mapping[str, Distribution],
    *,
    digits: int = 2,
    draws: Draws | None = None,
    probability: float = 0.95,
    interval: Interval = "symmetric",
) -> Validation:
    """Compare value -+ k u with the interval from draws, to so many digits of u.

    digits: of the standard uncertainty that are to be meaningful, one or two.
    draws: enough for the comparison; the default, 2^17 quasi-random ones, is for two digits.
    interval: of the draws; the first-order one is both symmetric and shortest.

    Inputs are uncorrelated, and enter the first order by mean and standard uncertainty alone.
    """
    rows = rows_of(inputs.values())
    simulated = simulate(
        measurand,
        inputs,
        draws=draws or Draws(2**17),
        probability=probability,
        interval=interval,
    )
    given = [Input(name, d.mean, d.standard_uncertainty) for name, d in inputs.items()]
    with np.errstate(all="ignore"):
        found = measurand(**{each.name: column(each.value) for each in given})
        value = np.array(np.broadcast_to(found, (rows,)))
        variance = propagate(measurand, given, value).per_reading
    reach = coverage_factor(probability) * np.sqrt(variance)
    lower, upper = value - reach, value + reach
    return Validation(
        lower,
        upper,
        simulated,
        numerical_tolerance(simulated.standard_uncertainty, digits),
        np.abs(lower - simulated.lower),
        np.abs(upper - simulated.upper),
    )
