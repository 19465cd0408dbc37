"""Wyman and Ingalls (1938): the static permittivity that soil work has used since."""

import numpy as np
from numpy.polynomial.polynomial import polyval
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column, ranges
from models.water.blocks import in_blocks
from models.water.family import Parts, WaterModel
from models.water.relaxation import without_relaxation

AT_25 = 78.54
CHANGE = (1.0, -4.579e-3, 1.19e-5, -2.8e-8)
"""Rising powers of Cel above 25; copies with 1.9e-5 for the square are wrong."""


@np.errstate(all="ignore")
def static_permittivity(temperature: ArrayLike) -> Array:
    """Static permittivity of pure water.

    temperature: elementwise, Cel, 0 to 100.

    0.13 to 0.25 above the international reference from 0 to 60 Cel.
    """
    return column(AT_25 * polyval(column(temperature) - 25, CHANGE))


@in_blocks
def parts(frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike = 0.0) -> Parts:
    """Static permittivity and the loss by conduction alone.

    frequency: elementwise, Hz. temperature: elementwise, Cel, 0 to 100.
    conductivity_25: elementwise, S/m at 25 Cel.
    """
    return without_relaxation(
        static_permittivity(temperature), frequency, temperature, conductivity_25
    )


WYMAN_INGALLS_1938 = WaterModel(
    key="wyman-ingalls-1938",
    title="Static permittivity as in handbooks, usual in soil work",
    equation="eps' = 78.54 (1 - 4.579e-3 d + 1.19e-5 d^2 - 2.8e-8 d^3), d = T - 25; "
    "eps'' = sigma_w / (2 pi f eps_0): no relaxation",
    parts=parts,
    static=static_permittivity,
    static_uncertainty=0.17,
    static_departure=0.25,
    validity=ranges(temperature=(0.0, 100.0), frequency=(1e6, 1.5e9)),
    source=Citation(
        authors="Wyman, J.; Ingalls, E. N.",
        year=1938,
        title="The dielectric constant of deuterium oxide",
        where="Journal of the American Chemical Society 60(5), 1182-1184; the equation as in "
        "Weast, Handbook of Chemistry and Physics",
        note="coefficients read in seven independent copies; title, journal and range from memory; "
        "upper frequency ours: eps' of pure water at 20 Cel is 0.33 % below static at 1 GHz, "
        "0.74 % at 1.5 GHz",
    ),
)
