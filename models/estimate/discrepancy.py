"""How far a mixing model itself may be from this soil, here, at this reading.

A model's declared uncertainty holds well inside its range. Outside, terms are added in
quadrature, each with the observation it rests on. Clay at low frequency only ever makes a soil
look wetter than it is: that term reaches down, not up.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from models.mixing.family import MixingModel
from models.relation import Array, column

CLAY = 0.045  # with 0.022 makes 0.05: sd of a TDR curve in clay
ORGANIC = 0.045  # sd of mineral curves in organic soil and the other way round
SALINE = 0.045  # sd above 0.2 S/m of bulk conductivity
SLOW = 0.045  # sd half a decade outside the range of frequencies
DISTANCE = 0.10  # per width of the declared permittivity range, beyond its end
WARMING = 0.0024  # per K and per m3/m3, of a curve that knows no temperature
REFERENCE_TEMPERATURE = 20.0
UNKNOWN_TEMPERATURE = 7.0  # K, sd of soil temperature over a season, common practice
LEAN = 0.13  # at a tenth of the model's lowest frequency, in clay
TDR_LOWEST = 0.3e9  # Hz, common practice
DECADE = np.log(10.0)


@dataclass(frozen=True, slots=True)
class Setting:
    """What of a reading and its soil matters for the discrepancy; NaN or None: not known."""

    permittivity: Array
    water_content: Array
    frequency: Array
    temperature: Array | None
    conductivity: Array | None
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
        variance += np.square(SLOW * np.minimum(off * 2.0, 1.0))
    if at.conductivity is not None:
        saline = ramp(np.nan_to_num(at.conductivity), 0.15, 0.25)
        variance += np.square(SALINE * saline)
    known = model.validity.get(f"{model.permittivity}_permittivity")
    if known is not None:
        variance += np.square(DISTANCE * np.nan_to_num(known.distance(at.permittivity)))
    if model.water is None:
        variance += np.square(WARMING * at.water_content * _degrees_off(at.temperature))
    return np.sqrt(variance)


def lean_down(model: MixingModel, at: Setting) -> Array | None:
    """How far below the value the truth may lie for clay at low frequency, m3/m3; None: nowhere.

    At 50 MHz in clay, curves made at 0.5 to 1 GHz read 0.07 to 0.17 m3/m3 too wet (published
    laboratory pairs, ten soils). The scale grows with the logarithm of the frequency below the
    model's range and with clay from 0.05 to 0.20; clay that is not known counts as clay.
    """
    slow = _decades_below(model, at.frequency)
    if slow is None:
        return None
    clay = 1.0 if at.clay is None else float(ramp(at.clay, 0.05, 0.20))
    if clay <= 0.0:
        return None
    return LEAN * clay * slow


def _decades_below(model: MixingModel, frequency: Array) -> Array | None:
    """Decades below the model's range and below what TDR sees, at most 1.5; None: nowhere."""
    known = model.validity.get("frequency")
    if known is None:
        return None
    lowest = min(known.low, TDR_LOWEST)
    if not np.any(frequency < lowest):
        return None
    return np.clip(np.log(lowest / frequency) / DECADE, 0.0, 1.5)


def _decades_outside(model: MixingModel, frequency: Array) -> Array | None:
    """Decades outside the model's range of frequencies, either way; None: nowhere."""
    known = model.validity.get("frequency")
    if known is None or not np.any(known.excludes(frequency)):
        return None
    below, above = np.log(known.low / frequency), np.log(frequency / known.high)
    return np.maximum(np.maximum(below, above), 0.0) / DECADE


def _soil_term(model: MixingModel, at: Setting) -> float:
    """Variance for clay and organic matter the model does not take into account."""
    takes = {parameter.name for parameter in model.parameters}
    variance = 0.0
    if at.clay is not None and "clay" not in takes and model.soils != "organic":
        variance += (CLAY * float(ramp(at.clay, 0.30, 0.45))) ** 2
    if at.organic_matter is not None and "organic_matter" not in takes:
        organic = at.organic_matter
        if model.soils == "mineral":
            variance += (ORGANIC * float(ramp(organic, 0.05, 0.12))) ** 2
        elif model.soils == "organic":
            variance += (ORGANIC * float(1.0 - ramp(organic, 0.05, 0.15))) ** 2
    return variance


def _degrees_off(temperature: Array | None) -> Array | float:
    if temperature is None:
        return UNKNOWN_TEMPERATURE
    off = np.abs(temperature - REFERENCE_TEMPERATURE)
    return np.where(np.isnan(off), UNKNOWN_TEMPERATURE, off)
