"""Archie (1942): a power of porosity and a power of saturation; only the water conducts."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, Citation, Parameter, Range, column, ranges
from models.salinity.family import (
    DRIEST,
    TOO_DRY,
    Discrepancy,
    Marks,
    PoreWaterModel,
    above_zero,
    marks,
)
from models.salinity.inputs import (
    CEMENTATION_EXPONENT,
    POROSITY,
    SATURATION_EXPONENT,
    WATER_CONTENT,
)


@np.errstate(all="ignore")
def to_pore_water(bulk_conductivity: ArrayLike, /, **soil: Any) -> Array:
    """Conductivity of the pore water at 25 Cel, elementwise, S/m; soil as in ``to_bulk``."""
    return column(bulk_conductivity) / _share(**soil)


@np.errstate(all="ignore")
def to_bulk(pore_water_conductivity: ArrayLike, /, **soil: Any) -> Array:
    """Conductivity of the soil at 25 Cel, elementwise, S/m; the exact inverse.

    water_content, porosity: m3/m3; NaN at and below zero. cementation_exponent: m, of the
        porosity. saturation_exponent: n, of the share of it that is filled. tortuosity: a.
    """
    return column(pore_water_conductivity) * _share(**soil)


def _share(
    *,
    water_content: ArrayLike,
    porosity: ArrayLike,
    cementation_exponent: ArrayLike,
    saturation_exponent: ArrayLike,
    tortuosity: ArrayLike,
) -> Array:
    """Bulk over pore-water conductivity, phi^m S^n / a."""
    phi = above_zero(porosity)
    saturation = above_zero(water_content) / phi
    filled = saturation ** column(saturation_exponent)
    return phi ** column(cementation_exponent) * filled / above_zero(tortuosity)


def gates(bulk_conductivity: ArrayLike, /, *, water_content: ArrayLike, **_others: Any) -> Marks:
    """Water content below 0.05."""
    return marks(bulk_conductivity, {TOO_DRY: column(water_content) < DRIEST})


ARCHIE_1942 = PoreWaterModel(
    key="archie-1942",
    title="Powers of porosity and saturation",
    equation="sigma_b = sigma_w phi^m S^n / a, S = theta / phi",
    source=Citation(
        authors="Archie, G. E.",
        year=1942,
        title="The electrical resistivity log as an aid in determining some reservoir "
        "characteristics",
        where="Transactions of the AIME 146, 54-62",
        doi="10.2118/942054-G",
        note="equation and citation from memory; made for clean sands, and knows no conduction "
        "along surfaces",
    ),
    to_pore_water=to_pore_water,
    to_bulk=to_bulk,
    at="25 Cel",
    gates=gates,
    parameters=(
        WATER_CONTENT,
        POROSITY,
        CEMENTATION_EXPONENT,
        SATURATION_EXPONENT,
        Parameter(
            name="tortuosity", meaning="a, 1 unless fitted", range=Range(0.2, 5.0), default=1.0
        ),
    ),
    validity=ranges(water_content=(0.05, 0.6), clay=(0.0, 0.05)),
    published_error="not stated",
    discrepancy=Discrepancy(
        sand=0.15, loam=0.45, clay=0.70,
        reason="no published figure, ours: without surface conduction it is 1.6 times Rhoades "
        "(1989) for one reading in a loam",
        fitted=0.10, fitted_parameters=("cementation_exponent", "saturation_exponent"),
    ),
)  # fmt: skip
