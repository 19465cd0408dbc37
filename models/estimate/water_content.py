"""Water content of each reading, with its band."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from models.estimate.basis import Basis
from models.estimate.discrepancy import (
    Setting,
    lean_down,
    leans_for_clay,
    model_uncertainty,
)
from models.estimate.permittivity import Permittivity
from models.estimate.surroundings import Surroundings
from models.mixing.physical.complex_refractive import relaxation_loss
from models.readings import Readings
from models.relation import Array
from models.uncertainty.coverage import Interval, coverage_factor, shortest_interval
from models.uncertainty.first_order import Input, propagate

UNEXPLAINED_CORRECTION = 0.5
"""Share of a correction for loss that counts as its own standard uncertainty: in soils made by the
complex refractive index, half of the correction to all of it is still missing after it."""
RELAXATIONS = 6
DRY = 0.02
"""m3/m3, below which loss cannot be told from none: the answer without it is taken."""
CONSISTENT = 3.0
"""Standard uncertainties beyond the physical range at which reading and soil contradict."""


@dataclass(frozen=True, slots=True)
class WaterContent:
    """Water content as the equation gives it, and what is known around it; shape (n,)."""

    computed: Array
    scale_below: Array
    scale_above: Array
    standard_uncertainty: Array
    """Root of the second moment of the two-piece distribution about the computed value."""
    shared: Array
    """The part of it that all readings of this soil and probe share."""
    interval: Interval
    correction: Array | None
    """By how much correcting for loss lowered the value."""
    ceiling: float
    """Porosity, or 1 where it is not known."""
    ceiling_u: float
    leans_for_clay: NDArray[np.bool_] | None
    """Rows whose band reaches down for clay at low frequency; None: none."""
    contributions: Mapping[str, Array]
    """What one standard uncertainty of each input of the equation does to the value, signed."""
    of_model: Array
    """Standard uncertainty that is the mixing model's own, what it leaves of loss included."""


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
    coverage interval, or to 1 where the porosity is not known.
    """
    inputs = _inputs(basis, found, around, water)
    at = {given.name: given.value for given in inputs if given.name != "permittivity"}

    def measurand(**named: Array) -> Array:
        permittivity = named.pop("permittivity")
        parameters = {**basis.values, **named}
        if "loss" in basis.takes and found.conduction_only is not None:
            return _with_relaxation(basis, permittivity, parameters, found.conduction_only)
        return basis.model.to_water_content(permittivity, **parameters)

    computed = measurand(permittivity=found.value, **at)
    spread = propagate(measurand, inputs, computed)
    setting = _setting(readings, basis, found, around, computed)
    ceiling, ceiling_u = _ceiling(basis)
    own, lean = _own_uncertainty(basis, setting, ceiling)
    shared = spread.shared + np.square(own)
    correction = None
    if found.uncorrected is not None:
        correction = measurand(permittivity=found.uncorrected, **at) - computed
        shared = shared + np.square(UNEXPLAINED_CORRECTION * correction)
    variance = spread.per_reading + shared
    above = np.sqrt(variance)
    below = above if lean is None else np.sqrt(variance + np.square(lean))
    probability = basis.query.probability
    high = min(1.0, ceiling + coverage_factor(probability) * ceiling_u)
    interval = shortest_interval(
        computed, below, above, low=0.0, high=high, probability=probability
    )
    moment = variance
    if lean is not None:
        two_piece = np.square(below) - below * above + np.square(above)
        moment = np.where(lean > 0.0, two_piece, variance)
    return WaterContent(
        computed=computed,
        scale_below=below,
        scale_above=above,
        standard_uncertainty=np.sqrt(moment),
        shared=np.sqrt(shared + moment - variance),
        interval=interval,
        correction=correction,
        ceiling=ceiling,
        ceiling_u=ceiling_u,
        leans_for_clay=_leans_for_clay(basis, around.known_frequency),
        contributions=spread.contributions,
        of_model=np.sqrt(shared - spread.shared + moment - variance),
    )


def _with_relaxation(
    basis: Basis,
    permittivity: Array,
    parameters: dict[str, Any],
    conduction_only: NDArray[np.bool_],
) -> Array:
    """Water content where the loss is that of conduction alone: relaxation depends on the answer.

    A fixed point from the water content without loss; each step shrinks the error a hundredfold.
    """
    told = parameters.pop("loss")
    theta = basis.model.to_water_content(permittivity, **parameters)
    without = theta
    for _ in range(RELAXATIONS):
        relaxing = np.where(conduction_only, relaxation_loss(theta, **parameters), 0.0)
        theta = basis.model.to_water_content(permittivity, loss=told + relaxing, **parameters)
    return np.where(np.isnan(theta) & (without <= DRY) & ~np.isnan(told), without, theta)


def _inputs(
    basis: Basis, found: Permittivity, around: Surroundings, water: Mapping[str, Input]
) -> list[Input]:
    inputs = [Input("permittivity", found.value, found.of_reading, found.shared)]
    inputs.extend(water.values())
    if "frequency" in basis.takes:
        inputs.append(Input("frequency", around.frequency))
    if "loss" in basis.takes:
        unknown = np.full(found.value.shape, np.nan)
        loss = unknown if found.loss is None else found.loss
        inputs.append(Input("loss", loss, 0.0 if found.loss_u is None else found.loss_u))
    inputs.extend(
        Input(name, basis.values[name], shared=u)
        for name, u in basis.uncertainties.items()
        if name in basis.values
    )
    return inputs


def _setting(
    readings: Readings,
    basis: Basis,
    found: Permittivity,
    around: Surroundings,
    computed: Array,
) -> Setting:
    soil = basis.query.soil.values
    return Setting(
        permittivity=found.value,
        water_content=computed,
        frequency=around.known_frequency,
        temperature=around.temperature,
        temperature_u=around.temperature_u,
        conductivity=_uncorrected(readings, basis, found),
        clay=soil.get("clay"),
        organic_matter=soil.get("organic_matter"),
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
    return model_uncertainty(basis.model, at), lean_down(basis.model, at, pores)


def _ceiling(basis: Basis) -> tuple[float, float]:
    """Porosity and its standard uncertainty: the caller's for the model, else the soil's."""
    if "porosity" in basis.values:
        return float(basis.values["porosity"]), basis.uncertainties.get("porosity", 0.0)
    soil = basis.query.soil
    if "porosity" in soil.values:
        return soil.values["porosity"], soil.uncertainties["porosity"]
    return 1.0, 0.0
