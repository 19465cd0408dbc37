"""The system behind a probe, found from traces in air, in water and with the rods shorted."""

from dataclasses import dataclass

import numpy as np

from models.numerics.least_squares import least_squares
from models.reflection.tdr.probe import System
from models.reflection.tdr.whole.experiment import (
    SYSTEM,
    Experiment,
    Layers,
    system_of,
    system_values,
)
from models.reflection.tdr.whole.medium import Medium
from models.relation import Array
from models.water.kaatze_1989 import debye

AIR = Layers((Medium(1.0006),))
"""Without the conductivity that a fit would otherwise move."""
EXPECTED_U = {
    "spread": 0.4, "delay": 0.2, "cable_impedance": 0.02, "cable_delay": 0.02,
    "cable_resistance": 1.0, "cable_skin": 1.5, "head_impedance": 0.5, "head_delay": 0.5,
    "rods_impedance": 0.2, "rods_length": 0.02,
}  # fmt: skip
"""Standard uncertainty of what a description says, relative (delay: in units of 0.1 ns)."""
MISSED = 5.0
"""Times their noise, by which calibration traces may be missed without a remark."""
PURE = 5e-4
"""S/m, of the water of a calibration, within a factor of e^2."""
PURE_U = 2.0


@dataclass(frozen=True, slots=True, eq=False)
class Identified:
    """A system, with what calibration leaves open of it."""

    system: System
    values: Array
    covariance: Array
    """Of ``values``, in the order of SYSTEM."""
    reduced_chi_square: float

    @property
    def missed_by(self) -> float:
        """Times their noise, by which the calibration traces are missed."""
        return float(np.sqrt(self.reduced_chi_square))

    @property
    def misses(self) -> bool:
        """Whether that is more than what an instrument adds that is no ideal line."""
        return self.missed_by > MISSED


def described(system: System, relative_u: float = 0.0) -> Identified:
    """A system taken as it is described, every number with the same relative uncertainty."""
    values = system_values(system)
    return Identified(system, values, np.eye(values.size) * relative_u**2, np.nan)


def water(temperature: float, conductivity: float = PURE) -> Layers:
    """Water of a calibration; temperature: Cel. conductivity: S/m."""
    found = debye(temperature)
    infinite = float(found.infinite)
    strength = float(found.static) - infinite
    return Layers((Medium(infinite, (strength,), (float(found.relaxation_time),), conductivity),))


def identify(
    guess: System, air: Experiment, in_water: Experiment, temperature: float,
    shorted: Experiment | None = None,
) -> Identified:  # fmt: skip
    """The system that explains its calibration traces.

    guess: what a description says, and where the search starts. Chi-square above 1 widens the
    covariance: the model is then not the whole truth about the instrument.
    """
    liquid = water(temperature)
    fixed = liquid.values
    places = len(SYSTEM)
    start = np.append(system_values(guess), np.log(PURE))
    known = np.array([1.0 / EXPECTED_U[name] for name in SYSTEM] + [1.0 / PURE_U])
    cases = [(air, AIR), (in_water, liquid)]
    if shorted is not None:
        cases.append((shorted, AIR))

    def model(values: Array) -> tuple[Array, Array]:
        system = system_of(values[:places], guess.instrument_impedance)
        now = liquid.with_values(np.append(fixed[:-1], values[-1]))
        residuals, slopes = [], []
        for case, layers in cases:
            found, jacobian = case.explained(system, now if layers is liquid else layers)
            to_water = jacobian[:, -1:] if layers is liquid else np.zeros((found.size, 1))
            residuals.append(found)
            slopes.append(np.hstack([jacobian[:, :places], to_water]))
        return np.concatenate(residuals), np.vstack(slopes)

    fit = least_squares(model, start, start, known)
    freedom = max(fit.residuals.size - fit.values.size, 1)
    chi_square = float(fit.residuals @ fit.residuals) / freedom
    covariance = fit.covariance(known)[:places, :places] * max(chi_square, 1.0)
    system = system_of(fit.values[:places], guess.instrument_impedance)
    return Identified(system, fit.values[:places], covariance, chi_square)
