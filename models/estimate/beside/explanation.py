"""What the temperature of a reading does to the water content that is read, effect by effect.

Free water falls in permittivity as it warms, so a warm soil reads too dry; water is released from
the surfaces of the solids, and the soil conducts better, so it reads too wet. Each size is what the
departure from 20 Cel adds to an estimate that corrects for nothing. Free water and conduction are
corrected where the model takes water and the conductivity is known; bound water never is.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from models.conductivity import TEMPERATURE_COMPENSATIONS
from models.estimate.basis import Basis
from models.estimate.pipeline import estimate
from models.readings import Readings
from models.relation import Array, column
from models.soil.bound_water import slow_layer
from models.water import kaatze_1989

REFERENCE = 20.0
BOUND_PERMITTIVITY = 3.2
"""Of water bound to a surface: like ice; from memory of what is commonly used."""


@dataclass(frozen=True, slots=True)
class Explanation:
    """Sizes by effect, m3/m3, shape (n,); NaN where an effect cannot be told."""

    effects: Mapping[str, Array]
    dominant: tuple[str | None, ...]
    """The largest effect of each reading; None where none can be told."""


def explain(readings: Readings, basis: Basis) -> Explanation:
    """The effects of temperature on each reading."""
    warmth = readings.columns.get("temperature")
    if warmth is None:
        assumed = basis.query.assumed_temperature
        warmth = np.full(readings.count, np.nan if assumed is None else assumed)
    effects = {
        "free-water": _free_water(readings, basis),
        "bound-water": _bound_water(readings, basis, warmth),
        "conduction": _conduction(readings, basis, warmth),
    }
    sizes = np.abs(np.array(list(effects.values())))
    names = tuple(effects)
    told = ~np.all(np.isnan(sizes), axis=0)
    largest = np.argmax(np.nan_to_num(sizes, nan=-1.0), axis=0)
    dominant = tuple(
        names[place] if known else None
        for place, known in zip(largest.tolist(), told.tolist(), strict=True)
    )
    return Explanation(effects, dominant)


def _free_water(readings: Readings, basis: Basis) -> Array:
    """Read with the water of 20 Cel, less as it is; zero for a model that takes no water."""
    if not basis.needs_temperature:
        return np.zeros(readings.count)
    return _water_content(readings, basis, REFERENCE) - _water_content(readings, basis, None)


def _conduction(readings: Readings, basis: Basis, warmth: Array) -> Array:
    """What conduction adds at this temperature, less what it would add at 20 Cel."""
    bulk = readings.columns.get("bulk_conductivity")
    if bulk is None or not basis.tells_correction:
        return np.full(readings.count, np.nan)
    factor = TEMPERATURE_COMPENSATIONS["corwin-lesch-2005"].factor
    cool = bulk * factor(warmth) / factor(REFERENCE)
    cooler = replace(readings, columns={**readings.columns, "bulk_conductivity": cool})
    here = estimate(readings, basis).columns["conduction_correction"]
    return here - estimate(cooler, basis).columns["conduction_correction"]


def _bound_water(readings: Readings, basis: Basis, warmth: Array) -> Array:
    """Water released since 20 Cel, as water content by the index of three phases."""
    soil = basis.query.soil.values
    if not {"specific_surface", "bulk_density"} <= set(soil):
        return np.full(readings.count, np.nan)
    frequency = readings.columns.get("frequency", basis.query.probe.get("frequency", 1e9))
    here, there = (_layer(frequency, at) for at in (warmth, column(REFERENCE)))
    released = (there - here) * soil["bulk_density"] * soil["specific_surface"]
    index = np.sqrt(kaatze_1989.static_permittivity(warmth))
    return released * (index - np.sqrt(BOUND_PERMITTIVITY)) / (index - 1.0)


def _layer(frequency: Array | float, temperature: Array) -> Array:
    relaxing = 1.0 / (2.0 * np.pi * kaatze_1989.debye(temperature).relaxation_time)
    return slow_layer(frequency, temperature, relaxing)


def _water_content(readings: Readings, basis: Basis, temperature: float | None) -> Array:
    if temperature is not None:
        same = np.full(readings.count, temperature)
        readings = replace(readings, columns={**readings.columns, "temperature": same})
    return estimate(readings, basis).columns["water_content"]
