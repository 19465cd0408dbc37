"""Whether the first-order band of each reading agrees with draws: JCGM 101, clause 8."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.estimate.basis import Basis
from models.estimate.equation import OWN
from models.estimate.pipeline import estimate, work_out
from models.readings import Readings
from models.relation import Array
from models.uncertainty.distributions import Normal
from models.uncertainty.draws import Draws
from models.uncertainty.validation import validate_first_order

DRAWS = 2**15
MOST_ROWS = 1000
"""Readings that are validated in one request: each costs as much as thousands of estimates."""


@dataclass(frozen=True, slots=True)
class Validated:
    """For each reading: whether first order holds, by how much the ends differ, what is allowed."""

    holds: NDArray[np.bool_]
    lower_difference: Array
    upper_difference: Array
    tolerance: Array
    draws: int


def validate(readings: Readings, basis: Basis) -> Validated:
    """Compare value -+ k u of the equation with draws, to two digits of u.

    Neither the physical range nor what only leans down takes part: the question is whether the
    equation bends too much for a first order.
    """
    known = _told(readings, basis)
    content = work_out(_only(readings, known), basis).content
    every = content.equation.distributions(content.own, content.own)
    every |= {OWN: Normal(0.0, content.own)}
    found = validate_first_order(
        content.equation, every, draws=Draws(DRAWS), probability=basis.query.probability
    )
    holds = np.zeros(readings.count, dtype=np.bool_)
    holds[known] = found.holds
    return Validated(
        holds,
        lower_difference=_spread(found.lower_difference, known),
        upper_difference=_spread(found.upper_difference, known),
        tolerance=_spread(found.tolerance, known),
        draws=DRAWS,
    )


def _told(readings: Readings, basis: Basis) -> NDArray[np.bool_]:
    """Readings whose water content has a band."""
    return np.isfinite(estimate(readings, basis).columns["water_content_u"])


def _only(readings: Readings, known: NDArray[np.bool_]) -> Readings:
    columns = {name: values[known] for name, values in readings.columns.items()}
    return Readings(int(known.sum()), columns, readings.flags[known])


def _spread(values: Array, known: NDArray[np.bool_]) -> Array:
    """As many as there are readings; NaN where there is none."""
    every = np.full(known.size, np.nan)
    every[known] = values
    return every
