"""Topp, Davis and Annan (1980): one cubic for mineral soils."""

import numpy as np
from numpy.typing import ArrayLike

from models.mixing.empirical.practice import (
    MINERAL_CLAY,
    MINERAL_ORGANIC_MATTER,
    TDR_FREQUENCY,
    UNFROZEN,
)
from models.mixing.family import Discrepancy, MixingModel
from models.numerics.cubic import IncreasingCubic
from models.relation import Array, Citation, column, ranges

CURVE = IncreasingCubic(-5.3e-2, 2.92e-2, -5.5e-4, 4.3e-6)  # some copies print 2.93e-2
AS_PRINTED = (3.03, 9.3, 146.0, -76.7)  # permittivity, rising powers of water content


def to_water_content(permittivity: ArrayLike, /) -> Array:
    """Water content of a mineral soil.

    permittivity: elementwise, apparent.
    """
    return CURVE(permittivity)


def to_permittivity(water_content: ArrayLike, /) -> Array:
    """Apparent permittivity of a mineral soil.

    water_content: elementwise, m3/m3.

    The inverse of the cubic above. The paper's own cubic for this direction is a second fit,
    and off by up to 0.03 m3/m3 there and back.
    """
    return CURVE.inverse(water_content)


@np.errstate(over="ignore", invalid="ignore")
def permittivity_as_printed(water_content: ArrayLike, /) -> Array:
    """Apparent permittivity by the paper's own cubic for this direction, for comparison.

    water_content: elementwise, m3/m3.
    """
    theta = column(water_content)
    c0, c1, c2, c3 = AS_PRINTED
    return c0 + theta * (c1 + theta * (c2 + theta * c3))


TOPP_1980 = MixingModel(
    key="topp-1980",
    title="Empirical cubic for mineral soils",
    equation=f"theta = {CURVE.written('Ka')}",
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="apparent",
    soils="mineral",
    published_error=0.013,
    discrepancy=Discrepancy(
        standard_uncertainty=0.022,
        wet_uncertainty=0.03,
        reason="0.013 m3/m3 over four laboratory soils; other mineral soils scatter more, "
        "above all when wet",
    ),
    validity=ranges(
        apparent_permittivity=(3.0, 40.0),
        water_content=(0.0, 0.55),
        frequency=TDR_FREQUENCY,
        temperature=UNFROZEN,
        clay=MINERAL_CLAY,
        organic_matter=MINERAL_ORGANIC_MATTER,
        bulk_density=(1000.0, 1700.0),  # common practice, from memory
    ),
    source=Citation(
        authors="Topp, G. C.; Davis, J. L.; Annan, A. P.",
        year=1980,
        title="Electromagnetic determination of soil water content: measurements in coaxial "
        "transmission lines",
        where="Water Resources Research 16(3), 574-582",
        equation="eq. 7",
        doi="10.1029/WR016i003p00574",
        note="coefficients read in a public source; the published error is from memory",
    ),
)
