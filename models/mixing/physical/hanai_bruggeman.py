"""Hanai (1960) after Bruggeman (1935): grains stirred into water, a few at a time.

The water has to be continuous, so this is a model of saturated soil: porosity is water content.
"""

import numpy as np
from numpy.typing import ArrayLike

from models.mixing.family import Discrepancy, MixingModel
from models.mixing.phases import (
    FREQUENCY,
    LIQUID,
    SOLID_PERMITTIVITY,
    WATER_PERMITTIVITY,
    Numbers,
    positive,
)
from models.relation import Array, Citation, ComplexArray, column, ranges

SPHERES = 1 / 3
"""Depolarisation of the grains."""


@np.errstate(all="ignore")
def mixture(host_fraction: Numbers, host: Numbers, inclusion: Numbers) -> ComplexArray:
    """Permittivity eps' - j eps'' of spheres in a continuous host, elementwise.

    host_fraction: 0 to 1. host, inclusion: permittivities, real or complex.

    With t = (eps / eps_h)^(1/3) and r = eps_i / eps_h the equation reads
    t^3 - f (1 - r) t - r = 0, and Cardano's formula with principal roots gives the root that
    starts from the host.
    """
    ratio = np.asarray(inclusion / host, dtype=np.complex128)
    third = host_fraction * (1 - ratio) / 3
    u = (ratio / 2 + np.sqrt(ratio**2 / 4 - third**3)) ** SPHERES
    return np.asarray(host * (u + third / u) ** 3, dtype=np.complex128)


def to_permittivity(
    water_content: ArrayLike, /, *, water_permittivity: ArrayLike, solid_permittivity: ArrayLike
) -> Array:
    """Real permittivity of a saturated soil, elementwise."""
    water, solid = column(water_permittivity), column(solid_permittivity)
    return positive(mixture(column(water_content), water, solid).real)


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike, /, *, water_permittivity: ArrayLike, solid_permittivity: ArrayLike
) -> Array:
    """Water content of a saturated soil, which is its porosity; elementwise, m3/m3."""
    eps = positive(column(permittivity))
    water, solid = column(water_permittivity), column(solid_permittivity)
    return (solid - eps) / (solid - water) * (water / eps) ** SPHERES


HANAI_BRUGGEMAN = MixingModel(
    key="hanai-bruggeman",
    title="Saturated soil, grains in continuous water",
    equation="theta = phi = (eps_s - eps) / (eps_s - eps_w) (eps_w / eps)^(1/3)",
    source=Citation(
        authors="Hanai, T.",
        year=1960,
        title="Theory of the dielectric dispersion due to the interfacial polarization and its "
        "application to emulsions",
        where="Kolloid-Zeitschrift 171, 23-31",
        doi="10.1007/BF01520320",
        note="equation confirmed in a secondary source; citation from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="real",
    water="kaatze-1989",
    parameters=(SOLID_PERMITTIVITY, WATER_PERMITTIVITY),
    validity=ranges(water_content=(0.2, 0.95), frequency=FREQUENCY, temperature=LIQUID),
    discrepancy=Discrepancy(
        standard_uncertainty=0.03,
        reason="no published figure; water as the host of a saturated soil is well founded",
    ),
)
