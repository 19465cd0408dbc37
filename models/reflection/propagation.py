"""Waves in a filled line: propagation constant, attenuation length, a wave's way through air."""

import numpy as np
from scipy.constants import speed_of_light

from models.relation import Array, ComplexArray


@np.errstate(all="ignore")
def propagation_constant(
    permittivity: ComplexArray, frequency: Array, permeability: ComplexArray | float = 1.0
) -> ComplexArray:
    """Gamma = j w sqrt(eps mu) / c, 1/m, elementwise; frequency in Hz."""
    index = np.sqrt(permittivity) * np.sqrt(permeability)
    return np.asarray(2j * np.pi * frequency * index / speed_of_light)


@np.errstate(all="ignore")
def attenuation_length(
    permittivity: ComplexArray, frequency: Array, permeability: ComplexArray | float = 1.0
) -> Array:
    """Length over which a wave falls to 1/e, m, elementwise; infinite without loss.

    Not the skin depth of a good conductor, which soil is not: that is several times less.
    """
    alpha = propagation_constant(permittivity, frequency, permeability).real
    return np.where(alpha > 0, 1 / alpha, np.where(np.isnan(alpha), np.nan, np.inf))


def through_air(frequency: Array, length: float) -> ComplexArray:
    """exp(gamma0 l): what takes a length of air line out of a reflection's one way, elementwise."""
    return np.exp(2j * np.pi * frequency * length / speed_of_light)


def turn_through_air(frequency: Array, length: float) -> float:
    """Degrees by which a length of air line turns the phase at the highest frequency."""
    return float(360.0 * np.max(frequency) * length / speed_of_light)
