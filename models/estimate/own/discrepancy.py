"""How far a mixing model itself may be from this soil, here, at this reading.

A model's declared uncertainty holds well inside its range. Outside, terms are added in
quadrature, each with the observation it rests on. Clay at low frequency only ever makes a soil
look wetter than it is: that term reaches down, not up.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.mixing.family import MixingModel
from models.relation import Array, column

CLAY = 0.045  # with 0.022 makes 0.05: sd of a TDR curve in clay
ORGANIC = 0.045  # sd of mineral curves from 12 % organic matter on, and the other way round
PEAT = 0.09  # added up to 30 %: a mineral curve reads peat 0.15 too dry
SALINE = 0.045  # sd above 0.2 S/m of bulk conductivity that was not corrected for
SLOW = 0.045  # sd a fifth of a decade outside the range of frequencies
DISTANCE = 0.10  # per width of the declared permittivity range, below its lower end
RUNAWAY = 1.0  # the same above its upper end: cubics leave all others there
WARMING = 0.0024  # per K and per m3/m3, of a curve that knows no temperature
REFERENCE_TEMPERATURE = 20.0
UNKNOWN_TEMPERATURE = 7.0  # K, sd of soil temperature over a season, common practice
LEAN = 0.18  # at a tenth of the lowest frequency of TDR, in clay
ICE = 0.10  # of the pores without liquid water: (sqrt(3.19) - 1) / (n_w - 1), were all of it ice
TDR_LOWEST = 0.3e9  # Hz, common practice
DECADE = np.log(10.0)


@dataclass(frozen=True, slots=True)
class Setting:
    """What of a reading and its soil matters for the discrepancy; NaN or None: not known."""

    permittivity: Array
    water_content: Array
    frequency: Array
    """NaN where nobody said it: nothing is added for it then."""
    temperature: Array | None
    temperature_u: Array
    conductivity: Array | None
    """Bulk conductivity that nothing was corrected for, S/m."""
    clay: float | None
    organic_matter: float | None


def ramp(values: ArrayLike, start: float, stop: float) -> Array:
    """0 up to ``start``, 1 from ``stop`` on, straight between; NaN stays NaN."""
    return np.clip((column(values) - start) / (stop - start), 0.0, 1.0)


def model_uncertainty(model: MixingModel, at: Setting) -> Array:
    """Standard uncertainty of the model's own, shape (n,), m3/m3.

    Terms: the declared one, with its wet part above a permittivity of 20; clay and organic matter
    the model does not know of; frequency outside its range; bulk conductivity above 0.2 S/m;
    distance from its permittivity range; temperature a curve without water cannot follow.
    """
    declared = model.discrepancy
    base = declared.standard_uncertainty
    if declared.wet_uncertainty > base:
        wet = base + (declared.wet_uncertainty - base) * ramp(at.permittivity, 15.0, 25.0)
        variance = np.square(wet)
    else:
        variance = np.full(at.permittivity.shape, base * base)
    variance += _soil_term(model, at)
    off = _decades_outside(model, at.frequency)
    if off is not None:
        variance += np.square(SLOW * np.minimum(off * 5.0, 1.0))
    if at.conductivity is not None:
        saline = ramp(np.nan_to_num(at.conductivity), 0.15, 0.25)
        variance += np.square(SALINE * saline)
    known = model.validity.get(f"{model.permittivity}_permittivity")
    if known is not None:
        away = np.nan_to_num(known.distance(at.permittivity))
        rate = np.where(at.permittivity > known.high, RUNAWAY, DISTANCE)
        variance += np.square(rate * away)
    if model.water is None:
        variance += np.square(WARMING * at.water_content) * _degrees_off(at)
    return np.sqrt(variance)


def lean_down(model: MixingModel, at: Setting, pores: float) -> Array | None:
    """How far below the value the truth may lie, m3/m3; None: nowhere.

    pores: porosity, or 1 where it is not known.

    Clay at low frequency: at 50 MHz, curves made at 0.5 to 1 GHz read 0.07 to 0.17 m3/m3 too wet
    (published laboratory pairs, ten soils). The scale grows with the logarithm of the frequency
    below 0.3 GHz, whatever range the model declares, and with clay from 0.05 to 0.15; clay that is
    not known counts as clay. A caller's own coefficients are taken to be made for their clay.
    Ice: it is seen as a little more than the air it is taken for.
    """
    parts = []
    slow = None if model.fitted_by_caller else _decades_below(at.frequency)
    clay = 1.0 if at.clay is None else float(ramp(at.clay, 0.05, 0.15))
    if slow is not None and clay > 0.0:
        parts.append(LEAN * clay * slow)
    if at.temperature is not None and np.any(at.temperature <= 0.0):
        empty = np.maximum(pores - np.nan_to_num(at.water_content), 0.0)
        parts.append(np.where(at.temperature <= 0.0, ICE * empty, 0.0))
    if not parts:
        return None
    return np.sqrt(sum(np.square(part) for part in parts))


def leans_for_clay(
    model: MixingModel, frequency: Array, clay: float | None
) -> NDArray[np.bool_] | None:
    """Rows in which clay at low frequency makes the soil read too wet; None: nowhere."""
    slow = None if model.fitted_by_caller else _decades_below(frequency)
    if slow is None or (clay is not None and clay <= 0.05):
        return None
    return slow > 0.0


def _decades_below(frequency: Array) -> Array | None:
    """Decades below what TDR sees, at most 1.5; None: nowhere."""
    if not np.any(frequency < TDR_LOWEST):
        return None
    return np.nan_to_num(np.clip(np.log(TDR_LOWEST / frequency) / DECADE, 0.0, 1.5))


def _decades_outside(model: MixingModel, frequency: Array) -> Array | None:
    """Decades outside the model's range of frequencies, either way; None: nowhere."""
    known = model.validity.get("frequency")
    if known is None or not np.any(known.excludes(frequency)):
        return None
    below, above = np.log(known.low / frequency), np.log(frequency / known.high)
    return np.nan_to_num(np.maximum(np.maximum(below, above), 0.0)) / DECADE


