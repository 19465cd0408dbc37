"""Banin and Amiel (1970): specific surface from clay content."""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column

SOURCE = Citation(
    authors="Banin, A.; Amiel, A.",
    year=1970,
    title="A correlative study of the chemical and physical properties of a group of natural "
    "soils of Israel",
    where="Geoderma 3(3), 185-198",
    note="coefficients from memory; smectitic soils of one region",
)
RELATIVE_UNCERTAINTY = 0.5
"""Kaolinite has 10 to 20 m2/g, smectite 600 to 800: the mineral is not known from the clay."""


def specific_surface(clay: ArrayLike) -> Array:
    """Specific surface of a soil, m2/kg.

    clay: elementwise, mass fraction.

    The line crosses zero at 2.6 % clay; below it the surface is taken as zero.
    """
    return 1e3 * np.maximum(5.780 * 100.0 * column(clay) - 15.064, 0.0)
