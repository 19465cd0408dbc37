"""Roth, Malicki and Plagge (1992): one cubic for mineral and one for organic horizons."""

from numpy.typing import ArrayLike

from models.mixing.empirical.practice import (
    MINERAL_ORGANIC_MATTER,
    ORGANIC_MATTER,
    TDR_FREQUENCY,
    UNFROZEN,
)
from models.mixing.family import Discrepancy, MixingModel
from models.numerics.cubic import IncreasingCubic
from models.relation import Array, Citation, ranges

MINERAL = IncreasingCubic(-0.0728, 0.0448, -0.00195, 3.61e-5)
# The constant is sometimes remembered with a minus; with the plus the curve follows a
# refractive mixture of peat within 0.02 from Ka 10 up.
ORGANIC = IncreasingCubic(0.0233, 0.0285, -4.31e-4, 3.04e-6)


def mineral_to_water_content(permittivity: ArrayLike, /) -> Array:
    """Water content of a mineral horizon.

    permittivity: elementwise, apparent.

    The cubic turns steep above Ka 30 and gives 0.91 m3/m3 at 40.
    """
    return MINERAL(permittivity)


def mineral_to_permittivity(water_content: ArrayLike, /) -> Array:
    """Apparent permittivity of a mineral horizon.

    water_content: elementwise, m3/m3.
    """
    return MINERAL.inverse(water_content)


def organic_to_water_content(permittivity: ArrayLike, /) -> Array:
    """Water content of an organic horizon.

    permittivity: elementwise, apparent.

    Too wet at the dry end: 0.08 m3/m3 at Ka 2.
    """
    return ORGANIC(permittivity)


def organic_to_permittivity(water_content: ArrayLike, /) -> Array:
    """Apparent permittivity of an organic horizon.

    water_content: elementwise, m3/m3.
    """
    return ORGANIC.inverse(water_content)


SOURCE = Citation(
    authors="Roth, C. H.; Malicki, M. A.; Plagge, R.",
    year=1992,
    title="Empirical evaluation of the relationship between soil dielectric constant and "
    "volumetric water content as the basis for calibrating soil moisture measurements by TDR",
    where="Journal of Soil Science 43(1), 1-13",
    doi="10.1111/j.1365-2389.1992.tb00115.x",
    note="coefficients from a secondary copy; the published error and the ends from memory",
)

ROTH_1992_MINERAL = MixingModel(
    key="roth-1992-mineral",
    title="Empirical cubic for mineral horizons",
    equation=f"theta = {MINERAL.written('Ka')}",
    to_water_content=mineral_to_water_content,
    to_permittivity=mineral_to_permittivity,
    permittivity="apparent",
    soils="mineral",
    published_error=0.015,
    discrepancy=Discrepancy(
        standard_uncertainty=0.02,
        wet_uncertainty=0.04,
        reason="0.015 m3/m3 over its own eleven horizons; a little more for others",
    ),
    validity=ranges(
        apparent_permittivity=(2.0, 30.0),
        water_content=(0.0, 0.49),
        frequency=TDR_FREQUENCY,
        temperature=UNFROZEN,
        organic_matter=MINERAL_ORGANIC_MATTER,
    ),
    source=SOURCE,
)

ROTH_1992_ORGANIC = MixingModel(
    key="roth-1992-organic",
    title="Empirical cubic for organic horizons",
    equation=f"theta = {ORGANIC.written('Ka')}",
    to_water_content=organic_to_water_content,
    to_permittivity=organic_to_permittivity,
    permittivity="apparent",
    soils="organic",
    published_error=0.035,
    discrepancy=Discrepancy(
        standard_uncertainty=0.04,
        reason="0.035 m3/m3 over its own seven horizons; covers the doubt about its constant",
    ),
    validity=ranges(
        apparent_permittivity=(3.0, 60.0),
        water_content=(0.1, 0.84),
        frequency=TDR_FREQUENCY,
        temperature=UNFROZEN,
        organic_matter=ORGANIC_MATTER,
    ),
    source=SOURCE,
)