def _soil_term(model: MixingModel, at: Setting) -> float:
    """Variance for clay and organic matter the model does not take into account."""
    takes = {parameter.name for parameter in model.parameters}
    variance = 0.0
    if model.fitted_by_caller:
        return variance
    if at.clay is not None and "clay" not in takes and model.soils != "organic":
        variance += (CLAY * float(ramp(at.clay, 0.25, 0.35))) ** 2
    if at.organic_matter is not None and "organic_matter" not in takes:
        organic = at.organic_matter
        if model.soils == "mineral":
            variance += (ORGANIC * float(ramp(organic, 0.05, 0.12))) ** 2
            variance += (PEAT * float(ramp(organic, 0.12, 0.30))) ** 2
        elif model.soils == "any":
            variance += (ORGANIC * float(ramp(organic, 0.12, 0.30))) ** 2
        else:
            variance += (ORGANIC * float(1.0 - ramp(organic, 0.05, 0.15))) ** 2
    return variance


def _degrees_off(at: Setting) -> Array | float:
    """Mean square distance from 20 Cel, K2."""
    if at.temperature is None:
        return UNKNOWN_TEMPERATURE**2
    off = np.square(at.temperature - REFERENCE_TEMPERATURE) + np.square(at.temperature_u)
    return np.where(np.isnan(off), UNKNOWN_TEMPERATURE**2, off)


def growth(model: MixingModel) -> tuple[str, ...]:
    """What ``model_uncertainty`` and ``lean_down`` add in quadrature for this model, in words."""
    takes = {parameter.name for parameter in model.parameters}
    known = model.validity.get(f"{model.permittivity}_permittivity")
    said = []
    if known is not None:
        said.append(f"{DISTANCE:g} m3/m3 per width of the range of permittivity below it, "
                    f"{RUNAWAY:g} above it")  # fmt: skip
    if "frequency" in model.validity:
        said.append(f"up to {SLOW:g} from a fifth of a decade outside the range of frequencies")
    if not model.fitted_by_caller:
        said += _growth_by_soil(model, takes)
    if "loss" not in takes and not model.conducting:
        said.append(f"up to {SALINE:g} from 0.15 to 0.25 S/m of bulk conductivity that was not "
                    "corrected for, and half of a correction that was made")  # fmt: skip
    if model.water is None:
        said.append(
            f"{WARMING:g} per K from {REFERENCE_TEMPERATURE:g} Cel, times the water content"
        )
    if model.conducting:
        said.append("downward alone, half of what correcting for conduction would be")
    return tuple(said)


def _growth_by_soil(model: MixingModel, takes: set[str]) -> list[str]:
    said = []
    if "clay" not in takes and model.soils != "organic":
        said.append(f"up to {CLAY:g} from 25 to 35 % clay")
    if "organic_matter" not in takes:
        far = {"mineral": f"up to {ORGANIC:g} from 5 to 12 % organic matter, {PEAT:g} more to 30 %",
               "any": f"up to {ORGANIC:g} from 12 to 30 % organic matter",
               "organic": f"up to {ORGANIC:g} below 15 to 5 % organic matter"}  # fmt: skip
        said.append(far[model.soils])
    said.append(f"downward alone, {LEAN:g} per decade below 0.3 GHz in soil of 15 % clay or more, "
                "less from 5 % on")  # fmt: skip
    return said
