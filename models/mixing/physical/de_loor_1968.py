"""De Loor (1968), as used for soils by Dobson et al. (1985): thin discs in a host of grains.

Randomly turned discs of free water, bound water and air lie among the solids, and each meets the
field of the mixture. For discs that equation is linear in the permittivity of the mixture, so
that both directions are closed.
"""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.mixing.family import Discrepancy, MixingModel
from models.mixing.phases import (
    AIR,
    FREQUENCY,
    LIQUID,
    POROSITY,
    SOLID_PERMITTIVITY,
    WATER_PERMITTIVITY,
    Numbers,
    Phases,
    positive,
)
from models.relation import Array, Citation, Parameter, Range, column, ranges


@np.errstate(all="ignore")
def mixture(discs: Phases, solid: Numbers) -> NDArray[Any]:
    """Permittivity of randomly turned discs among solids, elementwise, real or complex.

    discs: volume fraction and permittivity of each; the solids are the rest.
    """
    above = 3 * solid + 2 * sum(f * (eps - solid) for f, eps in discs)
    below = np.asarray(3 + sum(f * (solid / eps - 1) for f, eps in discs))
    return positive(np.where(below.real > 0, above / below, np.nan))


def to_permittivity(
    water_content: ArrayLike, /, *, water_permittivity: ArrayLike, porosity: ArrayLike,
    solid_permittivity: ArrayLike, bound_water_content: ArrayLike,
    bound_water_permittivity: ArrayLike,
) -> Array:  # fmt: skip
    """Real permittivity of a wet soil, elementwise.

    water_content: m3/m3, bound water included.
    """
    theta, bound = column(water_content), column(bound_water_content)
    discs = (
        (theta - bound, column(water_permittivity)),
        (bound, column(bound_water_permittivity)),
        (column(porosity) - theta, AIR),
    )
    return mixture(discs, column(solid_permittivity))


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike, /, *, water_permittivity: ArrayLike, porosity: ArrayLike,
    solid_permittivity: ArrayLike, bound_water_content: ArrayLike,
    bound_water_permittivity: ArrayLike,
) -> Array:  # fmt: skip
    """Water content, bound water included, elementwise, m3/m3; the exact inverse."""
    eps, solid = positive(column(permittivity)), column(solid_permittivity)

    def weight(disc: Array) -> Array:
        return 2 * (disc - solid) - eps * (solid / disc - 1)

    free, bound = weight(column(water_permittivity)), weight(column(bound_water_permittivity))
    air = weight(column(AIR))
    held = column(bound_water_content) * (free - bound)
    return (3 * (eps - solid) + held - column(porosity) * air) / (free - air)


DE_LOOR_1968 = MixingModel(
    key="de-loor-1968",
    title="Discs of free water, bound water and air among grains",
    equation="eps = (3 eps_s + 2 sum f_i (eps_i - eps_s)) / (3 + sum f_i (eps_s / eps_i - 1)) over "
    "free water theta - theta_b, bound water theta_b and air phi - theta",
    source=Citation(
        authors="de Loor, G. P.",
        year=1968,
        title="Dielectric properties of heterogeneous mixtures containing water",
        where="Journal of Microwave Power 3(2), 67-73",
        note="form with four components read in a public source that follows Dobson et al. (1985), "
        "and derived independently; permittivity of bound water and citation from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="real",
    water="kaatze-1989",
    parameters=(
        POROSITY,
        SOLID_PERMITTIVITY,
        Parameter(name="bound_water_content", meaning="part of the water that the surfaces hold",
                  range=Range(0.0, 0.5), default=0.0),
        Parameter(name="bound_water_permittivity", meaning="real permittivity of bound water",
                  range=Range(3.0, 80.0), default=35.0, default_u=10.0),
        WATER_PERMITTIVITY,
    ),
    validity=ranges(water_content=(0.0, 0.6), frequency=FREQUENCY, temperature=LIQUID),
    discrepancy=Discrepancy(
        standard_uncertainty=0.03,
        reason="no published figure; discs agree with measured curves to about that",
    ),
)  # fmt: skip
