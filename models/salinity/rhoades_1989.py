"""Rhoades, Manteghi, Shouse and Alves (1989): mobile water beside immobile water and surfaces.

sigma_b = (f_s + f_i)^2 sigma_w sigma_s / (f_s sigma_w + f_i sigma_s) + (theta - f_i) sigma_w,
with f_s the volume of solids, f_i that of the immobile water, and one sigma_w in both waters. For
sigma_w this is a quadratic equation whose roots have a negative product: just one is positive.
"""

from dataclasses import dataclass
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
    BULK_DENSITY,
    CLAY,
    PARTICLE_DENSITY,
    SURFACE,
    WATER_CONTENT,
)
from models.salinity.texture_defaults import surface_conductivity as of_clay

IMMOBILE_SLOPE, IMMOBILE_INTERCEPT = 0.639, 0.011
"""Immobile water content from water content; all of the water is immobile below 0.0305."""


@dataclass(frozen=True, slots=True)
class _Paths:
    """Volume fractions of solids, immobile and mobile water; surface conductivity, S/m."""

    solid: Array
    immobile: Array
    mobile: Array
    surface: Array

    @property
    def series(self) -> Array:
        """(f_s + f_i)^2 sigma_s: what the path through solids and immobile water weighs."""
        return (self.solid + self.immobile) ** 2 * self.surface


@np.errstate(all="ignore")
def to_pore_water(bulk_conductivity: ArrayLike, /, **soil: Any) -> Array:
    """Conductivity of the pore water at 25 Cel, elementwise, S/m; soil as in ``to_bulk``.

    The root is taken in the form that cancels nothing. NaN for no water, and in a soil without
    mobile water from the bulk conductivity on that no pore water reaches.
    """
    along, measured = _paths(**soil), column(bulk_conductivity)
    square = along.solid * along.mobile
    linear = along.series + (along.immobile * along.mobile * along.surface) - along.solid * measured
    constant = along.immobile * along.surface * measured
    root = np.sqrt(linear**2 + 4 * square * constant)
    answer = np.where(linear > 0, 2 * constant / (linear + root), (root - linear) / (2 * square))
    return np.where(np.isfinite(answer), answer, np.nan)


@np.errstate(all="ignore")
def to_bulk(pore_water_conductivity: ArrayLike, /, **soil: Any) -> Array:
    """Conductivity of the soil at 25 Cel, elementwise, S/m.

    water_content: m3/m3; NaN at and below zero. clay: mass fraction. bulk_density,
        particle_density: kg/m3.
    solid_content, immobile_share (of the water), surface_conductivity (S/m): in place of
        bulk_density / particle_density, of 0.639 theta + 0.011, of what clay makes likely.
    """
    along, sigma = _paths(**soil), column(pore_water_conductivity)
    through = along.solid * sigma + along.immobile * along.surface
    return along.series * sigma / through + along.mobile * sigma


def _paths(
    *,
    water_content: ArrayLike,
    clay: ArrayLike,
    bulk_density: ArrayLike,
    particle_density: ArrayLike,
    solid_content: ArrayLike | None = None,
    immobile_share: ArrayLike | None = None,
    surface_conductivity: ArrayLike | None = None,
) -> _Paths:
    theta = above_zero(water_content)
    if solid_content is None:
        solid_content = column(bulk_density) / column(particle_density)
    if immobile_share is None:
        immobile = np.minimum(IMMOBILE_SLOPE * theta + IMMOBILE_INTERCEPT, theta)
    else:
        immobile = column(immobile_share) * theta
    if surface_conductivity is None:
        surface_conductivity = of_clay(clay)
    return _Paths(
        column(solid_content), immobile, theta - immobile, above_zero(surface_conductivity)
    )


def gates(bulk_conductivity: ArrayLike, /, *, water_content: ArrayLike, **_others: Any) -> Marks:
    """Water content below 0.05: hardly any of it is mobile."""
    return marks(bulk_conductivity, {TOO_DRY: column(water_content) < DRIEST})


RHOADES_1989 = PoreWaterModel(
    key="rhoades-1989",
    title="Mobile water beside immobile water and surfaces",
    equation="sigma_b = (f_s + f_i)^2 sigma_w sigma_s / (f_s sigma_w + f_i sigma_s) + "
    "(theta - f_i) sigma_w, f_s = rho_b / rho_s, f_i = 0.639 theta + 0.011, "
    "sigma_s = 0.023 clay% - 0.0209 dS/m, at least 0.01; above 35 % clay its mean with the line of "
    "the saturated paste, 0.019 SP - 0.434, and no less than at 35 %",
    source=Citation(
        authors="Rhoades, J. D.; Manteghi, N. A.; Shouse, P. J.; Alves, W. J.",
        year=1989,
        title="Soil electrical conductivity and soil salinity: new formulations and calibrations",
        where="Soil Science Society of America Journal 53(2), 433-439",
        doi="10.2136/sssaj1989.03615995005300020020x",
        note="form of the equation read in a secondary source; coefficients and citation from "
        "memory",
    ),
    to_pore_water=to_pore_water,
    to_bulk=to_bulk,
    at="25 Cel",
    gates=gates,
    parameters=(
        WATER_CONTENT,
        CLAY,
        BULK_DENSITY,
        PARTICLE_DENSITY,
        Parameter(
            name="solid_content",
            meaning="f_s, volume fraction of the solids; bulk over particle density unless given",
            range=Range(0.01, 0.95), optional=True,
        ),
        Parameter(
            name="immobile_share",
            meaning="f_i over theta, share of the water that does not move; estimated from "
            "water content unless given",
            range=Range(0.0, 1.0), optional=True,
        ),
        Parameter(
            name="surface_conductivity",
            meaning="sigma_s, of immobile water and solids along the surfaces, at 25 Cel; "
            "estimated from clay unless given",
            range=Range(1e-6, SURFACE.high), optional=True,
        ),
    ),
    validity=ranges(water_content=(0.08, 0.6), clay=(0.0, 0.6)),
    published_error="compared by Kargas and Kerkides (2012): about 10 % in sands, 10 to 60 % in "
    "other soils",
    discrepancy=Discrepancy(
        sand=0.10, loam=0.30, clay=0.45,
        reason="10 % in sands and 10 to 60 % in other soils as reported; holds what the "
        "estimates from clay and water content leave open",
        floor=0.03,
        fitted=0.10, fitted_parameters=("immobile_share", "surface_conductivity"),
    ),
)  # fmt: skip
