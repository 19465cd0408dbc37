"""From the water in the pores to the saturated paste and back: the salt stays, the water changes.

sigma_e SP rho_b / rho_w = sigma_w theta. What is dissolved is taken to be the same in both waters
and conductivity to be proportional to it: no mineral dissolves or settles as water is added, no
anion is kept out of the water near clay. Soil with gypsum dissolves more in the paste: its extract
reads up to about 2 dS/m more than this says. All conductivities are at 25 Cel.
"""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column
from models.salinity.family import above_zero

WATER_DENSITY = 1000.0  # kg/m3
GYPSUM = 0.2
"""S/m, about the most by which an extract of gypsiferous soil reads higher; from memory."""

SOURCE = Citation(
    authors="Rhoades, J. D.; Chanduvi, F.; Lesch, S. M.",
    year=1999,
    title="Soil salinity assessment: methods and interpretation of electrical conductivity "
    "measurements",
    where="FAO Irrigation and Drainage Paper 57",
    equation="sigma_w theta = sigma_e (SP / 100) rho_b / rho_w",
    note="citation from memory; the equation is a balance of mass",
)


@np.errstate(all="ignore")
def paste_water_content(saturation_percentage: ArrayLike, bulk_density: ArrayLike) -> Array:
    """Water of the saturated paste on the volume the soil has in the field, elementwise, m3/m3.

    saturation_percentage: kg/kg of dry mass, 0.45 and not 45. bulk_density: kg/m3, in the field.
    """
    return column(saturation_percentage) * column(bulk_density) / WATER_DENSITY


@np.errstate(all="ignore")
def to_extract(
    pore_water_conductivity: ArrayLike,
    /,
    *,
    water_content: ArrayLike,
    saturation_percentage: ArrayLike,
    bulk_density: ArrayLike,
) -> Array:
    """Conductivity of the saturated paste extract, elementwise, S/m.

    pore_water_conductivity: S/m at 25 Cel. water_content: m3/m3; NaN at and below zero.
    saturation_percentage: kg/kg. bulk_density: kg/m3.
    """
    theta, paste = above_zero(water_content), _paste(saturation_percentage, bulk_density)
    return column(pore_water_conductivity) * theta / paste


@np.errstate(all="ignore")
def to_pore_water(
    extract_conductivity: ArrayLike,
    /,
    *,
    water_content: ArrayLike,
    saturation_percentage: ArrayLike,
    bulk_density: ArrayLike,
) -> Array:
    """Conductivity of the water in the pores, elementwise, S/m; the inverse of ``to_extract``."""
    theta, paste = above_zero(water_content), _paste(saturation_percentage, bulk_density)
    return column(extract_conductivity) * paste / theta


@np.errstate(all="ignore")
def to_saturated(
    pore_water_conductivity: ArrayLike, /, *, water_content: ArrayLike, porosity: ArrayLike
) -> Array:
    """Conductivity of the same salt in all of the pores, were they filled with water.

    All elementwise, S/m at 25 Cel and m3/m3; NaN where no water or no pore is.
    """
    return column(pore_water_conductivity) * above_zero(water_content) / above_zero(porosity)


@np.errstate(all="ignore")
def from_saturated(
    saturated_conductivity: ArrayLike, /, *, water_content: ArrayLike, porosity: ArrayLike
) -> Array:
    """Conductivity of the water that is there; the inverse of ``to_saturated``."""
    return column(saturated_conductivity) * above_zero(porosity) / above_zero(water_content)


def _paste(saturation_percentage: ArrayLike, bulk_density: ArrayLike) -> Array:
    return above_zero(paste_water_content(saturation_percentage, bulk_density))
