"""Malicki and Walczak (1999): bulk conductivity over permittivity, with a slope set by sand."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column, ranges
from models.salinity.family import (
    BELOW_SURFACE,
    OFFSET_TOO_CLOSE,
    TOO_DRY,
    Discrepancy,
    Marks,
    PoreWaterModel,
    above_zero,
    marks,
)
from models.salinity.inputs import REAL_PERMITTIVITY, SAND

PERMITTIVITY, CONDUCTIVITY = 6.2, 0.008
"""Where the lines of all salinities meet: 1, and S/m (0.08 dS/m)."""
WITHOUT_SAND, WITH_SAND = 0.0057, 0.0071
"""Slope over pore-water conductivity, and its rise per mass fraction of sand."""
DRIEST = 0.12
"""m3/m3, where the lines begin."""
NEAREST = 3.0
"""Of a permittivity to where the lines meet."""


@np.errstate(all="ignore")
def to_pore_water(
    bulk_conductivity: ArrayLike, /, *, real_permittivity: ArrayLike, sand: ArrayLike
) -> Array:
    """Conductivity of the pore water at 25 Cel, elementwise, S/m.

    sand: mass fraction. NaN for a permittivity that is not above 6.2; below zero for a soil that
    conducts less than 0.008 S/m.
    """
    return (column(bulk_conductivity) - CONDUCTIVITY) / _rise(real_permittivity, sand)


@np.errstate(all="ignore")
def to_bulk(
    pore_water_conductivity: ArrayLike, /, *, real_permittivity: ArrayLike, sand: ArrayLike
) -> Array:
    """Conductivity of the soil at 25 Cel, elementwise, S/m; the exact inverse."""
    return column(pore_water_conductivity) * _rise(real_permittivity, sand) + CONDUCTIVITY


def _rise(real_permittivity: ArrayLike, sand: ArrayLike) -> Array:
    """Bulk conductivity per pore-water conductivity, above where the lines meet."""
    slope = WITHOUT_SAND + WITH_SAND * column(sand)
    return above_zero(column(real_permittivity) - PERMITTIVITY) * slope


def gates(
    bulk_conductivity: ArrayLike,
    /,
    *,
    water_content: ArrayLike,
    real_permittivity: ArrayLike,
    **_others: Any,
) -> Marks:
    """Water content below 0.12; permittivity below 9.2; bulk conductivity up to 0.008 S/m."""
    return marks(bulk_conductivity, {
        TOO_DRY: column(water_content) < DRIEST,
        OFFSET_TOO_CLOSE: column(real_permittivity) - PERMITTIVITY < NEAREST,
        BELOW_SURFACE: column(bulk_conductivity) <= CONDUCTIVITY,
    })  # fmt: skip


MALICKI_WALCZAK_1999 = PoreWaterModel(
    key="malicki-walczak-1999",
    title="Salinity index of bulk conductivity over permittivity",
    equation="sigma_w = (sigma_b - 0.08 dS/m) / ((eps' - 6.2) (0.0057 + 0.000071 sand%))",
    source=Citation(
        authors="Malicki, M. A.; Walczak, R. T.",
        year=1999,
        title="Evaluating soil salinity status from bulk electrical conductivity and permittivity",
        where="European Journal of Soil Science 50(3), 505-514",
        doi="10.1046/j.1365-2389.1999.00245.x",
        note="limits of water content read in a public source; coefficients from memory, though "
        "at pure sand they give the permittivity of water of Hilhorst (2000) to 1 %",
    ),
    to_pore_water=to_pore_water,
    to_bulk=to_bulk,
    at="25 Cel",
    gates=gates,
    parameters=(REAL_PERMITTIVITY, SAND),
    validity=ranges(water_content=(0.2, 0.6)),
    published_error="not stated; the index is meant for water contents above 0.2",
    discrepancy=Discrepancy(
        sand=0.25, loam=0.25, clay=0.25,
        reason="no published figure, ours: for one loam it is a factor of 2 above models with "
        "surface conduction",
        floor=0.03,
    ),
)  # fmt: skip
