"""Mualem and Friedman (1991): conduction follows the same tortuous pores as flow."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, Citation, Parameter, Range, column, ranges
from models.salinity.family import (
    BELOW_SURFACE,
    DRIEST,
    TOO_DRY,
    Discrepancy,
    Marks,
    PoreWaterModel,
    above_zero,
    marks,
)
from models.salinity.inputs import POROSITY, SURFACE_CONDUCTIVITY, WATER_CONTENT


@np.errstate(all="ignore")
def to_pore_water(
    bulk_conductivity: ArrayLike,
    /,
    *,
    water_content: ArrayLike,
    porosity: ArrayLike,
    immobile_water_content: ArrayLike,
    exponent: ArrayLike,
    surface_conductivity: ArrayLike,
) -> Array:
    """Conductivity of the pore water at 25 Cel, elementwise, S/m.

    water_content, porosity, immobile_water_content: m3/m3; NaN where the first two are not
        above the third. surface_conductivity: S/m; a soil that conducts less gives a value
        below zero.
    """
    share = _share(water_content, porosity, immobile_water_content, exponent)
    return (column(bulk_conductivity) - column(surface_conductivity)) / share


@np.errstate(all="ignore")
def to_bulk(
    pore_water_conductivity: ArrayLike,
    /,
    *,
    water_content: ArrayLike,
    porosity: ArrayLike,
    immobile_water_content: ArrayLike,
    exponent: ArrayLike,
    surface_conductivity: ArrayLike,
) -> Array:
    """Conductivity of the soil at 25 Cel, elementwise, S/m; the exact inverse."""
    share = _share(water_content, porosity, immobile_water_content, exponent)
    return column(pore_water_conductivity) * share + column(surface_conductivity)


def _share(
    water_content: ArrayLike, porosity: ArrayLike, immobile: ArrayLike, exponent: ArrayLike
) -> Array:
    """Bulk over pore-water conductivity: of saturated soil without immobile water, phi^1.5."""
    mobile = above_zero(column(water_content) - column(immobile))
    pores = above_zero(column(porosity) - column(immobile))
    return mobile ** (column(exponent) + 2) / pores


def gates(
    bulk_conductivity: ArrayLike,
    /,
    *,
    water_content: ArrayLike,
    immobile_water_content: ArrayLike,
    surface_conductivity: ArrayLike,
    **_others: Any,
) -> Marks:
    """Water content below 0.05, or all of it immobile; no more conduction than the surface's."""
    theta = column(water_content)
    return marks(bulk_conductivity, {
        TOO_DRY: (theta < DRIEST) | (theta <= column(immobile_water_content)),
        BELOW_SURFACE: column(bulk_conductivity) <= column(surface_conductivity),
    })  # fmt: skip


MUALEM_FRIEDMAN_1991 = PoreWaterModel(
    key="mualem-friedman-1991",
    title="Conduction through the pores that flow uses",
    equation="sigma_b = sigma_w (theta - theta_0)^(beta + 2) / (phi - theta_0) + sigma_s",
    source=Citation(
        authors="Mualem, Y.; Friedman, S. P.",
        year=1991,
        title="Theoretical prediction of electrical conductivity in saturated and unsaturated soil",
        where="Water Resources Research 27(10), 2771-2777",
        doi="10.1029/91WR01095",
        note="equation and citation from memory; saturated it is phi^1.5, as that of Archie "
        "(1942) with m = 1.5",
    ),
    to_pore_water=to_pore_water,
    to_bulk=to_bulk,
    at="25 Cel",
    gates=gates,
    parameters=(
        WATER_CONTENT,
        POROSITY,
        Parameter(
            name="immobile_water_content",
            meaning="theta_0, water held so tightly that it does not conduct, m3/m3; 0 in coarse "
            "soils",
            range=Range(0.0, 0.4), default=0.0, default_u=0.01,
        ),
        Parameter(
            name="exponent",
            meaning="beta, of the tortuosity",
            range=Range(-1.0, 3.0), default=0.5, default_u=0.1,
        ),
        SURFACE_CONDUCTIVITY,
    ),
    validity=ranges(water_content=(0.05, 0.6), clay=(0.0, 0.3)),
    published_error="not stated",
    discrepancy=Discrepancy(
        sand=0.15, loam=0.30, clay=0.45,
        reason="no published figure, ours: the spread between models for one reading in a loam",
        floor=0.03,
    ),
)  # fmt: skip
