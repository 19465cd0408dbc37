"""Roth, Schulin, Fluehler and Attinger (1990): three phases in a power law, fitted to soils."""

from dataclasses import replace

from numpy.typing import ArrayLike

from models.mixing.family import Discrepancy, MixingModel
from models.mixing.phases import (
    LIQUID,
    POROSITY,
    SOLID_PERMITTIVITY,
    WATER_APPARENT_PERMITTIVITY,
)
from models.mixing.physical import power_law
from models.relation import Array, Citation, ranges

EXPONENT = 0.46


def to_permittivity(
    water_content: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
) -> Array:
    """Apparent permittivity of a wet soil, elementwise."""
    return power_law.to_permittivity(
        water_content,
        water_permittivity=water_permittivity,
        porosity=porosity,
        solid_permittivity=solid_permittivity,
        exponent=EXPONENT,
    )


def to_water_content(
    permittivity: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
) -> Array:
    """Water content of a soil of known porosity, elementwise, m3/m3; the exact inverse."""
    return power_law.to_water_content(
        permittivity,
        water_permittivity=water_permittivity,
        porosity=porosity,
        solid_permittivity=solid_permittivity,
        exponent=EXPONENT,
    )


ROTH_1990 = MixingModel(
    key="roth-1990",
    title="Three-phase power law for field soils",
    equation="Ka^0.46 = (1 - phi) eps_s^0.46 + theta eps_w^0.46 + (phi - theta)",
    source=Citation(
        authors="Roth, K.; Schulin, R.; Fluehler, H.; Attinger, W.",
        year=1990,
        title="Calibration of time domain reflectometry for water content measurement using a"
              " composite dielectric approach",
        where="Water Resources Research 26(10), 2267-2273",
        doi="10.1029/WR026i010p02267",
        note="exponent, water and error over eleven sites read in a public source; solid"
             " permittivity from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="apparent",
    water="wyman-ingalls-1938",
    parameters=(
        POROSITY,
        # 3.9 was fitted together with the exponent: it is no property of the grains alone.
        replace(SOLID_PERMITTIVITY, default=3.9, default_u=0.5),
        WATER_APPARENT_PERMITTIVITY,
    ),
    # Frequencies of time domain reflectometry, common practice.
    validity=ranges(water_content=(0.0, 0.6), frequency=(0.3e9, 1.5e9), temperature=LIQUID),
    published_error=0.013,
    discrepancy=Discrepancy(
        standard_uncertainty=0.018,
        wet_uncertainty=0.03,
        reason="0.013 or less over the authors' eleven sites, widened for soils they had not seen",
    ),
)  # fmt: skip
