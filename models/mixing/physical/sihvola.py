"""Sihvola (1989): one family from Maxwell Garnett over Bruggeman to the coherent potential.

Water and grains are inclusions in air, so that each of them meets surroundings of
eps_a + nu/2 (eps - eps_a): air alone for nu = 0, the mixture for nu = 2. Air as the host keeps the
surroundings above zero for every nu from 0 to 3; solids as the host would not in porous dry soil.
"""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.mixing.family import MixingModel
from models.mixing.phases import (
    AIR,
    FREQUENCY,
    GEOMETRY_UNKNOWN,
    LIQUID,
    POROSITY,
    SOLID_PERMITTIVITY,
    WATER_PERMITTIVITY,
    Numbers,
    positive,
    soil_phases,
    water_content_of_spheres,
)
from models.mixing.physical.bruggeman import real_mixture
from models.relation import Array, Citation, Parameter, Range, column, ranges


@np.errstate(all="ignore")
def two_phases(fraction: Numbers, inclusion: Numbers, host: Numbers, nu: Numbers) -> NDArray[Any]:
    """Permittivity of spheres in a host in closed form, elementwise, real or complex.

    fraction: of the inclusions, 0 to 1. nu: 0 Maxwell Garnett, 2 Bruggeman, 3 coherent potential.
    """
    contrast = inclusion - host
    b = inclusion + 2 * host - fraction * contrast * (1 + nu)
    c = 3 * fraction * host * contrast
    return np.asarray(host + 2 * c / (b + np.sqrt(b * b + 4 * nu * c)))


@np.errstate(all="ignore")
def inclusion_fraction(
    permittivity: Numbers, inclusion: Numbers, host: Numbers, nu: Numbers
) -> NDArray[Any]:
    """Fraction of the inclusions in a mixture of two phases, elementwise; the exact inverse."""
    rise, contrast = permittivity - host, inclusion - host
    felt = rise / (3 * host + (1 + nu) * rise)
    return np.asarray(felt * (inclusion + 2 * host + nu * rise) / contrast)


def to_permittivity(
    water_content: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    nu: ArrayLike,
) -> Array:
    """Real permittivity of a wet soil, elementwise."""
    share = column(nu) / 2
    phases = soil_phases(
        column(water_content),
        column(porosity),
        column(solid_permittivity),
        column(water_permittivity),
    )
    return real_mixture(phases, medium=(1 - share) * AIR, share=share)


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    nu: ArrayLike,
) -> Array:
    """Water content of a soil of known porosity, elementwise, m3/m3; the exact inverse."""
    eps = positive(column(permittivity))
    around = AIR + column(nu) / 2 * (eps - AIR)
    return water_content_of_spheres(
        eps, around, column(porosity), column(solid_permittivity), column(water_permittivity)
    )


SIHVOLA = MixingModel(
    key="sihvola",
    title="Unified mixing of water and grains in air",
    equation="(eps - 1) / (eps + 2 + nu (eps - 1)) = sum f_i (eps_i - 1) / (eps_i + 2 + "
    "nu (eps - 1)) over solids and water",
    source=Citation(
        authors="Sihvola, A. H.",
        year=1989,
        title="Self-consistency aspects of dielectric mixing theories",
        where="IEEE Transactions on Geoscience and Remote Sensing 27(4), 403-415",
        doi="10.1109/36.29560",
        note="equation confirmed in a secondary source; its use with air as the host of both other "
        "phases is ours; citation from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="real",
    water="kaatze-1989",
    parameters=(
        POROSITY,
        SOLID_PERMITTIVITY,
        Parameter(name="nu", meaning="how much of the mixture the inclusions meet around them: 0 "
                  "Maxwell Garnett, 2 Bruggeman, 3 coherent potential", range=Range(0.0, 3.0),
                  default=2.0),
        WATER_PERMITTIVITY,
    ),
    validity=ranges(water_content=(0.0, 0.6), frequency=FREQUENCY, temperature=LIQUID),
    discrepancy=GEOMETRY_UNKNOWN,
)  # fmt: skip
