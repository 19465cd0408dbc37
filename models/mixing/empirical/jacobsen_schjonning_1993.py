"""Jacobsen and Schjonning (1993): a cubic for mineral soils, without and with their texture."""

from numpy.typing import ArrayLike

from models.mixing.empirical.practice import (
    MINERAL_CLAY,
    MINERAL_ORGANIC_MATTER,
    TDR_FREQUENCY,
    UNFROZEN,
)
from models.mixing.family import Discrepancy, MixingModel
from models.numerics.cubic import IncreasingCubic
from models.quantity import QUANTITIES
from models.relation import Array, Citation, Parameter, column, ranges

PLAIN = IncreasingCubic(-7.01e-2, 3.47e-2, -11.6e-4, 18.0e-6)
TEXTURED = IncreasingCubic(-3.41e-2, 3.45e-2, -11.4e-4, 17.1e-6)
PERCENT = 100.0  # the paper's unit of clay and organic matter, from kg/kg
G_PER_CM3 = 1e-3  # its unit of density, from kg/m3


def to_water_content(permittivity: ArrayLike, /) -> Array:
    """Water content of a mineral soil.

    permittivity: elementwise, apparent.

    The cubic turns steep above Ka 35 and gives 1.72 m3/m3 at 60.
    """
    return PLAIN(permittivity)


def to_permittivity(water_content: ArrayLike, /) -> Array:
    """Apparent permittivity of a mineral soil.

    water_content: elementwise, m3/m3.
    """
    return PLAIN.inverse(water_content)


def textured_to_water_content(
    permittivity: ArrayLike, /, *, bulk_density: ArrayLike, clay: ArrayLike,
    organic_matter: ArrayLike,
) -> Array:  # fmt: skip
    """Water content of a mineral soil of known density and texture.

    permittivity: elementwise, apparent.
    bulk_density: kg/m3; clay, organic_matter: kg/kg; scalar or one per row.
    """
    return TEXTURED(permittivity) + _texture(bulk_density, clay, organic_matter)


def textured_to_permittivity(
    water_content: ArrayLike, /, *, bulk_density: ArrayLike, clay: ArrayLike,
    organic_matter: ArrayLike,
) -> Array:  # fmt: skip
    """Apparent permittivity of the same soil.

    water_content: elementwise, m3/m3.
    bulk_density: kg/m3; clay, organic_matter: kg/kg; scalar or one per row.
    """
    return TEXTURED.inverse(column(water_content) - _texture(bulk_density, clay, organic_matter))


def _texture(bulk_density: ArrayLike, clay: ArrayLike, organic_matter: ArrayLike) -> Array:
    """What density and texture add to the water content."""
    rho = G_PER_CM3 * column(bulk_density)
    clay_percent = PERCENT * column(clay)
    organic_percent = PERCENT * column(organic_matter)
    return -3.70e-2 * rho + 7.36e-4 * clay_percent + 47.7e-4 * organic_percent


SOURCE = Citation(
    authors="Jacobsen, O. H.; Schjonning, P.",
    year=1993,
    title="A laboratory calibration of time domain reflectometry for soil water measurement "
    "including effects of bulk density and texture",
    where="Journal of Hydrology 151(2-4), 147-157",
    doi="10.1016/0022-1694(93)90233-Y",
    note="coefficients from a secondary copy; the published error and the ends from memory",
)
RANGES = ranges(
    apparent_permittivity=(2.5, 35.0),
    water_content=(0.0, 0.49),
    frequency=TDR_FREQUENCY,
    temperature=UNFROZEN,
    clay=MINERAL_CLAY,
    organic_matter=MINERAL_ORGANIC_MATTER,
)

JACOBSEN_SCHJONNING_1993 = MixingModel(
    key="jacobsen-schjonning-1993",
    title="Empirical cubic for Danish mineral soils",
    equation=f"theta = {PLAIN.written('Ka')}",
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="apparent",
    soils="mineral",
    published_error=0.014,
    discrepancy=Discrepancy(
        standard_uncertainty=0.022,
        wet_uncertainty=0.04,
        reason="0.014 m3/m3 over its own ten soils; other mineral soils scatter more",
    ),
    validity=RANGES,
    source=SOURCE,
)

JACOBSEN_SCHJONNING_1993_TEXTURE = MixingModel(
    key="jacobsen-schjonning-1993-texture",
    title="Empirical cubic for mineral soils, with density, clay and organic matter",
    equation=f"theta = {TEXTURED.written('Ka')} - 0.037 rho_b + 7.36e-4 C + 47.7e-4 OM, "
    "rho_b in g/cm3, C and OM in %",
    to_water_content=textured_to_water_content,
    to_permittivity=textured_to_permittivity,
    permittivity="apparent",
    soils="mineral",
    parameters=tuple(
        Parameter(name=name, meaning=QUANTITIES[name].meaning, range=QUANTITIES[name].gate_si)
        for name in ("bulk_density", "clay", "organic_matter")
    ),
    published_error=0.012,
    discrepancy=Discrepancy(
        standard_uncertainty=0.018,
        wet_uncertainty=0.04,
        reason="0.012 m3/m3 over its own ten soils; texture explains part of what others add",
    ),
    validity=RANGES,
    source=SOURCE,
)
