"""Waxman and Smits (1968): the exchangeable ions of clay conduct in parallel with the water.

Their charge is counted per volume of pores, and the conductance of a charge grows with the
conductivity of the water it is in.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from models.numerics.inverse import increasing_inverse
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
from models.salinity.inputs import (
    CEMENTATION_EXPONENT,
    PARTICLE_DENSITY,
    POROSITY,
    SATURATION_EXPONENT,
    WATER_CONTENT,
)

CONDUCTANCE, DEFICIT, SCALE = 4.6, 0.6, 1.3
"""(S/m)/(meq/cm3), 1, S/m: a charge conducts 4.6 (1 - 0.6 exp(-sigma_w / 1.3))."""
GRAMS, HUNDRED = 1e-3, 100.0
"""g/cm3 in kg/m3; cmol/kg is meq in a hundred grams."""


def equivalent_conductance(pore_water_conductivity: ArrayLike) -> Array:
    """Conductance B of a unit of charge, elementwise, (S/m)/(meq/cm3); conductivity in S/m."""
    return CONDUCTANCE * (1 - DEFICIT * np.exp(-column(pore_water_conductivity) / SCALE))


@np.errstate(all="ignore")
def charge_of_pores(
    cation_exchange_capacity: ArrayLike, porosity: ArrayLike, particle_density: ArrayLike
) -> Array:
    """Charge Q_v on the solids per volume of pores, elementwise, meq/cm3.

    cation_exchange_capacity: cmol/kg, the same number as meq/100 g. particle_density: kg/m3.
    """
    phi, density = above_zero(porosity), GRAMS * column(particle_density)
    return column(cation_exchange_capacity) * density * (1 - phi) / (HUNDRED * phi)


@np.errstate(all="ignore")
def to_pore_water(bulk_conductivity: ArrayLike, /, **soil: Any) -> Array:
    """Conductivity of the pore water at 25 Cel, elementwise, S/m; soil as in ``to_bulk``.

    Below zero where the charges alone would conduct better than the soil does: what is left then.
    """
    clay = _shaly(**soil)
    in_pores = column(bulk_conductivity) / clay.share
    in_pores, charge = np.broadcast_arrays(in_pores, clay.charge)
    found = increasing_inverse(
        lambda sigma: sigma + charge * equivalent_conductance(sigma), in_pores, 0.0, in_pores
    )
    left = in_pores - charge * equivalent_conductance(0.0)
    return np.where(left < 0.0, left, found)


@np.errstate(all="ignore")
def to_bulk(pore_water_conductivity: ArrayLike, /, **soil: Any) -> Array:
    """Conductivity of the soil at 25 Cel, elementwise, S/m; NaN for water below zero.

    water_content, porosity: m3/m3; NaN at and below zero. particle_density: kg/m3.
    cation_exchange_capacity: cmol/kg. cementation_exponent, saturation_exponent: m and n.
    """
    clay, sigma = _shaly(**soil), column(pore_water_conductivity)
    bulk = clay.share * (sigma + clay.charge * equivalent_conductance(sigma))
    return np.where(sigma >= 0, bulk, np.nan)


@dataclass(frozen=True, slots=True)
class _Shaly:
    """Bulk over pore-water conductivity without clay; charge per volume of water, meq/cm3."""

    share: Array
    charge: Array


def _shaly(
    *,
    water_content: ArrayLike,
    porosity: ArrayLike,
    particle_density: ArrayLike,
    cation_exchange_capacity: ArrayLike,
    cementation_exponent: ArrayLike,
    saturation_exponent: ArrayLike,
) -> _Shaly:
    phi = above_zero(porosity)
    saturation = above_zero(water_content) / phi
    charge = charge_of_pores(cation_exchange_capacity, phi, particle_density)
    filled = saturation ** column(saturation_exponent)
    return _Shaly(phi ** column(cementation_exponent) * filled, charge / saturation)


@np.errstate(all="ignore")
def gates(bulk_conductivity: ArrayLike, /, *, water_content: ArrayLike, **soil: Any) -> Marks:
    """Water content below 0.05; no more conduction than that of the charges in pure water."""
    clay = _shaly(water_content=water_content, **soil)
    alone = clay.share * clay.charge * equivalent_conductance(0.0)
    return marks(bulk_conductivity, {
        TOO_DRY: column(water_content) < DRIEST,
        BELOW_SURFACE: column(bulk_conductivity) <= alone,
    })  # fmt: skip


WAXMAN_SMITS_1968 = PoreWaterModel(
    key="waxman-smits-1968",
    title="Powers of porosity and saturation, with the charge of clay",
    equation="sigma_b = phi^m S^n (sigma_w + B Q_v / S), B = 4.6 (1 - 0.6 exp(-sigma_w / 1.3)), "
    "Q_v = CEC rho_s (1 - phi) / (100 phi), sigma in S/m, CEC in cmol/kg, rho_s in g/cm3",
    source=Citation(
        authors="Waxman, M. H.; Smits, L. J. M.",
        year=1968,
        title="Electrical conductivities in oil-bearing shaly sands",
        where="Society of Petroleum Engineers Journal 8(2), 107-122",
        doi="10.2118/1863-A",
        note="equation, coefficients of B and citation from memory; a later form of B for 25 Cel "
        "is 2.3 times lower at 0.4 S/m",
    ),
    to_pore_water=to_pore_water,
    to_bulk=to_bulk,
    at="25 Cel",
    gates=gates,
    parameters=(
        WATER_CONTENT,
        POROSITY,
        PARTICLE_DENSITY,
        Parameter(
            name="cation_exchange_capacity",
            meaning="charge of the exchangeable ions per mass of dry soil, cmol/kg, the same "
            "number as meq/100 g",
            range=Range(0.0, 300.0),
        ),
        CEMENTATION_EXPONENT,
        SATURATION_EXPONENT,
    ),
    validity=ranges(water_content=(0.05, 0.6)),
    published_error="not stated",
    discrepancy=Discrepancy(
        sand=0.15, loam=0.40, clay=0.60,
        reason="no published figure, ours: two published forms of B differ by a factor of 2.3 at "
        "0.4 S/m",
        floor=0.03,
    ),
)  # fmt: skip
