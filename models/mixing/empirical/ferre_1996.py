"""Ferre, Rudolph and Kachanoski (1996): the line that averages water content along the rods."""

from numpy.typing import ArrayLike

from models.mixing.empirical import square_root
from models.mixing.empirical.practice import (
    MINERAL_CLAY,
    MINERAL_ORGANIC_MATTER,
    TDR_FREQUENCY,
    UNFROZEN,
)
from models.mixing.family import Discrepancy, MixingModel
from models.relation import Array, Citation, ranges

SLOPE, INTERCEPT = 0.1181, -0.1841


def to_water_content(permittivity: ArrayLike, /) -> Array:
    """Water content of a mineral soil, averaged along the rods.

    permittivity: elementwise, apparent; NaN below 0.

    Travel times add up along a probe, and this is linear in travel time: layers average exactly.
    """
    return square_root.to_water_content(permittivity, slope=SLOPE, intercept=INTERCEPT)


def to_permittivity(water_content: ArrayLike, /) -> Array:
    """Apparent permittivity of a mineral soil.

    water_content: elementwise, m3/m3; NaN below -0.1841.
    """
    return square_root.to_permittivity(water_content, slope=SLOPE, intercept=INTERCEPT)


FERRE_1996 = MixingModel(
    key="ferre-1996",
    title="Line in the refractive index that averages layers",
    equation=f"theta = {SLOPE} sqrt(Ka) - {-INTERCEPT}",
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="apparent",
    soils="mineral",
    discrepancy=Discrepancy(
        standard_uncertainty=0.025,
        reason="no error is stated with it; taken as that of the like line of Ledieu (1986)",
    ),
    validity=ranges(
        apparent_permittivity=(3.0, 40.0),  # as for other curves of mineral soils, from memory
        water_content=(0.0, 0.55),
        frequency=TDR_FREQUENCY,
        temperature=UNFROZEN,
        clay=MINERAL_CLAY,
        organic_matter=MINERAL_ORGANIC_MATTER,
    ),
    source=Citation(
        authors="Ferre, P. A.; Rudolph, D. L.; Kachanoski, R. G.",
        year=1996,
        title="Spatial averaging of water content by time domain reflectometry: implications for "
        "twin rod probes with and without dielectric coatings",
        where="Water Resources Research 32(2), 271-279",
        doi="10.1029/95WR02576",
        note="coefficients from memory",
    ),
)
