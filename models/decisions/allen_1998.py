"""Allen, Pereira, Raes and Smith (1998): water in the root zone, its depletion, and stress.

All depths of water in m. Equation numbers are those of the paper. A depletion here has no ends: it
is negative above field capacity, where water drains.
"""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column

SOURCE = Citation(
    authors="Allen, R. G.; Pereira, L. S.; Raes, D.; Smith, M.",
    year=1998,
    title="Crop evapotranspiration: guidelines for computing crop water requirements",
    where="FAO Irrigation and Drainage Paper 56, chapter 8",
    equation="82 to 92",
    note="equations 82 to 84 and 87 from secondary copies; 85 and 89 to 92 from memory",
)
LOWEST_FRACTION, HIGHEST_FRACTION = 0.1, 0.8
PER_MM_A_DAY, REFERENCE_MM_A_DAY = 0.04, 5.0
M_PER_MM, DAY = 1e-3, 86_400.0


def total_available_water(
    field_capacity: ArrayLike, wilting_point: ArrayLike, root_depth: ArrayLike
) -> Array:
    """TAW (Eq. 82), elementwise, m of water; water contents in m3/m3, root depth in m."""
    return (column(field_capacity) - column(wilting_point)) * column(root_depth)


def readily_available_water(total: ArrayLike, depletion_fraction: ArrayLike) -> Array:
    """RAW (Eq. 83), elementwise, m."""
    return column(depletion_fraction) * column(total)


def depletion(water_content: ArrayLike, field_capacity: ArrayLike, root_depth: ArrayLike) -> Array:
    """Dr (Eq. 87) without its ends, elementwise, m; water content: mean over the root depth."""
    return (column(field_capacity) - column(water_content)) * column(root_depth)


def stress_coefficient(depleted: ArrayLike, total: ArrayLike, fraction: ArrayLike) -> Array:
    """Ks (Eq. 84) without its ends 0 and 1, elementwise."""
    with np.errstate(invalid="ignore", divide="ignore"):
        return (column(total) - column(depleted)) / ((1.0 - column(fraction)) * column(total))


def depletion_fraction(tabulated: ArrayLike, crop_evapotranspiration: ArrayLike) -> Array:
    """Depletion fraction at the evapotranspiration of the day (Table 22, footnote), elementwise.

    crop_evapotranspiration: m/s. Limited to 0.1 to 0.8, as the footnote says.
    """
    mm_a_day = column(crop_evapotranspiration) * DAY / M_PER_MM
    p = column(tabulated) + PER_MM_A_DAY * (REFERENCE_MM_A_DAY - mm_a_day)
    return np.clip(p, LOWEST_FRACTION, HIGHEST_FRACTION)


def salt_stress_coefficient(
    extract_conductivity: ArrayLike, *, threshold: ArrayLike, slope: ArrayLike, response: ArrayLike
) -> Array:
    """Ks of salt alone (Eq. 91), elementwise; multiplied with that of water in Eq. 92.

    extract_conductivity, threshold: S/m; slope: fraction of yield per S/m; response: Ky.
    Meant for conductivities up to the threshold plus half a yield, and depletions up to RAW.
    """
    above = np.maximum(column(extract_conductivity) - column(threshold), 0.0)
    return 1.0 - column(slope) * above / column(response)


def next_depletion(
    depleted: ArrayLike, evapotranspiration: ArrayLike, *, gained: ArrayLike = 0.0
) -> Array:
    """Dr at the end of a day (Eq. 85) without its ends, elementwise, m.

    evapotranspiration: m in the day; gained: rain that does not run off, irrigation, capillary rise
    less deep percolation, m in the day.
    """
    return column(depleted) + column(evapotranspiration) - column(gained)
