"""S-parameters of a sample in an air line, planes at its faces."""

import numpy as np

from models.reflection.propagation import propagation_constant
from models.relation import Array, ComplexArray


@np.errstate(all="ignore")
def scattering(
    permittivity: ComplexArray,
    permeability: ComplexArray | float,
    frequency: Array,
    length: float,
) -> tuple[ComplexArray, ComplexArray]:
    """S11 and S21 of a symmetric sample, elementwise; frequency in Hz, length in m.

    Nicolson and Ross (1970), Weir (1974): R of one face, T of one way through.
    """
    impedance = np.sqrt(permeability + 0j) / np.sqrt(permittivity)
    r = (impedance - 1) / (impedance + 1)
    t = np.exp(-propagation_constant(permittivity, frequency, permeability) * length)
    below = 1 - r * r * t * t
    return np.asarray(r * (1 - t * t) / below), np.asarray(t * (1 - r * r) / below)


@np.errstate(all="ignore")
def scattering_slopes(
    permittivity: ComplexArray, frequency: Array, length: float
) -> tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]:
    """S11 and S21 of a sample that is not magnetic, and their derivatives by permittivity."""
    root = np.sqrt(permittivity)
    gamma = propagation_constant(permittivity, frequency)
    r, t = (1 - root) / (1 + root), np.exp(-gamma * length)
    dr, dt = -1 / (root * np.square(1 + root)), -t * gamma * length / (2 * permittivity)
    below = 1 - r * r * t * t
    dbelow = -2 * r * t * (dr * t + r * dt)
    s11, s21 = r * (1 - t * t) / below, t * (1 - r * r) / below
    ds11 = (dr * (1 - t * t) - 2 * r * t * dt - s11 * dbelow) / below
    ds21 = (dt * (1 - r * r) - 2 * t * r * dr - s21 * dbelow) / below
    return s11, s21, ds11, ds21
