"""Ledieu, De Ridder, De Clerck and Dautrebande (1986): a line in the square root of Ka."""

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

SLOPE, INTERCEPT = 0.1138, -0.1758  # some copies print 0.1788


def to_water_content(permittivity: ArrayLike, /) -> Array:
    """Water content of a mineral soil.

    permittivity: elementwise, apparent; NaN below 0.
    """
    return square_root.to_water_content(permittivity, slope=SLOPE, intercept=INTERCEPT)


def to_permittivity(water_content: ArrayLike, /) -> Array:
    """Apparent permittivity of a mineral soil.

    water_content: elementwise, m3/m3; NaN below -0.1758.
    """
    return square_root.to_permittivity(water_content, slope=SLOPE, intercept=INTERCEPT)


LEDIEU_1986 = MixingModel(
    key="ledieu-1986",
    title="Line in the refractive index for mineral soils",
    equation=f"theta = {SLOPE} sqrt(Ka) - {-INTERCEPT}",
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="apparent",
    soils="mineral",
    published_error=0.02,
    discrepancy=Discrepancy(
        standard_uncertainty=0.025,
        reason="fitted to one loam; a little over the scatter of other mineral soils about it",
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
        authors="Ledieu, J.; De Ridder, P.; De Clerck, P.; Dautrebande, S.",
        year=1986,
        title="A method of measuring soil moisture by time-domain reflectometry",
        where="Journal of Hydrology 88(3-4), 319-328",
        doi="10.1016/0022-1694(86)90097-1",
        note="coefficients from a secondary copy; the published error, 0.01 to 0.02, from memory",
    ),
)
