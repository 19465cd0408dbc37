"""Maxwell Garnett (1904): grains, drops or bubbles in a host that surrounds them all."""

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
    Phases,
    positive,
    soil_phases,
)
from models.mixing.physical.depolarisation import depolarisation_factors
from models.relation import Array, Citation, Parameter, Range, column, ranges


@np.errstate(all="ignore")
def mixture(phases: Phases, host: Numbers, aspect_ratio: ArrayLike = 1.0) -> NDArray[Any]:
    """Permittivity of randomly turned spheroids in a host, elementwise, real or complex.

    phases: volume fraction and permittivity of each; the host may be among them or not.
    aspect_ratio: of every inclusion, length along its axis over length across; 1 is a sphere.
    """
    polarised: Numbers = 0.0
    weakened: Numbers = 1.0
    for f, eps in phases:
        p, q = _response(eps, host, aspect_ratio)
        polarised, weakened = polarised + f * p, weakened - f * q
    return np.where(np.asarray(weakened).real > 0, host + polarised / weakened, np.nan)


@np.errstate(all="ignore")
def to_permittivity(
    water_content: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    host: str,
    aspect_ratio: ArrayLike,
) -> Array:
    """Real permittivity of a wet soil, elementwise; host: water, solid or air."""
    solid, water = column(solid_permittivity), column(water_permittivity)
    phases = soil_phases(column(water_content), column(porosity), solid, water)
    around = {"water": water, "solid": solid, "air": column(AIR)}[host]
    return positive(mixture(phases, around, aspect_ratio))


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    host: str,
    aspect_ratio: ArrayLike,
) -> Array:
    """Water content of a soil of known porosity, elementwise, m3/m3; the exact inverse.

    Given the permittivity of the mixture, every fraction enters linearly; the host's own response
    is zero, so that one equation serves all three hosts.
    """
    phi, eps = column(porosity), positive(column(permittivity))
    solid, water = column(solid_permittivity), column(water_permittivity)
    around = {"water": water, "solid": solid, "air": column(AIR)}[host]

    def weight(phase: Numbers) -> NDArray[Any]:
        p, q = _response(phase, around, aspect_ratio)
        return np.asarray(p + (eps - around) * q)

    air = weight(AIR)
    wetting = eps - around - (1 - phi) * weight(solid) - phi * air
    return wetting / (weight(water) - air)


def _response(eps: Numbers, host: Numbers, aspect_ratio: ArrayLike) -> tuple[Numbers, Numbers]:
    """What a unit of inclusions adds to the polarisation, and takes from the field around them."""
    along, across = depolarisation_factors(aspect_ratio)
    contrast = eps - host
    p: Numbers = 0.0
    q: Numbers = 0.0
    for times, factor in ((1, along), (2, across)):
        inside = times * contrast / (3 * (host + factor * contrast))
        p, q = p + inside * host, q + inside * factor
    return p, q


MAXWELL_GARNETT = MixingModel(
    key="maxwell-garnett",
    title="Inclusions in a host",
    equation="(eps - eps_h) / (eps + 2 eps_h) = sum f_i (eps_i - eps_h) / (eps_i + 2 eps_h) over "
    "the phases other than the host h; for spheroids averaged over three directions",
    source=Citation(
        authors="Maxwell Garnett, J. C.",
        year=1904,
        title="Colours in metal glasses and in metallic films",
        where="Philosophical Transactions of the Royal Society of London A 203, 385-420",
        doi="10.1098/rsta.1904.0024",
        note="equation confirmed in a secondary source; citation from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="real",
    water="kaatze-1989",
    parameters=(
        POROSITY,
        SOLID_PERMITTIVITY,
        Parameter(name="host", meaning="the phase that surrounds the others",
                  choices=("water", "solid", "air"), default="water"),
        Parameter(name="aspect_ratio", meaning="length of the inclusions along their axis over "
                  "length across: below 1 discs, above 1 needles", range=Range(0.01, 100.0),
                  default=1.0),
        WATER_PERMITTIVITY,
    ),
    validity=ranges(water_content=(0.0, 0.6), frequency=FREQUENCY, temperature=LIQUID),
    discrepancy=GEOMETRY_UNKNOWN,
)  # fmt: skip
