"""What pore-water models need and few people know of their soil: from texture class, from clay.

Everything here is from memory: the class values are those commonly held for the coefficients of
Rhoades, Raats and Prather (1976) and of Archie (1942). An estimate is a default, never a field
value; each has the standard uncertainty it deserves.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from models.registry import Registry
from models.relation import Array, Citation, column

SOURCE = Citation(
    authors="Rhoades, J. D.; Chanduvi, F.; Lesch, S. M.",
    year=1999,
    title="Soil salinity assessment: methods and interpretation of electrical conductivity "
    "measurements",
    where="FAO Irrigation and Drainage Paper 57; saturation line of surface conduction: Corwin, "
    "D. L.; Lesch, S. M. (2005), Computers and Electronics in Agriculture 46(1-3), 11-43",
    note="from memory, coefficients and citation",
)

DECISIEMENS, PERCENT = 0.1, 100.0
"""dS/m in S/m; mass fraction in percent."""
SATURATION_SPREAD = 0.20
"""Relative standard uncertainty of a saturation percentage estimated from clay. Soils are known
in which the line is off by more than half: a measured one is worth having."""
LEAST_SURFACE = 1e-3
"""S/m, ours: the clay line crosses zero at 0.9 % clay, and no soil has no surface."""
HEAVY_CLAY = 0.35
"""kg/kg; above, the two published lines part."""


@np.errstate(invalid="ignore")
def saturation_percentage(clay: ArrayLike) -> Array:
    """Water content of the saturated paste, elementwise, kg/kg; clay: mass fraction."""
    return (0.76 * PERCENT * column(clay) + 27.25) / PERCENT


def clay_line(clay: ArrayLike) -> Array:
    """Surface conduction by the line of Rhoades et al. (1989), elementwise, S/m at 25 Cel."""
    return DECISIEMENS * (0.023 * PERCENT * column(clay) - 0.0209)


def saturation_line(saturation: ArrayLike) -> Array:
    """Surface conduction by the line of Corwin and Lesch (2005), elementwise, S/m at 25 Cel.

    saturation: water content of the saturated paste, kg/kg.
    """
    return DECISIEMENS * (0.019 * PERCENT * column(saturation) - 0.434)


def surface_conductivity(clay: ArrayLike) -> Array:
    """Conductivity of a soil along the surfaces of its solids alone, elementwise, S/m at 25 Cel.

    clay: mass fraction.

    The clay line up to 35 % clay, the mean of both lines above; where that would be a step down,
    from 35 to 40 %, it stays level. Never below 0.001 S/m.
    """
    by_clay = clay_line(clay)
    mean = (by_clay + saturation_line(saturation_percentage(clay))) / 2
    heavy = np.maximum(mean, clay_line(HEAVY_CLAY))
    return np.maximum(np.where(column(clay) > HEAVY_CLAY, heavy, by_clay), LEAST_SURFACE)


def surface_spread(clay: ArrayLike) -> Array:
    """Relative standard uncertainty of that estimate: 10 %, above 35 % clay 25 %."""
    content = column(clay)
    spread = np.where(content > HEAVY_CLAY, 0.25, 0.10)
    return np.where(np.isnan(content), np.nan, spread)


@dataclass(frozen=True, slots=True)
class Estimate:
    """A value in SI, its standard uncertainty (k = 1), and where it comes from."""

    value: float
    standard_uncertainty: float
    origin: str


@dataclass(frozen=True, slots=True, kw_only=True)
class ConductionOfClass:
    """How soils of one texture class conduct, and how far one of them may be from it (k = 1)."""

    key: str
    transmission: tuple[float, float] | None
    """Slope a and intercept b of Rhoades, Raats and Prather (1976); None: not known."""
    transmission_u: tuple[float, float] = (0.06, 0.026)
    """Spread over the loams of that paper; wider where the class was not among its soils."""
    cementation: float
    """Exponent m of Archie (1942), the middle of what is commonly held."""
    cementation_u: float
    """Of a rectangle over that range."""
    source: Citation = SOURCE


_UNSEEN = (0.2, 0.05)

CLASSES: Registry[ConductionOfClass] = Registry(
    "soil texture",
    ConductionOfClass(key="sand", transmission=(1.40, -0.05), transmission_u=_UNSEEN,
                      cementation=1.40, cementation_u=0.06),
    ConductionOfClass(key="loamy-sand", transmission=(1.40, -0.06), transmission_u=_UNSEEN,
                      cementation=1.50, cementation_u=0.06),
    ConductionOfClass(key="sandy-loam", transmission=(1.38, -0.09),
                      cementation=1.50, cementation_u=0.06),
    ConductionOfClass(key="loam", transmission=(1.35, -0.085),
                      cementation=1.65, cementation_u=0.09),
    ConductionOfClass(key="silt-loam", transmission=(1.35, -0.09),
                      cementation=1.65, cementation_u=0.09),
    # Silt and sandy clay are in none of the lists: as their neighbours, and wider.
    ConductionOfClass(key="silt", transmission=(1.35, -0.09), transmission_u=_UNSEEN,
                      cementation=1.65, cementation_u=0.15),
    ConductionOfClass(key="sandy-clay-loam", transmission=(1.60, -0.13), transmission_u=_UNSEEN,
                      cementation=1.75, cementation_u=0.09),
    ConductionOfClass(key="clay-loam", transmission=(2.13, -0.245),
                      cementation=1.85, cementation_u=0.09),
    ConductionOfClass(key="silty-clay-loam", transmission=(2.10, -0.25), transmission_u=_UNSEEN,
                      cementation=1.85, cementation_u=0.09),
    ConductionOfClass(key="sandy-clay", transmission=(2.10, -0.25), transmission_u=_UNSEEN,
                      cementation=1.90, cementation_u=0.17),
    ConductionOfClass(key="silty-clay", transmission=(2.10, -0.25), transmission_u=_UNSEEN,
                      cementation=2.00, cementation_u=0.12),
    ConductionOfClass(key="clay", transmission=(2.10, -0.25), transmission_u=_UNSEEN,
                      cementation=2.15, cementation_u=0.20),
    ConductionOfClass(key="peat", transmission=None, cementation=1.75, cementation_u=0.15),
)  # fmt: skip


CLAY = "clay"
"""Origin of what is estimated from the clay content."""
OF_CLAY: Mapping[str, Callable[[float], Array]] = {
    "surface_conductivity": surface_conductivity, "saturation_percentage": saturation_percentage,
}  # fmt: skip


def estimates(
    texture: str | None, clay: float | None, clay_u: float = 0.0
) -> Mapping[str, Estimate]:
    """What texture class and clay content make likely, by parameter or quantity name.

    texture: a key of ``models.soil.TEXTURES``. clay, clay_u: mass fraction.
    Raises UnknownName for a texture that is none.
    """
    found: dict[str, Estimate] = {}
    if texture is not None:
        own, origin = CLASSES[texture], f"texture {texture}"
        found["cementation_exponent"] = Estimate(own.cementation, own.cementation_u, origin)
        names = ("transmission_slope", "transmission_intercept")
        for name, value, u in zip(names, own.transmission or (), own.transmission_u, strict=False):
            found[name] = Estimate(value, u, origin)
    if clay is None or np.isnan(clay):
        return found
    spreads = float(surface_spread(clay)), SATURATION_SPREAD
    for (name, line), spread in zip(OF_CLAY.items(), spreads, strict=True):
        value = float(line(clay))
        whole = float(np.hypot(spread * value, effect_of_clay(name, clay, clay_u)))
        found[name] = Estimate(value, whole, CLAY)
    return found


def effect_of_clay(name: str, clay: float, clay_u: float) -> float:
    """What one standard uncertainty of the clay does to an estimate from it, signed, SI."""
    line = OF_CLAY[name]
    return float(line(clay + clay_u) - line(clay - clay_u)) / 2
