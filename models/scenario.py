"""An invented farm and an invented embankment: readings of soils that do not exist, with truth.

For the demonstration, the examples and the tests. Water content follows a simple story (drying by
day, one irrigation that arrives later the deeper the probe lies, a cold night); the permittivity
follows from it by the refractive index of three phases, the conductivity by the share of water.
"""

from dataclasses import dataclass

import numpy as np

from models.mixing.apparent import to_apparent
from models.mixing.physical import crim
from models.relation import Array, column
from models.water import kaatze_1989

FARM_DEPTHS = (0.15, 0.35, 0.60)  # m
FARM_POROSITY, FARM_SOLID, FREQUENCY = 0.49, 4.7, 0.8e9
EMBANKMENT_DEPTHS = (0.5, 1.5, 3.0, 4.5)  # m
EMBANKMENT_POROSITY = 0.42
DAY = 86_400.0  # s


@dataclass(frozen=True, slots=True)
class Scenario:
    """Columns of readings in time order, and the water content behind each; SI and Cel."""

    seconds: Array
    """Since the start."""
    depth: Array
    temperature: Array
    apparent_permittivity: Array
    bulk_conductivity: Array
    water_content: Array
    """The truth, which no probe sees."""


def farm_week(*, seed: int = 7, days: int = 7, step: float = 900.0) -> Scenario:
    """A week of an invented field: three depths, dry days, one irrigation, one cold night."""
    seconds, depth = _grid(days * DAY, step, FARM_DEPTHS)
    since = seconds - 3.75 * DAY - depth * 0.9 * DAY  # the front needs most of a day per metre
    wetting = 0.11 * np.exp(-depth / 0.5) / (1.0 + np.exp(-since / 3600.0))
    drying = 0.016 * np.exp(-depth / 0.3) * seconds / DAY
    daily = 0.002 * np.exp(-depth / 0.2) * np.cos(2.0 * np.pi * (seconds / DAY - 0.25))
    theta = 0.23 + 0.10 * depth + wetting - drying + daily
    wave = np.sin(2.0 * np.pi * (seconds / DAY - 0.33) - depth / 0.12)
    cold = -9.0 * np.exp(-np.square((seconds - 2.2 * DAY) / (0.17 * DAY))) * np.exp(-depth / 0.07)
    frost = -5.6 * np.exp(-np.square((seconds - 2.2 * DAY) / (0.12 * DAY))) * (depth < 0.2)
    temperature = 7.5 + 6.0 * np.exp(-depth / 0.12) * wave + cold + frost
    return _read(seconds, depth, temperature, theta, FARM_POROSITY, 0.14, seed)


def embankment_day(*, seed: int = 11, hours: int = 24) -> Scenario:
    """A day in the downstream shoulder of an invented clay-cored embankment, hour by hour."""
    seconds, depth = _grid(hours * 3600.0, 3600.0, EMBANKMENT_DEPTHS)
    rise = 0.03 * (depth > 4.0) / (1.0 + np.exp(-(seconds - 0.6 * DAY) / 5400.0))
    theta = 0.26 + 0.02 * depth + rise
    temperature = 11.0 - 0.3 * depth
    return _read(seconds, depth, temperature, theta, EMBANKMENT_POROSITY, 0.09, seed)


def _grid(span: float, step: float, depths: tuple[float, ...]) -> tuple[Array, Array]:
    """Times and depths of every reading: all depths at each time."""
    times = np.arange(0.0, span, step)
    return np.repeat(times, len(depths)), np.tile(column(depths), times.size)


def _read(
    seconds: Array,
    depth: Array,
    temperature: Array,
    theta: Array,
    porosity: float,
    pore_water: float,
    seed: int,
) -> Scenario:
    """What probes would show, with their noise; pore_water: conductivity at 25 Cel, S/m."""
    noise = np.random.default_rng(seed)
    real, loss = kaatze_1989.parts(FREQUENCY, np.maximum(temperature, 0.0))
    clean = crim.to_permittivity(
        theta,
        water_permittivity=to_apparent(real, loss),
        porosity=porosity,
        solid_permittivity=FARM_SOLID,
    )
    unfrozen = np.where(temperature > 0.0, 1.0, 1.0 + 0.25 * temperature)
    permittivity = clean * unfrozen * (1.0 + 0.006 * noise.standard_normal(clean.size))
    warming = 1.0 + 0.02 * (temperature - 25.0)
    conductivity = pore_water * warming * theta * (1.3 * theta - 0.1) + 0.005
    conductivity = conductivity * (1.0 + 0.02 * noise.standard_normal(clean.size))
    shown = temperature + 0.05 * noise.standard_normal(clean.size)
    return Scenario(seconds, depth, shown, permittivity, conductivity, theta)
