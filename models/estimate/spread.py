"""How a water content may differ from its value: first order, quantiles where it bends, or draws.

First order (JCGM 100) is exact for an equation without curvature. What the curvature of each input
does to the ends of the interval is known from the same evaluations, and moves both ends; rows in
which that is more than 1.5 per cent of the half-width, or whose model is said to be exact, get the
equation's own quantiles (inverse first-order reliability, or shared quasi-random draws where that
will not do).
"""

from dataclasses import dataclass, replace
from typing import Self

import numpy as np
from numpy.typing import NDArray

from models.estimate.equation import OWN, Equation
from models.relation import Array
from models.uncertainty.coverage import Interval, coverage_factor, shortest_interval
from models.uncertainty.distributions import Normal
from models.uncertainty.draws import Draws
from models.uncertainty.first_order import Propagated
from models.uncertainty.monte_carlo import simulate
from models.uncertainty.quantiles.reliability import Method, band

CURVED = 0.015
"""Shift of an end, in half-widths, from which a row is looked at again where the model's own error
is in the band, which is normal and takes the most of what is left; without it every row is."""


@dataclass(frozen=True, slots=True)
class Spread:
    """A two-piece normal around the computed value; shape (n,)."""

    below: Array
    above: Array
    standard_uncertainty: Array
    """Root of the second moment about the peak."""
    method: NDArray[np.uint8] | None = None
    """Codes of ``Method`` for rows that were looked at again, 0 for the others."""
    outside: NDArray[np.intp] | None = None
    """Of a row's draws, how many had no answer or an impossible one."""

    @classmethod
    def of(cls, variance: Array, lean: Array | None) -> Self:
        """First order, and what leans down."""
        above = np.sqrt(variance)
        if lean is None:
            return cls(above, above, above)
        below = np.sqrt(variance + np.square(lean))
        two_piece = np.square(below) - below * above + np.square(above)
        return cls(below, above, np.sqrt(np.where(lean > 0.0, two_piece, variance)))


def by_quantiles(
    equation: Equation,
    computed: Array,
    first: Propagated,
    plain: Spread,
    own: Array,
    lean: Array | None,
) -> Spread:
    """The first-order spread, with the equation's own quantiles in the rows that bend."""
    z = coverage_factor(equation.basis.query.probability)
    variance = np.square(plain.above)
    shift = np.zeros_like(computed)
    with np.errstate(invalid="ignore", divide="ignore"):
        steeper = (z * z - 1.0) / variance
        for name, bend in first.bends.items():
            # Both ends move by z^2 of the bend along the gradient, and by one of it across.
            weight = np.square(first.contributions[name])
            weight *= steeper
            weight += 1.0
            weight *= bend
            shift += weight
    small = (np.abs(shift) <= CURVED * z * plain.above) & (own > 0)
    shift = np.where(small, shift, 0.0) / z
    plain = replace(plain, below=plain.below - shift, above=plain.above + shift)
    rows = np.flatnonzero(~small & ~np.isnan(computed) & (variance > 0))
    if not rows.size:
        return plain
    some = equation.rows(rows)
    every = some.distributions(own[rows], own[rows]) | {OWN: Normal(0.0, own[rows])}
    found = band(some, every, probability=equation.basis.query.probability)
    # An end on the wrong side of the value is one that the value itself lies beyond.
    below = np.maximum(found.value - found.lower, 0.0) / z
    above = np.maximum(found.upper - found.value, 0.0) / z
    if lean is not None:
        below = np.sqrt(np.square(below) + np.square(lean[rows]))
    lower, upper = plain.below.copy(), plain.above.copy()
    known = np.isfinite(below) & np.isfinite(above)
    lower[rows[known]], upper[rows[known]] = below[known], above[known]
    method = np.zeros(computed.shape, dtype=np.uint8)
    method[rows[known]] = found.method[known]
    return Spread(lower, upper, plain.standard_uncertainty, method)


def by_draws(
    equation: Equation,
    computed: Array,
    plain: Spread,
    own: Array,
    lean: Array | None,
    high: float,
) -> tuple[Spread, Interval]:
    """JCGM 101: draws of every input; draws with an impossible water content are left out.

    The interval is the shortest one of the draws that are left, and reaches to the value where
    that lies outside it. Rows of which hardly any draw is left keep first order.
    """
    query = equation.basis.query
    reach = own if lean is None else np.sqrt(np.square(own) + np.square(lean))
    peak = np.clip(computed, 0.0, high)
    method = np.zeros(computed.shape, dtype=np.uint8)
    rows = np.flatnonzero(np.isfinite(computed) & np.isfinite(plain.standard_uncertainty))
    if not rows.size:
        return replace(plain, method=method), Interval(peak, peak, peak)
    some = equation.rows(rows)

    def possible(**named: Array) -> Array:
        theta = some(**named)
        return np.where((theta >= 0.0) & (theta <= high), theta, np.nan)

    found = simulate(
        possible,
        some.distributions(reach[rows], own[rows]),
        draws=query.draws or Draws(),
        probability=query.probability,
        interval="shortest",
    )
    outside = np.zeros(computed.shape, dtype=np.intp)
    outside[rows] = found.outside
    told = np.isfinite(found.lower) & np.isfinite(found.standard_uncertainty)
    at, standard = rows[told], plain.standard_uncertainty.copy()
    without = shortest_interval(
        computed, plain.below, plain.above, low=0.0, high=high, probability=query.probability
    )
    lower, upper = without.lower, without.upper
    lower[at] = np.minimum(found.lower[told], peak[at])
    upper[at] = np.maximum(found.upper[told], peak[at])
    standard[at], method[at] = found.standard_uncertainty[told], Method.DRAWS
    z = coverage_factor(query.probability)
    below, above = np.maximum((peak - lower) / z, plain.below), (upper - peak) / z
    above = np.maximum(above, plain.above)
    return Spread(below, above, standard, method, outside), Interval(lower, upper, peak)
