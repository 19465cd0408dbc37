"""Solids, water and air: the phases of a soil as the physical mixing models take them."""

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from models.mixing.family import Discrepancy
from models.quantity import QUANTITIES
from models.relation import Parameter, Range

Numbers = NDArray[Any] | complex
"""Scalars or arrays that broadcast, real or complex; complex permittivities are eps' - j eps''."""

Phases = Sequence[tuple[Numbers, Numbers]]
"""Volume fraction and permittivity of every phase; the fractions sum to one."""

AIR = 1.0

FREQUENCY = (0.3e9, 3e9)
"""Hz, common practice, from memory: below, interfaces polarise; above, bound water relaxes."""

LIQUID = (0.0, 60.0)
"""Cel: none of these models knows ice."""

GEOMETRY_UNKNOWN = Discrepancy(
    standard_uncertainty=0.06,
    reason="no published figure; in a loam of permittivity 10 the mixing geometries of the "
    "literature spread from 0.12 to 0.28 m3/m3",
)

_WATER = Range(10.0, 1000.0)
"""Wider than the gate of a typed value: cold water at 18 GHz, and saline water at 50 MHz."""


def soil_property(name: str, default: float | None = None, default_u: float = 0.0) -> Parameter:
    """The parameter of that name in the vocabulary, with its meaning and gate."""
    quantity = QUANTITIES[name]
    return Parameter(
        name=name, meaning=quantity.meaning, range=quantity.gate_si,
        default=default, default_u=default_u,
    )  # fmt: skip


POROSITY = soil_property("porosity")
SOLID_PERMITTIVITY = soil_property("solid_permittivity", default=4.7, default_u=0.6)
WATER_PERMITTIVITY = Parameter(
    name="water_permittivity", meaning="real part of the permittivity of the pore water",
    range=_WATER, supplied=True,
)  # fmt: skip
WATER_APPARENT_PERMITTIVITY = Parameter(
    name="water_permittivity",
    meaning="apparent permittivity of the pore water, (Re sqrt(eps_w))^2",
    range=_WATER, supplied=True,
)  # fmt: skip


def soil_phases(
    water_content: Numbers, porosity: Numbers, solid: Numbers, water: Numbers
) -> Phases:
    """Solids, water and air of a soil, elementwise.

    More water than pores leaves a negative share of air: the equations carry on smoothly, and
    whoever asked is told by a flag.
    """
    return ((1 - porosity, solid), (water_content, water), (porosity - water_content, AIR))


def spheres_in_medium(phases: Phases, medium: Numbers) -> NDArray[Any]:
    """Permittivity of spheres of every phase, each surrounded by the medium, elementwise.

    medium: permittivity around each sphere. The host gives Maxwell Garnett, the mixture itself
        Bruggeman, something between Sihvola, the extreme phase a Hashin-Shtrikman bound.

    1 / (eps + 2 m) = sum f_i / (eps_i + 2 m) says the same as
    (eps - m) / (eps + 2 m) = sum f_i (eps_i - m) / (eps_i + 2 m), and has no phase to single out.
    """
    return np.asarray(1 / sum(f / (eps + 2 * medium) for f, eps in phases) - 2 * medium)


def water_content_of_spheres(
    permittivity: Numbers, medium: Numbers, porosity: Numbers, solid: Numbers, water: Numbers
) -> NDArray[Any]:
    """Water content of a soil of spheres, each surrounded by the medium, elementwise.

    The exact inverse of ``spheres_in_medium``: water content enters linearly.
    """
    share = 1 / (permittivity + 2 * medium)
    dry = (1 - porosity) / (solid + 2 * medium) + porosity / (AIR + 2 * medium)
    wetting = 1 / (AIR + 2 * medium) - 1 / (water + 2 * medium)
    return np.asarray((dry - share) / wetting)


def positive(permittivity: Numbers) -> NDArray[Any]:
    """The same, with NaN wherever the real part is not above zero: no material there."""
    permittivity = np.asarray(permittivity)
    return np.where(permittivity.real > 0, permittivity, np.nan)
