"""Kellner and Lundin (2001): one cubic for peat."""

from numpy.typing import ArrayLike

from models.mixing.empirical.practice import ORGANIC_MATTER, TDR_FREQUENCY, UNFROZEN
from models.mixing.family import Discrepancy, MixingModel
from models.numerics.cubic import IncreasingCubic
from models.relation import Array, Citation, ranges

CURVE = IncreasingCubic(3.9e-2, 3.17e-2, -4.5e-4, 2.6e-6)


def to_water_content(permittivity: ArrayLike, /) -> Array:
    """Water content of peat.

    permittivity: elementwise, apparent.

    Too wet at the dry end: 0.07 m3/m3 in air.
    """
    return CURVE(permittivity)


def to_permittivity(water_content: ArrayLike, /) -> Array:
    """Apparent permittivity of peat.

    water_content: elementwise, m3/m3.
    """
    return CURVE.inverse(water_content)


KELLNER_LUNDIN_2001 = MixingModel(
    key="kellner-lundin-2001",
    title="Empirical cubic for peat",
    equation=f"theta = {CURVE.written('Ka')}",
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="apparent",
    soils="organic",
    published_error=0.03,
    discrepancy=Discrepancy(
        standard_uncertainty=0.05,
        reason="about 0.03 m3/m3 over its own peats; peats differ in density and decay",
    ),
    validity=ranges(
        apparent_permittivity=(3.5, 70.0),  # from memory
        water_content=(0.15, 0.94),
        frequency=TDR_FREQUENCY,
        temperature=UNFROZEN,
        organic_matter=ORGANIC_MATTER,
    ),
    source=Citation(
        authors="Kellner, E.; Lundin, L.-C.",
        year=2001,
        title="Calibration of time domain reflectometry for water content in peat soil",
        where="Nordic Hydrology 32(4-5), 315-332",
        note="coefficients and published error from memory",
    ),
)
