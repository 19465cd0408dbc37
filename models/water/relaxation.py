"""What models of water are made of, in real arithmetic: relaxation and conduction."""

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from models.conductivity.corwin_lesch_2005 import CORWIN_LESCH_2005
from models.conductivity.loss import conduction_loss
from models.relation import Array, column
from models.water.family import Parts


class Debye(NamedTuple):
    """The three numbers of a single relaxation."""

    static: Array
    infinite: Array
    relaxation_time: Array
    """s"""

    def parts(self, frequency: ArrayLike) -> Parts:
        """Real part and loss at a frequency, Hz: infinite + (static - infinite) / (1 + j x)."""
        ratio = 2 * np.pi * column(frequency) * self.relaxation_time
        real, loss = relaxation(self.static - self.infinite, ratio)
        return real + self.infinite, loss


@np.errstate(all="ignore")
def relaxation(strength: ArrayLike, ratio: ArrayLike) -> Parts:
    """One relaxation, strength / (1 + j ratio), as its real part and loss.

    strength: elementwise, permittivity below the relaxation minus that above.
    ratio: elementwise, frequency over relaxation frequency, or 2 pi f tau.
    """
    x = column(ratio)
    real = column(strength) / (1 + x * x)
    return real, x * real


def pore_water_loss(
    frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike
) -> Array:
    """Loss by conduction in water at a temperature.

    frequency: elementwise, Hz. temperature: elementwise, Cel.
    conductivity_25: elementwise, S/m, the water's own, brought to 25 Cel.

    The conductivity is the one that is known, never one computed from a salinity: the equations
    for sea water are 8 % low at a salinity of 1 g/kg and 2 % at 5.
    """
    conductivity = CORWIN_LESCH_2005.from_25(conductivity_25, temperature)
    return conduction_loss(conductivity, frequency)


def with_conduction(
    pure: Parts, frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike
) -> Parts:
    """Real part and loss of water, conduction added to the loss of its relaxation."""
    if is_pure(conductivity_25):
        return pure
    real, loss = pure
    loss = loss + pore_water_loss(frequency, temperature, conductivity_25)
    return real if real.shape == loss.shape else np.broadcast_to(real, loss.shape).copy(), loss


def without_relaxation(
    static: ArrayLike, frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike
) -> Parts:
    """Real part and loss of water that has only a static permittivity and conduction."""
    loss = pore_water_loss(frequency, temperature, conductivity_25)
    return np.broadcast_to(column(static), loss.shape).copy(), loss


def is_pure(conductivity_25: ArrayLike) -> bool:
    """Whether it is one number, and that is 0: then there is nothing to add."""
    return np.ndim(conductivity_25) == 0 and float(column(conductivity_25)) == 0.0
