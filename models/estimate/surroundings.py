"""What surrounds a reading: its frequency, its temperature, and the water at both."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from models.estimate.basis import ASSUMED_FREQUENCY, Basis
from models.flags import BIT, Flags
from models.mixing.apparent import to_apparent
from models.readings import Readings
from models.relation import Array, column
from models.uncertainty.first_order import Input

BEYOND = 0.02
"""Relative standard uncertainty of a water model outside its range, where it goes on smoothly."""
_TEMPERATURE_TOLD = (
    BIT["missing:temperature"]
    | BIT["unreadable:temperature"]
    | BIT["out-of-gate:temperature"]
    | BIT["unusable-uncertainty"]
)
"""Any of these says why a row has no temperature."""


@dataclass(frozen=True, slots=True)
class Surroundings:
    """Frequency in Hz and temperature in Cel, scalar or shape (n,); None: not known."""

    frequency: Array
    known_frequency: Array
    """The same, NaN where nobody said it."""
    temperature: Array | None
    temperature_u: Array


def surroundings_of(readings: Readings, basis: Basis) -> Surroundings:
    """A row's own frequency and temperature, else the probe's and the assumed one."""
    query = basis.query
    known = _filled(readings, "frequency", query.probe.get("frequency", np.nan))
    frequency = np.where(np.isnan(known), ASSUMED_FREQUENCY, known)
    assumed = query.assumed_temperature
    temperature: Array | None = None
    if "temperature" in readings.columns or assumed is not None:
        temperature = _filled(readings, "temperature", np.nan if assumed is None else assumed)
    spread = _filled(readings, "temperature_u", query.probe.get("temperature_u", 0.0))
    if assumed is not None:
        own = readings.columns.get("temperature")
        lacking = True if own is None else np.isnan(own)
        spread = np.where(lacking, query.assumed_temperature_u, spread)
    return Surroundings(frequency, known, temperature, spread)


def water_inputs(
    basis: Basis, around: Surroundings, count: int, flags: Flags
) -> Mapping[str, Input]:
    """Water's permittivity as the mixing model takes it, with what temperature leaves open.

    Sets ``missing:temperature``, ``outside-water-range`` and their like in ``flags``.
    """
    if not basis.needs_temperature or basis.water is None:
        return {}
    if around.temperature is None:
        flags |= BIT["missing:temperature"]
        unknown = np.full(count, np.nan)
        return {name: Input(name, unknown) for name in basis.takes if name.startswith("water")}
    lacking = np.broadcast_to(np.isnan(around.temperature), (count,))
    unexplained = lacking & ((flags & _TEMPERATURE_TOLD) == 0)
    if unexplained.any():
        flags[unexplained] |= BIT["missing:temperature"]
    known = basis.water.validity
    cold = known["temperature"].beyond(around.temperature)
    fast = known["frequency"].excludes(around.frequency)
    beyond = np.broadcast_to(cold | fast, (count,))
    flags[beyond] |= BIT["outside-water-range"]
    here = _water(basis, around.frequency, around.temperature)
    if np.any(around.temperature_u > 0):
        warmer = _water(basis, around.frequency, around.temperature + around.temperature_u)
    else:
        warmer = here
    less_known = BEYOND * here["water_permittivity"]
    own = np.where(beyond, less_known, basis.water.static_uncertainty)
    return {
        name: Input(
            name,
            here[name],
            warmer[name] - here[name],
            own if name == "water_permittivity" else 0.0,
        )
        for name in basis.takes
        if name in here
    }


def frost(temperature: Array | None, flags: Flags) -> None:
    """Flag readings at which water is ice, or may be."""
    if temperature is None:
        return
    cold = temperature <= 1.0
    if not np.any(cold):
        return
    frozen = np.broadcast_to(temperature <= 0.0, flags.shape)
    near = np.broadcast_to(cold & (temperature > 0.0), flags.shape)
    flags[frozen] |= BIT["frozen"]
    flags[near] |= BIT["near-freezing"]


def _water(basis: Basis, frequency: Array, temperature: Array) -> dict[str, Array]:
    assert basis.water is not None  # noqa: S101 - the caller has asked
    real, loss = basis.water.parts(frequency, temperature)
    if "water_loss" in basis.takes or basis.model.permittivity == "real":
        return {"water_permittivity": real, "water_loss": loss}
    return {"water_permittivity": to_apparent(real, loss)}


def _filled(readings: Readings, name: str, otherwise: float) -> Array:
    own = readings.columns.get(name)
    if own is None:
        return column(otherwise)
    return np.where(np.isnan(own), otherwise, own)
