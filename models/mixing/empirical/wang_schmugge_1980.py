"""Wang and Schmugge (1980): water turns from ice-like to free at a transition moisture."""

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.mixing.empirical.practice import UNFROZEN
from models.mixing.family import Discrepancy, MixingModel
from models.numerics.power import root
from models.quantity import QUANTITIES
from models.relation import Array, Citation, ComplexArray, Parameter, column, ranges

ICE = 3.2 - 0.1j
ROCK = 5.5 - 0.2j
AIR = 1.0
PERCENT = 100.0  # the paper's unit of sand and clay, from kg/kg


class Texture(NamedTuple):
    """What sand and clay decide."""

    wilting_point: Array
    shape: Array
    """The paper's gamma: share of the way from ice to water at the transition."""
    transition: Array
    """Water content above which water is free."""


def texture(sand: ArrayLike, clay: ArrayLike) -> Texture:
    """Wilting point, gamma and transition moisture.

    sand, clay: kg/kg, scalar or one per row.
    """
    wilting = 0.06774 - 0.00064 * (PERCENT * column(sand)) + 0.00478 * (PERCENT * column(clay))
    return Texture(wilting, 0.481 - 0.57 * wilting, 0.49 * wilting + 0.165)


@np.errstate(all="ignore")
def to_permittivity(
    water_content: ArrayLike, /, *, sand: ArrayLike, clay: ArrayLike, porosity: ArrayLike,
    water_permittivity: ArrayLike,
) -> Array:  # fmt: skip
    """Real permittivity of a mineral soil.

    water_content: elementwise, m3/m3; NaN below about -0.01, where the parabola turns.
    sand, clay: kg/kg; porosity: m3/m3; water_permittivity: real part; scalar or one per row.
    """
    theta, water, soil = column(water_content), column(water_permittivity), texture(sand, clay)
    turn = -(ICE.real - AIR) * soil.transition / (2 * (water - ICE.real) * soil.shape)
    theta = np.where(theta >= turn, theta, np.nan)
    return _mixture(theta, soil, column(porosity), water, ICE.real, ROCK.real).astype(float)


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike, /, *, sand: ArrayLike, clay: ArrayLike, porosity: ArrayLike,
    water_permittivity: ArrayLike,
) -> Array:  # fmt: skip
    """Water content of a mineral soil.

    permittivity: elementwise, real part; NaN just below that of the dry soil.
    sand, clay: kg/kg; porosity: m3/m3; water_permittivity: real part; scalar or one per row.
    """
    water, phi, soil = column(water_permittivity), column(porosity), texture(sand, clay)
    wetting = column(permittivity) - phi * AIR - (1 - phi) * ROCK.real
    rise = (water - ICE.real) * soil.shape
    linear = ICE.real - AIR
    # theta rise / transition * theta + linear theta = wetting, by the root that suits small rise
    bound = 2 * wetting / (linear + root(linear**2 + 4 * rise / soil.transition * wetting))
    missing = soil.transition * (ICE.real + rise - water)
    free = (wetting - missing) / (water - AIR)
    return np.where(bound > soil.transition, free, bound)


def complex_permittivity(
    water_content: ArrayLike, /, *, sand: ArrayLike, clay: ArrayLike, porosity: ArrayLike,
    water_permittivity: complex | ComplexArray,
) -> ComplexArray:  # fmt: skip
    """Permittivity eps' - j eps'' of the same soil up to 2.5 GHz, with the paper's conduction loss.

    water_content: elementwise, m3/m3, from 0.
    sand, clay: kg/kg; porosity: m3/m3; water_permittivity: eps' - j eps''; scalar or one per row.

    Above 2.5 GHz the paper leaves the conduction loss out.
    """
    theta, soil = column(water_content), texture(sand, clay)
    water = np.asarray(water_permittivity, dtype=np.complex128)
    alpha = np.minimum(PERCENT * soil.wilting_point, 26.0)
    mixed = _mixture(theta, soil, column(porosity), water, ICE, ROCK)
    return np.asarray(mixed - 1j * alpha * theta**2, dtype=np.complex128)


def _mixture(
    theta: Array, soil: Texture, porosity: Array, water: NDArray[np.inexact], ice: complex,
    rock: complex,
) -> NDArray[np.inexact]:  # fmt: skip
    bound = np.minimum(theta, soil.transition)
    film = ice + (water - ice) * (bound / soil.transition) * soil.shape
    return bound * film + (theta - bound) * water + (porosity - theta) * AIR + (1 - porosity) * rock


WANG_SCHMUGGE_1980 = MixingModel(
    key="wang-schmugge-1980",
    title="Bound and free water on either side of a transition moisture",
    equation="eps' = theta eps_x + (phi - theta) + 5.5 (1 - phi) up to theta_t, above it theta_t "
    "eps_x + (theta - theta_t) eps_w + (phi - theta) + 5.5 (1 - phi); eps_x = 3.2 + (eps_w - 3.2) "
    "gamma min(theta / theta_t, 1); theta_t = 0.165 + 0.49 W, gamma = 0.481 - 0.57 W, "
    "W = 0.06774 - 0.064 S + 0.478 C",
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="real",
    water="peyman-2007",
    soils="mineral",
    parameters=tuple(
        Parameter(
            name=name,
            meaning=QUANTITIES[name].meaning,
            range=QUANTITIES[name].gate_si,
            supplied=name == "water_permittivity",
        )
        for name in ("sand", "clay", "porosity", "water_permittivity")
    ),
    discrepancy=Discrepancy(
        standard_uncertainty=0.035,
        reason="permittivity is met within 1 to 2; that much is about 0.035 m3/m3",
    ),
    validity=ranges(
        real_permittivity=(2.5, 40.0),  # from memory
        water_content=(0.0, 0.5),  # from memory
        frequency=(1.4e9, 5.0e9),
        temperature=UNFROZEN,
    ),
    source=Citation(
        authors="Wang, J. R.; Schmugge, T. J.",
        year=1980,
        title="An empirical model for the complex dielectric permittivity of soils as a function "
        "of water content",
        where="IEEE Transactions on Geoscience and Remote Sensing GE-18(4), 288-295",
        doi="10.1109/TGRS.1980.350304",
        note="coefficients read in a public source; the authors state an error of permittivity, "
        "1 to 2 (from memory), and none of water content",
    ),
)
