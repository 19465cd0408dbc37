"""Conduction seen as dielectric loss."""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, column

VACUUM_PERMITTIVITY = 8.8541878128e-12  # F/m, CODATA 2018


@np.errstate(all="ignore")
def conduction_loss(conductivity: ArrayLike, frequency: ArrayLike) -> Array:
    """Loss eps'' that a direct-current conductivity adds at a frequency.

    conductivity: elementwise, S/m, at the temperature of the medium, not brought to 25 Cel.
    frequency: elementwise, Hz.

    Exact: eps'' = sigma / (2 pi f eps0).
    """
    return column(conductivity) / (2 * np.pi * VACUUM_PERMITTIVITY * column(frequency))
