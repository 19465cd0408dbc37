"""Schaap, de Lange and Heimovaara (1997): a power of the refractive index for forest floors."""

import numpy as np
from numpy.typing import ArrayLike

from models.mixing.empirical.practice import ORGANIC_MATTER, TDR_FREQUENCY, UNFROZEN
from models.mixing.family import Discrepancy, MixingModel
from models.numerics.power import power, root, square
from models.relation import Array, Citation, column, ranges

# A second set, (0.133, 0.146, 0.885), goes about under the same name; its origin is unknown.
SLOPE, OFFSET, EXPONENT = 0.136, 0.119, 1.345


@np.errstate(all="ignore")
def to_water_content(permittivity: ArrayLike, /) -> Array:
    """Water content of an organic forest floor.

    permittivity: elementwise, apparent; NaN below 0.77, where the power has no real value.
    """
    return power(SLOPE * root(permittivity) - OFFSET, EXPONENT)


@np.errstate(all="ignore")
def to_permittivity(water_content: ArrayLike, /) -> Array:
    """Apparent permittivity of an organic forest floor.

    water_content: elementwise, m3/m3; NaN below 0.
    """
    return square((power(column(water_content), 1 / EXPONENT) + OFFSET) / SLOPE)


SCHAAP_1997 = MixingModel(
    key="schaap-1997",
    title="Power of the refractive index for organic forest floors",
    equation=f"theta = ({SLOPE} sqrt(Ka) - {OFFSET})^{EXPONENT}",
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="apparent",
    soils="organic",
    discrepancy=Discrepancy(
        standard_uncertainty=0.05,
        reason="organic layers differ by 0.03 to 0.05 m3/m3, and the coefficients are unconfirmed",
    ),
    validity=ranges(
        apparent_permittivity=(2.0, 50.0),  # from memory
        water_content=(0.03, 0.79),
        frequency=TDR_FREQUENCY,
        temperature=UNFROZEN,
        organic_matter=ORGANIC_MATTER,
    ),
    source=Citation(
        authors="Schaap, M. G.; de Lange, L.; Heimovaara, T. J.",
        year=1997,
        title="TDR calibration of organic forest floor media",
        where="Soil Technology 11(2), 205-217",
        note="coefficients from memory",
    ),
)
