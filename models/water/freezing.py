"""When pore water freezes: salt lowers the freezing point, and probes do not know their ice."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.relation import Array, Citation, column

LOWERING = 0.30  # K per S/m at 25 Cel, from memory
NEAR = 1.0
"""Cel; at or below it some of the water may be ice, for a probe and its soil are rarely at one
temperature."""
SOURCE = Citation(
    authors="United States Salinity Laboratory Staff",
    year=1954,
    title="Diagnosis and improvement of saline and alkali soils",
    where="USDA Agriculture Handbook 60",
    note="from memory: osmotic pressure 0.36 atm per dS/m, and 12.06 atm per degree of lowering",
)


def freezing_point(conductivity_25: ArrayLike) -> Array:
    """Temperature at which pore water begins to freeze, Cel.

    conductivity_25: elementwise, S/m at 25 Cel, of the pore water.

    From memory; about 15 % uncertain, for it depends on the salts. As ice forms, the rest of the
    water grows saltier and freezes lower.
    """
    return -LOWERING * column(conductivity_25)


def is_freezing(temperature: ArrayLike, conductivity_25: ArrayLike = 0.0) -> NDArray[np.bool_]:
    """Whether pore water is at or below its freezing point; False where either is NaN.

    temperature: elementwise, Cel. conductivity_25: elementwise, S/m at 25 Cel.
    """
    return column(temperature) <= freezing_point(conductivity_25)


def is_near_freezing(temperature: ArrayLike, conductivity_25: ArrayLike = 0.0) -> NDArray[np.bool_]:
    """Whether pore water is above its freezing point, but not above 1 Cel; False where NaN.

    temperature: elementwise, Cel. conductivity_25: elementwise, S/m at 25 Cel.
    """
    t = column(temperature)
    return (t > freezing_point(conductivity_25)) & (t <= NEAR)
