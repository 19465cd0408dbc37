"""Birchak, Gardner, Hipp and Victor (1974): refractive indices add up by volume.

With the apparent permittivity of the soil and that of its water, (Re sqrt(eps))^2 both, the
equation is exact in lossy soil too: the real part of a sum is the sum of the real parts.
"""

import numpy as np
from numpy.typing import ArrayLike

from models.mixing.family import Discrepancy, MixingModel
from models.mixing.phases import (
    FREQUENCY,
    LIQUID,
    POROSITY,
    SOLID_PERMITTIVITY,
    WATER_APPARENT_PERMITTIVITY,
)
from models.relation import Array, Citation, column, ranges


@np.errstate(all="ignore")
def to_permittivity(
    water_content: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
) -> Array:
    """Apparent permittivity of a wet soil, elementwise; NaN where the index would be negative."""
    rise = np.sqrt(column(water_permittivity)) - 1
    index = _dry(porosity, solid_permittivity) + column(water_content) * rise
    return np.where(index >= 0, index * index, np.nan)


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
) -> Array:
    """Water content of a soil of known porosity, elementwise, m3/m3; the exact inverse.

    Square roots only, no power: this is the relation that long files are converted with.
    """
    rise = np.sqrt(column(water_permittivity)) - 1
    return (np.sqrt(column(permittivity)) - _dry(porosity, solid_permittivity)) / rise


def _dry(porosity: ArrayLike, solid_permittivity: ArrayLike) -> Array:
    """Refractive index of the soil without water."""
    solid = np.sqrt(column(solid_permittivity))
    return solid - column(porosity) * (solid - 1)


CRIM = MixingModel(
    key="crim",
    title="Refractive indices of three phases",
    equation="sqrt(Ka) = (1 - phi) sqrt(eps_s) + theta sqrt(eps_w) + (phi - theta)",
    source=Citation(
        authors="Birchak, J. R.; Gardner, C. G.; Hipp, J. E.; Victor, J. M.",
        year=1974,
        title="High dielectric constant microwave probes for sensing soil moisture",
        where="Proceedings of the IEEE 62(1), 93-98",
        doi="10.1109/PROC.1974.9388",
        note="equation confirmed in a secondary source; citation from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="apparent",
    water="kaatze-1989",
    parameters=(POROSITY, SOLID_PERMITTIVITY, WATER_APPARENT_PERMITTIVITY),
    validity=ranges(water_content=(0.0, 0.6), frequency=FREQUENCY, temperature=LIQUID),
    discrepancy=Discrepancy(
        standard_uncertainty=0.017,
        wet_uncertainty=0.027,
        reason="0.012 once porosity and solid permittivity are propagated, and an exponent that is "
        "0.50 to about 0.04",
    ),
)
