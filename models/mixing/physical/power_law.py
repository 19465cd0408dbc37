"""Lichtenecker and Rother (1931), Birchak et al. (1974): phases in a power law."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.mixing.family import Discrepancy, MixingModel
from models.mixing.phases import (
    FREQUENCY,
    LIQUID,
    POROSITY,
    SOLID_PERMITTIVITY,
    WATER_APPARENT_PERMITTIVITY,
    Numbers,
    Phases,
    soil_phases,
)
from models.relation import Array, Citation, Parameter, Range, column, ranges


@np.errstate(all="ignore")
def mixture(phases: Phases, exponent: ArrayLike) -> NDArray[Any]:
    """Permittivity of any number of phases, elementwise, real or complex.

    exponent: -1 to 1. 1 and -1 are layers along and across the field, 1/3 is Looyenga's law,
        0 Lichtenecker's logarithmic law.
    """
    return lowered(sum(f * lifted(eps, exponent) for f, eps in phases), exponent)


def to_permittivity(
    water_content: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    exponent: ArrayLike,
) -> Array:
    """Apparent permittivity of a wet soil, elementwise."""
    phases = soil_phases(
        column(water_content),
        column(porosity),
        column(solid_permittivity),
        column(water_permittivity),
    )
    return mixture(phases, exponent)


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    exponent: ArrayLike,
) -> Array:
    """Water content of a soil of known porosity, elementwise, m3/m3; the exact inverse."""
    dry = (1 - column(porosity)) * lifted(column(solid_permittivity), exponent)
    wetting = lifted(column(water_permittivity), exponent)
    return (lifted(column(permittivity), exponent) - dry) / wetting


def lifted(permittivity: Numbers, exponent: ArrayLike) -> NDArray[Any]:
    """(eps^a - 1) / a, which is ln eps at a = 0, elementwise.

    What is linear in the fractions. Air lifts to nothing, and no digit is lost as a goes to 0.
    """
    a, logarithm = column(exponent), np.log(permittivity)
    safe = np.where(a == 0, 1.0, a)
    return np.where(a == 0, logarithm, np.expm1(safe * logarithm) / safe)


def lowered(height: Numbers, exponent: ArrayLike) -> NDArray[Any]:
    """The permittivity that lifts to that height; NaN where none does."""
    a = column(exponent)
    safe = np.where(a == 0, 1.0, a)
    return np.exp(np.where(a == 0, height, np.log1p(safe * height) / safe))


POWER_LAW = MixingModel(
    key="power-law",
    title="Power law of three phases",
    equation="Ka^a = (1 - phi) eps_s^a + theta eps_w^a + (phi - theta); a = 0: the same of ln Ka",
    source=Citation(
        authors="Lichtenecker, K.; Rother, K.",
        year=1931,
        title="Die Herleitung des logarithmischen Mischungsgesetzes aus allgemeinen Prinzipien der"
              " stationaeren Stroemung",
        where="Physikalische Zeitschrift 32, 255-260",
        note="equation confirmed in a secondary source; citation from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="apparent",
    water="kaatze-1989",
    parameters=(
        POROSITY,
        SOLID_PERMITTIVITY,
        Parameter(name="exponent", meaning="geometry of the mixture, between layers across (-1) and"
                  " along (1) the field", range=Range(-1.0, 1.0), default=0.5, default_u=0.04),
        WATER_APPARENT_PERMITTIVITY,
    ),
    validity=ranges(water_content=(0.0, 0.6), frequency=FREQUENCY, temperature=LIQUID),
    discrepancy=Discrepancy(
        standard_uncertainty=0.012,
        reason="what is left once porosity, solid permittivity and exponent are propagated",
    ),
)  # fmt: skip
