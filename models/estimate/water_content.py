"""Water content of each reading, with its band."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.estimate.basis import Basis
from models.estimate.equation import Equation
from models.estimate.own.discrepancy import leans_for_clay
from models.estimate.own.error import Reading, own_error
from models.estimate.permittivity import Permittivity
from models.estimate.spread import Spread, by_draws, by_quantiles
from models.estimate.surroundings import Surroundings
from models.readings import Readings
from models.relation import Array
from models.uncertainty.coverage import Interval, coverage_factor, shortest_interval, two_piece
from models.uncertainty.first_order import Input, propagate

CONSISTENT = 3.0
"""Standard uncertainties beyond the physical range at which reading and soil contradict."""


@dataclass(frozen=True, slots=True)
class WaterContent:
    """Water content as the equation gives it, and what is known around it; shape (n,)."""

    computed: Array
    spread: Spread
    shared: Array
    """The part of the standard uncertainty that all readings of this soil and probe share."""
    interval: Interval
    correction: Array | None
    """By how much correcting for loss lowered the value;"""
    untaken: Array | None
    """by how much it would have, where the model holds the conduction of its own soils."""
    ceiling: float
    """Porosity, or 1 where it is not known."""
    ceiling_u: float
    leans_for_clay: NDArray[np.bool_] | None
    """Rows whose band reaches down for clay at low frequency; None: none."""
    contributions: Mapping[str, Array]
    """What one standard uncertainty of each input of the equation does to the value, signed,"""
    bends: Mapping[str, Array]
    """and how far the middle over both signs is from the value."""
    of_model: Array
    """Standard uncertainty that is the mixing model's own,"""
    of_conduction: Array | None
    """and what correcting for conduction leaves open, or what was not corrected for."""
    equation: Equation
    own: Array
    """Standard uncertainty of the model's own error, both ways; ``lean`` adds to it downward."""
    lean: Array | None

    @property
    def told(self) -> Array:
        """What salt rests on: the value as it is answered, but below zero as it is computed."""
        return np.where(self.computed > self.interval.peak, self.interval.peak, self.computed)

    @property
    def scales(self) -> tuple[Array, Array]:
        """Standard uncertainty of the model's own error, downward and upward."""
        if self.lean is None:
            return self.own, self.own
        return np.sqrt(np.square(self.own) + np.square(self.lean)), self.own

    def scales_at(self, probability: float) -> tuple[Array, Array]:
        """The same, such that its interval has the ends of the two-piece normal that both make."""
        if self.lean is None:
            return self.scales
        z = coverage_factor(probability)
        below, above = (two_piece(end, *self.scales) / end for end in (-z, z))
        return below, np.maximum(above, 0.0)

    @property
    def standard_uncertainty(self) -> Array:
        """Root of the second moment about the computed value."""
        return self.spread.standard_uncertainty


def water_content_of(
    readings: Readings,
    basis: Basis,
    found: Permittivity,
    around: Surroundings,
    water: Mapping[str, Input],
) -> WaterContent:
    """Invert the mixing model at each reading and carry every uncertainty through it.

    The interval is the shortest one of what the equation and the physical range together allow:
    see ``models.uncertainty.coverage``. The range is 0 to the upper end of the porosity's own
    coverage interval, or to 1 where the porosity is not known. Where the equation bends too much
    for a first order, its own quantiles take the place of value -+ k u: see
    ``models.estimate.spread``.
    """
    equation = Equation.of(basis, found, around, water)
    computed = equation(**equation.at)
    first = propagate(equation, equation.inputs, computed)
    ceiling, ceiling_u = _ceiling(basis)
    error = own_error(Reading(readings, basis, found, around), equation, computed, ceiling)
    own, lean = error.own, error.lean
    shared = first.shared + np.square(own)
    variance = first.per_reading + shared
    plain = Spread.of(variance, lean)
    probability = basis.query.probability
    high = most_water(basis)
    if basis.query.draws is not None:
        spread, interval = by_draws(equation, computed, plain, own, lean, high)
    else:
        spread = by_quantiles(equation, computed, first, plain, own, lean)
        interval = shortest_interval(
            computed, spread.below, spread.above, low=0.0, high=high, probability=probability
        )
    moment = np.square(plain.standard_uncertainty)
    common = np.divide(
        shared + moment - variance, moment, out=np.zeros_like(moment), where=moment > 0
    )
    of_model, of_conduction = error.parted(moment - variance)
    return WaterContent(
        computed=computed,
        spread=spread,
        shared=spread.standard_uncertainty * np.sqrt(np.clip(common, 0.0, 1.0)),
        interval=interval,
        correction=error.correction,
        untaken=error.untaken,
        ceiling=ceiling,
        ceiling_u=ceiling_u,
        leans_for_clay=_leans_for_clay(basis, around.known_frequency),
        contributions=first.contributions,
        bends=first.bends,
        of_model=of_model,
        of_conduction=of_conduction,
        equation=equation,
        own=own,
        lean=lean,
    )


def _leans_for_clay(basis: Basis, frequency: Array) -> NDArray[np.bool_] | None:
    if basis.query.standard_error is not None:
        return None
    return leans_for_clay(basis.model, frequency, basis.query.soil.values.get("clay"))


def most_water(basis: Basis) -> float:
    """The upper end of the porosity's own coverage interval; 1 where the porosity is not known."""
    ceiling, ceiling_u = _ceiling(basis)
    return min(1.0, ceiling + coverage_factor(basis.query.probability) * ceiling_u)


def _ceiling(basis: Basis) -> tuple[float, float]:
    """Porosity and its standard uncertainty: the caller's for the model, else the soil's."""
    if "porosity" in basis.values:
        return float(basis.values["porosity"]), basis.uncertainties.get("porosity", 0.0)
    soil = basis.query.soil
    if "porosity" in soil.values:
        return soil.values["porosity"], soil.uncertainties["porosity"]
    return 1.0, 0.0
