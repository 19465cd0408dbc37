"""What a TDR probe and its cable are made of, and the instrument they hang on."""

from dataclasses import dataclass, field

import numpy as np
from scipy.constants import speed_of_light

from models.conductivity.loss import VACUUM_PERMITTIVITY

WAVE_IMPEDANCE = 1.0 / (speed_of_light * VACUUM_PERMITTIVITY)
"""Of vacuum, ohm."""
RISE_OVER_SPREAD = 2.5631031310892007
"""10 to 90 % of a step with a Gaussian slope, over the standard deviation of the slope."""


@dataclass(frozen=True, slots=True)
class Cable:
    """Between instrument and probe; all of its length together."""

    impedance: float = 50.0
    """ohm, at high frequency"""
    delay: float = 0.0
    """s, one way"""
    resistance: float = 0.0
    """ohm, to direct current, there and back"""
    skin_resistance: float = 0.0
    """ohm s^0.5: the resistance grows to sqrt(s) times this"""


@dataclass(frozen=True, slots=True)
class Head:
    """Between cable and rods."""

    impedance: float
    """ohm, as it is filled"""
    delay: float
    """s, one way"""


@dataclass(frozen=True, slots=True)
class Rods:
    """The part in the soil."""

    length: float
    """m"""
    impedance: float
    """ohm, in air"""

    @property
    def constant(self) -> float:
        """Conductivity over conductance, 1/m: eps0 c Z / L."""
        return self.impedance / (WAVE_IMPEDANCE * self.length)

    @classmethod
    def of_constant(cls, constant: float, length: float) -> "Rods":
        """Rods of a length, m, with such a constant, 1/m."""
        return cls(length, constant * WAVE_IMPEDANCE * length)


@dataclass(frozen=True, slots=True)
class System:
    """Everything a trace went through before it met the soil, and the rods."""

    rods: Rods
    head: Head
    cable: Cable = field(default_factory=Cable)
    instrument_impedance: float = 50.0
    """ohm"""
    spread: float = 150e-12 / RISE_OVER_SPREAD
    """s, standard deviation of the slope of the step"""
    delay: float = 0.0
    """s, two-way: when the step leaves the instrument"""

    @property
    def rise_time(self) -> float:
        """Of the step, 10 to 90 %, s."""
        return self.spread * RISE_OVER_SPREAD


def two_rod_impedance(spacing: float, diameter: float) -> float:
    """Impedance in air of two parallel rods, ohm.

    spacing: of their axes, m. diameter: m. Exact: (eta0 / pi) arcosh(spacing / diameter).
    """
    return WAVE_IMPEDANCE / np.pi * float(np.arccosh(spacing / diameter))


def three_rod_impedance(spacing: float, diameter: float) -> float:
    """Impedance in air of three rods in a plane, ohm.

    spacing: from the middle axis to the outer ones, m. diameter: m.

    Ball (2002), from memory: (eta0 / 4 pi) ln((1 - q^4) / (2 q^3)), q = radius / spacing; 0.4 to
    0.6 % above a boundary-element solution.
    """
    q = diameter / (2 * spacing)
    return WAVE_IMPEDANCE / (4 * np.pi) * float(np.log((1 - q**4) / (2 * q**3)))
