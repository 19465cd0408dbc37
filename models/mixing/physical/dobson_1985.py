"""Dobson, Ulaby, Hallikainen and El-Rayes (1985): a power law that texture bends, 1.4-18 GHz."""

import numpy as np
from numpy.typing import ArrayLike

from models.conductivity.loss import conduction_loss
from models.mixing.family import Discrepancy, MixingModel
from models.mixing.phases import LIQUID, WATER_PERMITTIVITY, Numbers, soil_property
from models.numerics.inverse import increasing_inverse
from models.numerics.power import power
from models.relation import Array, Citation, ComplexArray, column, ranges

EXPONENT = 0.65
G_PER_CM3 = 1e-3  # the paper's unit of density, from kg/m3
DRIEST, WETTEST = 1e-4, 1.0
"""Water contents searched: the equation rises from the first on, and the second is water."""


@np.errstate(all="ignore")
def to_permittivity(
    water_content: ArrayLike, /, *, water_permittivity: ArrayLike, sand: ArrayLike,
    clay: ArrayLike, bulk_density: ArrayLike, particle_density: ArrayLike,
) -> Array:  # fmt: skip
    """Real permittivity of a wet soil, elementwise; NaN below a water content of 0.

    sand, clay: kg/kg. bulk_density, particle_density: kg/m3.
    """
    dry = dry_part(bulk_density, particle_density)
    bent = wet_part(water_content, water_permittivity, sand, clay)
    return power(dry + bent, 1 / EXPONENT)


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike, /, *, water_permittivity: ArrayLike, sand: ArrayLike,
    clay: ArrayLike, bulk_density: ArrayLike, particle_density: ArrayLike,
) -> Array:  # fmt: skip
    """Water content, elementwise, m3/m3; NaN below 0.0001, where it no longer rises, and above 1.

    Arguments as in ``to_permittivity``.
    """
    target = power(permittivity, EXPONENT) - dry_part(bulk_density, particle_density)
    return increasing_inverse(
        lambda theta: wet_part(theta, water_permittivity, sand, clay), target, DRIEST, WETTEST
    )


@np.errstate(all="ignore")
def complex_permittivity(
    water_content: ArrayLike, frequency: ArrayLike, /, *, water_permittivity: Numbers,
    sand: ArrayLike, clay: ArrayLike, bulk_density: ArrayLike, particle_density: ArrayLike,
) -> ComplexArray:  # fmt: skip
    """Permittivity eps' - j eps'' of a wet soil, elementwise.

    water_content: m3/m3, above 0. frequency: Hz. water_permittivity: eps' - j eps'' without
        conduction, for which the paper has its own regression.
    """
    water = np.asarray(water_permittivity, dtype=np.complex128)
    real = to_permittivity(
        water_content, water_permittivity=water.real, sand=sand, clay=clay,
        bulk_density=bulk_density, particle_density=particle_density,
    )  # fmt: skip
    conductivity = effective_conductivity(sand, clay, bulk_density)
    loss = free_water_loss(
        water_content, -water.imag, conduction_loss(conductivity, frequency),
        bulk_density, particle_density,
    )  # fmt: skip
    return real - 1j * bent_loss(water_content, loss, sand, clay)


def effective_conductivity(sand: ArrayLike, clay: ArrayLike, bulk_density: ArrayLike) -> Array:
    """Conductivity the paper gives the free water, S/m.

    Cut off at 0: the regression is negative in sandy soil, where a loss would become a gain.
    """
    rho = G_PER_CM3 * column(bulk_density)
    regression = -1.645 + 1.939 * rho - 2.25622 * column(sand) + 1.594 * column(clay)
    return np.maximum(regression, 0.0)


def solid_permittivity(particle_density: ArrayLike) -> Array:
    """Permittivity of the solids by their density, kg/m3."""
    return (1.01 + 0.44 * G_PER_CM3 * column(particle_density)) ** 2 - 0.062


def dry_part(bulk_density: ArrayLike, particle_density: ArrayLike) -> Array:
    """eps'^0.65 of the dry soil."""
    lifted = solid_permittivity(particle_density) ** EXPONENT - 1
    return 1 + column(bulk_density) / column(particle_density) * lifted


def wet_part(
    water_content: ArrayLike, water_permittivity: ArrayLike, sand: ArrayLike, clay: ArrayLike
) -> Array:
    """What water adds to eps'^0.65."""
    theta = column(water_content)
    bend = 1.2748 - 0.519 * column(sand) - 0.152 * column(clay)
    return theta**bend * column(water_permittivity) ** EXPONENT - theta


def free_water_loss(
    water_content: ArrayLike, relaxation: ArrayLike, conduction: ArrayLike,
    bulk_density: ArrayLike, particle_density: ArrayLike,
) -> Array:  # fmt: skip
    """Loss eps'' of the free water: its relaxation, and conduction through what is no solid."""
    pores = 1 - column(bulk_density) / column(particle_density)
    return column(relaxation) + column(conduction) * pores / column(water_content)


def bent_loss(
    water_content: ArrayLike, water_loss: ArrayLike, sand: ArrayLike, clay: ArrayLike
) -> Array:
    """Loss eps'' of the soil from that of its free water."""
    bend = 1.33797 - 0.603 * column(sand) - 0.166 * column(clay)
    return column(water_content) ** (bend / EXPONENT) * column(water_loss)


DOBSON_1985 = MixingModel(
    key="dobson-1985",
    title="Texture-dependent power law, microwaves",
    equation="eps'^0.65 = 1 + rho_b / rho_s (eps_s^0.65 - 1) + theta^b eps_w^0.65 - theta, "
    "b = 1.2748 - 0.519 S - 0.152 C, eps_s = (1.01 + 0.44 rho_s)^2 - 0.062, rho_s in g/cm3",
    source=Citation(
        authors="Dobson, M. C.; Ulaby, F. T.; Hallikainen, M. T.; El-Rayes, M. A.",
        year=1985,
        title="Microwave dielectric behavior of wet soil - Part II: Dielectric mixing models",
        where="IEEE Transactions on Geoscience and Remote Sensing GE-23(1), 35-46",
        doi="10.1109/TGRS.1985.289498",
        note="coefficients read in public sources, of which one swaps the two exponents of water; "
        "ranges of texture from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="real",
    water="stogryn-1971",
    soils="mineral",
    parameters=(
        soil_property("sand"),
        soil_property("clay"),
        soil_property("bulk_density"),
        soil_property("particle_density", default=2650.0, default_u=50.0),
        WATER_PERMITTIVITY,
    ),
    validity=ranges(water_content=(0.01, 0.5), frequency=(1.4e9, 18e9), temperature=LIQUID,
                    sand=(0.05, 0.52), clay=(0.08, 0.48)),
    discrepancy=Discrepancy(
        standard_uncertainty=0.035,
        reason="fitted to five soils; no error of water content is published",
    ),
)  # fmt: skip
