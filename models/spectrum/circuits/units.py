"""Two lossy capacitors in series, and the three parallel branches that cannot be told from them.

Maxwell (1873) and Wagner (1914): layers of two lossy materials relax although neither does. Two
units of a capacitor with a resistor in parallel, in series, have the impedance of three branches in
parallel: a capacitor, a resistor, and a capacitor in series with a resistor. That is Debye's
relaxation with a conductivity, and each of the three forms follows from any other.
"""

from dataclasses import dataclass

import numpy as np

from models.conductivity.loss import VACUUM_PERMITTIVITY
from models.errors import Complaint, ParameterError
from models.relation import Array, ComplexArray


@dataclass(frozen=True, slots=True)
class Unit:
    """A capacitor, F, with a resistor, Ohm, in parallel."""

    capacitance: float
    resistance: float

    @property
    def time(self) -> float:
        """In which it discharges, s."""
        return self.capacitance * self.resistance


@dataclass(frozen=True, slots=True)
class ThreeBranches:
    """A capacitor, a resistor, and both in series, all in parallel; F and Ohm."""

    capacitance: float
    resistance: float
    series_capacitance: float
    series_resistance: float

    @np.errstate(all="ignore")
    def impedance(self, frequency: Array) -> ComplexArray:
        """Ohm, at frequencies in Hz."""
        jw = 2j * np.pi * frequency
        slow = 1 / (self.series_resistance + 1 / (jw * self.series_capacitance))
        return np.asarray(1 / (jw * self.capacitance + 1 / self.resistance + slow), np.complex128)


@dataclass(frozen=True, slots=True)
class TwoUnits:
    """Two units in series, the slower one first."""

    slow: Unit
    fast: Unit

    @np.errstate(all="ignore")
    def impedance(self, frequency: Array) -> ComplexArray:
        """Ohm, at frequencies in Hz."""
        jw = 2j * np.pi * frequency
        parts = (unit.resistance / (1 + jw * unit.time) for unit in (self.slow, self.fast))
        return np.asarray(sum(parts), np.complex128)


@dataclass(frozen=True, slots=True)
class Relaxing:
    """One Debye relaxation and a conductivity: what either circuit is to a cell."""

    infinite_permittivity: float
    relaxation_strength: float
    relaxation_time: float
    """s"""
    conductivity: float
    """S/m"""


def two_units(branches: ThreeBranches) -> TwoUnits:
    """The two units of the same impedance. Raises ParameterError unless all elements are positive.

    The times of the units are the roots of x^2 - (tau + R C_low) x + R C tau: there are always
    two, one on either side of the relaxation time tau.
    """
    _refuse_nothing(branches.capacitance, branches.resistance, branches.series_capacitance,
                    branches.series_resistance)  # fmt: skip
    tau = branches.series_capacitance * branches.series_resistance
    through = branches.resistance
    together = tau + through * (branches.capacitance + branches.series_capacitance)
    product = through * branches.capacitance * tau
    slow = (together + np.sqrt(together**2 - 4 * product)) / 2
    fast = product / slow
    share = (slow - tau) / (slow - fast)
    resistances = through * (1 - share), through * share
    units = (Unit(time / r, r) for time, r in zip((fast, slow), resistances, strict=True))
    second, first = (Unit(float(u.capacitance), float(u.resistance)) for u in units)
    return TwoUnits(first, second)


def three_branches(units: TwoUnits) -> ThreeBranches:
    """The three branches of the same impedance; the inverse of ``two_units``."""
    (c1, r1), (c2, r2) = ((u.capacitance, u.resistance) for u in (units.slow, units.fast))
    _refuse_nothing(c1, r1, c2, r2)
    through, quick = r1 + r2, c1 * c2 / (c1 + c2)
    tau = r1 * r2 * (c1 + c2) / through
    low = (r1 * r1 * c1 + r2 * r2 * c2) / through**2
    return ThreeBranches(quick, through, low - quick, tau / (low - quick))


def relaxing(branches: ThreeBranches, cell: float) -> Relaxing:
    """The material that fills a cell of that empty capacitance, F."""
    return Relaxing(
        infinite_permittivity=branches.capacitance / cell,
        relaxation_strength=branches.series_capacitance / cell,
        relaxation_time=branches.series_capacitance * branches.series_resistance,
        conductivity=VACUUM_PERMITTIVITY / (cell * branches.resistance),
    )


def branches_of(material: Relaxing, cell: float) -> ThreeBranches:
    """The three branches of a material in a cell; the inverse of ``relaxing``."""
    series = cell * material.relaxation_strength
    return ThreeBranches(
        capacitance=cell * material.infinite_permittivity,
        resistance=VACUUM_PERMITTIVITY / (cell * material.conductivity),
        series_capacitance=series,
        series_resistance=material.relaxation_time / series,
    )


def _refuse_nothing(*elements: float) -> None:
    if not all(0 < element < np.inf for element in elements):
        detail = f"every element must be above 0 and finite, found {elements}"
        raise ParameterError("circuit", [Complaint("circuit", detail)])
