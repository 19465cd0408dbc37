"""Water content of each reading, with its band."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.conductivity.loss import conduction_loss
from models.estimate.basis import Basis
from models.estimate.discrepancy import (
    TDR_LOWEST,
    Setting,
    lean_down,
    leans_for_clay,
    model_uncertainty,
)
from models.estimate.equation import Equation
from models.estimate.permittivity import Permittivity
from models.estimate.spread import Spread, by_draws, by_quantiles
from models.estimate.surroundings import Surroundings
from models.mixing.apparent import to_real
from models.readings import Readings
from models.relation import Array
from models.soil.description import MINERAL_ORGANIC
from models.uncertainty.coverage import Interval, coverage_factor, shortest_interval
from models.uncertainty.first_order import Input, propagate

UNEXPLAINED_CORRECTION = 0.5
"""Share of a correction for loss that counts as its own standard uncertainty: in soils made by the
complex refractive index, half of the correction to all of it is still missing after it."""
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
    """Standard uncertainty that is the mixing model's own, what it leaves of loss included."""
    equation: Equation
    own: Array
    """Standard uncertainty of the model's own error, both ways; ``lean`` adds to it downward."""
    lean: Array | None

    @property
    def scales(self) -> tuple[Array, Array]:
        """Standard uncertainty of the model's own error, downward and upward."""
        if self.lean is None:
            return self.own, self.own
        return np.sqrt(np.square(self.own) + np.square(self.lean)), self.own

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
    own, lean = _own_uncertainty(basis, _setting(readings, basis, found, around, computed), ceiling)
    correction = None
    if found.uncorrected is not None:
        moved = equation.at | {"permittivity": found.uncorrected}
        correction = equation(**moved) - computed
        own = np.sqrt(np.square(own) + np.square(UNEXPLAINED_CORRECTION * correction))
    unseen = _unseen_conduction(readings, basis, found, equation, computed)
    untaken = _untaken_conduction(basis, found, equation, computed)
    for known in (unseen, None if untaken is None else UNEXPLAINED_CORRECTION * untaken):
        if known is not None and basis.query.standard_error is None:
            lean = known if lean is None else np.sqrt(np.square(lean) + np.square(known))
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
    return WaterContent(
        computed=computed,
        spread=spread,
        shared=spread.standard_uncertainty * np.sqrt(np.clip(common, 0.0, 1.0)),
        interval=interval,
        correction=correction,
        untaken=untaken,
        ceiling=ceiling,
        ceiling_u=ceiling_u,
        leans_for_clay=_leans_for_clay(basis, around.known_frequency),
        contributions=first.contributions,
        bends=first.bends,
        of_model=np.sqrt(np.maximum(np.square(own) + moment - variance, 0.0)),
        equation=equation,
        own=own,
        lean=lean,
    )


def _unseen_conduction(
    readings: Readings, basis: Basis, found: Permittivity, equation: Equation, computed: Array
) -> Array | None:
    """How much too wet a row may read whose conductivity is known and whose frequency is not.

    The correction at the lowest frequency of TDR; None where there is no such row.
    """
    bulk = _uncorrected(readings, basis, found)
    if bulk is None or not np.any(bulk > 0.0):
        return None
    return _lowered(conduction_loss(np.nan_to_num(bulk), TDR_LOWEST), found, equation, computed)


def _untaken_conduction(
    basis: Basis, found: Permittivity, equation: Equation, computed: Array
) -> Array | None:
    """How much wetter a row reads for all of its loss, where the model makes no correction.

    The soils it was made from conducted as well: how much of it the model holds is not known.
    """
    if not basis.model.conducting or found.loss is None:
        return None
    return _lowered(np.nan_to_num(found.loss), found, equation, computed)


def _lowered(loss: Array, found: Permittivity, equation: Equation, computed: Array) -> Array:
    """By how much less water there would be without that loss."""
    slowest = np.maximum(np.nan_to_num(to_real(found.value, loss)), 1.0)
    off = computed - equation(**equation.at | {"permittivity": slowest})
    return np.maximum(np.nan_to_num(off), 0.0)


def _setting(
    readings: Readings,
    basis: Basis,
    found: Permittivity,
    around: Surroundings,
    computed: Array,
) -> Setting:
    soil, texture = basis.query.soil.values, basis.query.soil.texture
    return Setting(
        permittivity=found.value,
        water_content=computed,
        frequency=around.known_frequency,
        temperature=around.temperature,
        temperature_u=around.temperature_u,
        conductivity=_uncorrected(readings, basis, found),
        clay=soil.get("clay"),
        organic_matter=soil.get("organic_matter", MINERAL_ORGANIC if texture else None),
    )


def _uncorrected(readings: Readings, basis: Basis, found: Permittivity) -> Array | None:
    """Bulk conductivity of the rows in which nothing was done about it."""
    bulk = readings.columns.get("bulk_conductivity")
    if bulk is None or "loss" in basis.takes or basis.model.conducting:
        return None
    return bulk if found.loss is None else np.where(np.isnan(found.loss), bulk, 0.0)


def _leans_for_clay(basis: Basis, frequency: Array) -> NDArray[np.bool_] | None:
    if basis.query.standard_error is not None:
        return None
    return leans_for_clay(basis.model, frequency, basis.query.soil.values.get("clay"))


def _own_uncertainty(basis: Basis, at: Setting, pores: float) -> tuple[Array, Array | None]:
    """The model's own: the caller's figure as it stands, or ours, which knows where it is."""
    stated = basis.query.standard_error
    if stated is not None:
        return np.full(at.permittivity.shape, stated), None
    lean = lean_down(basis.model, at, pores)
    if lean is not None:
        lean = np.broadcast_to(lean, at.permittivity.shape)
    return model_uncertainty(basis.model, at), lean


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
