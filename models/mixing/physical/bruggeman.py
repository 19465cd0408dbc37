"""Bruggeman (1935): spheres of every phase, each surrounded by the mixture itself."""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.mixing.family import MixingModel
from models.mixing.phases import (
    FREQUENCY,
    GEOMETRY_UNKNOWN,
    LIQUID,
    POROSITY,
    SOLID_PERMITTIVITY,
    WATER_PERMITTIVITY,
    Numbers,
    Phases,
    positive,
    soil_phases,
    spheres_in_medium,
    water_content_of_spheres,
)
from models.mixing.physical import power_law
from models.relation import Array, Citation, ComplexArray, column, ranges

AT_REST = 1e-13
NEWTON_STEPS = 60
PASSES = 5000  # about 700 in the most lossy soils


@np.errstate(all="ignore")
def complex_mixture(phases: Phases) -> ComplexArray:
    """Permittivity eps' - j eps'' of any number of lossy phases, elementwise.

    Repeated substitution, which comes to rest on the one root that loses energy; Newton's method
    is faster and sometimes lands on another. NaN where it has not come to rest.
    """
    eps = np.asarray(power_law.mixture(phases, 0.5), dtype=np.complex128)
    moving = np.isfinite(eps)
    for _ in range(PASSES):
        following = np.asarray(spheres_in_medium(phases, eps))
        change = np.abs(following - eps)
        eps = np.where(moving, following, eps)
        moving = moving & (change > AT_REST * np.abs(eps))
        if not moving.any():
            break
    return np.where(moving, np.nan, eps)


@np.errstate(all="ignore")
def real_mixture(phases: Phases, medium: ArrayLike = 0.0, share: ArrayLike = 1.0) -> Array:
    """Permittivity of lossless spheres whose surroundings depend on the mixture, elementwise.

    The surroundings are ``medium + share * eps``: Bruggeman's are the mixture itself.

    eps - spheres_in_medium(medium + share eps) is convex and negative at the lower end, so that
    Newton's method from above, the arithmetic mean, never overshoots. NaN where there is no root.
    """
    medium, share = column(medium), column(share)
    eps = column(sum(f * one for f, one in phases))
    moving = np.isfinite(eps)
    for _ in range(NEWTON_STEPS):
        around = 2 * (medium + share * eps)
        first = sum(f / (one + around) for f, one in phases)
        second = sum(f / (one + around) ** 2 for f, one in phases)
        surplus = eps - (1 / first - around)
        step = surplus / (1 - 2 * share * (second / first**2 - 1))
        eps = np.where(moving, eps - step, eps)
        moving = moving & (np.abs(step) > AT_REST * eps)
        if not moving.any():
            break
    return np.where(moving, np.nan, positive(eps))


@np.errstate(all="ignore")
def two_phases(fraction: Numbers, inclusion: Numbers, other: Numbers) -> NDArray[Any]:
    """Permittivity of two phases in closed form, elementwise, real or complex.

    fraction: of the first, 0 to 1.
    """
    b = (3 * fraction - 1) * inclusion + (2 - 3 * fraction) * other
    return np.asarray((b + np.sqrt(b * b + 8 * inclusion * other)) / 4)


def to_permittivity(
    water_content: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
) -> Array:
    """Real permittivity of a wet soil, elementwise."""
    phases = soil_phases(
        column(water_content),
        column(porosity),
        column(solid_permittivity),
        column(water_permittivity),
    )
    return real_mixture(phases)


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
) -> Array:
    """Water content of a soil of known porosity, elementwise, m3/m3; the exact inverse."""
    eps = positive(column(permittivity))
    return water_content_of_spheres(
        eps, eps, column(porosity), column(solid_permittivity), column(water_permittivity)
    )


BRUGGEMAN = MixingModel(
    key="bruggeman",
    title="Symmetric effective medium of three phases",
    equation="sum f_i (eps_i - eps) / (eps_i + 2 eps) = 0 over solids, water and air",
    source=Citation(
        authors="Bruggeman, D. A. G.",
        year=1935,
        title="Berechnung verschiedener physikalischer Konstanten von heterogenen Substanzen. I",
        where="Annalen der Physik 416(7), 636-664",
        doi="10.1002/andp.19354160705",
        note="equation confirmed in a secondary source; citation from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="real",
    water="kaatze-1989",
    parameters=(POROSITY, SOLID_PERMITTIVITY, WATER_PERMITTIVITY),
    validity=ranges(water_content=(0.0, 0.6), frequency=FREQUENCY, temperature=LIQUID),
    discrepancy=GEOMETRY_UNKNOWN,
)
