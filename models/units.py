"""Units by their UCUM code, each with its way to SI (temperature: to degrees Celsius)."""

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, column


@dataclass(frozen=True, slots=True)
class Unit:
    """A unit; ``value * scale + offset`` is the value in SI (temperature: in Cel)."""

    code: str
    dimension: str
    scale: float = 1.0
    offset: float = 0.0

    def to_si(self, values: ArrayLike) -> Array:
        """Values of this unit in SI."""
        with np.errstate(over="ignore"):  # what becomes infinite is outside every gate
            return column(values) * self.scale + self.offset

    def from_si(self, values: ArrayLike) -> Array:
        """SI values in this unit."""
        return (column(values) - self.offset) / self.scale

    def width_to_si(self, values: ArrayLike) -> Array:
        """Differences and uncertainties: the scale without the offset."""
        with np.errstate(over="ignore"):
            return column(values) * self.scale

    def width_from_si(self, values: ArrayLike) -> Array:
        """Differences and uncertainties: the scale without the offset."""
        return column(values) / self.scale


_UNITS = (
    Unit("1", "ratio"), Unit("%", "ratio", 0.01),
    Unit("m3/m3", "volume fraction"), Unit("cm3/cm3", "volume fraction"),
    Unit("L/L", "volume fraction"),
    Unit("kg/kg", "mass fraction"), Unit("g/g", "mass fraction"),
    Unit("g/kg", "mass fraction", 1e-3),
    Unit("m", "length"), Unit("cm", "length", 1e-2), Unit("mm", "length", 1e-3),
    Unit("[in_i]", "length", 0.0254),
    Unit("1/m", "reciprocal length"), Unit("1/cm", "reciprocal length", 100.0),
    Unit("s", "time"), Unit("ms", "time", 1e-3), Unit("us", "time", 1e-6),
    Unit("ns", "time", 1e-9), Unit("ps", "time", 1e-12),
    Unit("Hz", "frequency"), Unit("kHz", "frequency", 1e3), Unit("MHz", "frequency", 1e6),
    Unit("GHz", "frequency", 1e9),
    Unit("Cel", "temperature"), Unit("K", "temperature", 1.0, -273.15),
    Unit("[degF]", "temperature", 5 / 9, -160 / 9),
    Unit("S/m", "conductivity"), Unit("dS/m", "conductivity", 0.1),
    Unit("mS/cm", "conductivity", 0.1), Unit("mS/m", "conductivity", 1e-3),
    Unit("uS/cm", "conductivity", 1e-4), Unit("uS/m", "conductivity", 1e-6),
    Unit("kg/m3", "density"), Unit("g/cm3", "density", 1e3), Unit("t/m3", "density", 1e3),
    Unit("m2/kg", "specific surface"), Unit("m2/g", "specific surface", 1e3),
    Unit("m/s", "depth per time"), Unit("mm/d", "depth per time", 1e-3 / 86_400),
    Unit("d", "duration", 86_400.0), Unit("h", "duration", 3600.0),
    Unit("kg/m2", "mass per area"), Unit("t/har", "mass per area", 0.1),
    Unit("1/(dS/m)", "per conductivity", 10.0), Unit("%/(dS/m)", "per conductivity", 0.1),
)  # fmt: skip

UNITS: Mapping[str, Unit] = MappingProxyType({unit.code: unit for unit in _UNITS})

FRACTIONS = ("volume fraction", "mass fraction", "ratio")


def units_of(dimension: str) -> tuple[Unit, ...]:
    """The units a quantity of that dimension may be given in; 1 and % suit any fraction."""
    also = "ratio" if dimension in FRACTIONS else dimension
    return tuple(unit for unit in _UNITS if unit.dimension in {dimension, also})
