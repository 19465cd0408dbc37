"""Peplinski, Ulaby and Dobson (1995): the law of Dobson et al. (1985) brought to 0.3-1.3 GHz."""

import numpy as np
from numpy.typing import ArrayLike

from models.conductivity.loss import conduction_loss
from models.mixing.family import Discrepancy, MixingModel
from models.mixing.phases import LIQUID, Numbers
from models.mixing.physical import dobson_1985
from models.relation import Array, Citation, ComplexArray, column, ranges

SLOPE, OFFSET = 1.15, -0.68
"""From the real part at 1.4 GHz and above to the real part below; the loss is left alone."""


@np.errstate(all="ignore")
def to_permittivity(
    water_content: ArrayLike, /, *, water_permittivity: ArrayLike, sand: ArrayLike,
    clay: ArrayLike, bulk_density: ArrayLike, particle_density: ArrayLike,
) -> Array:  # fmt: skip
    """Real permittivity of a wet soil, elementwise; NaN below a water content of 0.

    sand, clay: kg/kg. bulk_density, particle_density: kg/m3.
    """
    return OFFSET + SLOPE * dobson_1985.to_permittivity(
        water_content, water_permittivity=water_permittivity, sand=sand, clay=clay,
        bulk_density=bulk_density, particle_density=particle_density,
    )  # fmt: skip


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike, /, *, water_permittivity: ArrayLike, sand: ArrayLike,
    clay: ArrayLike, bulk_density: ArrayLike, particle_density: ArrayLike,
) -> Array:  # fmt: skip
    """Water content, elementwise, m3/m3; NaN below 0.0001, where it no longer rises, and above 1.

    Arguments as in ``to_permittivity``.
    """
    return dobson_1985.to_water_content(
        (column(permittivity) - OFFSET) / SLOPE, water_permittivity=water_permittivity, sand=sand,
        clay=clay, bulk_density=bulk_density, particle_density=particle_density,
    )  # fmt: skip


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
    loss = dobson_1985.free_water_loss(
        water_content, -water.imag, conduction_loss(conductivity, frequency),
        bulk_density, particle_density,
    )  # fmt: skip
    return real - 1j * dobson_1985.bent_loss(water_content, loss, sand, clay)


def effective_conductivity(sand: ArrayLike, clay: ArrayLike, bulk_density: ArrayLike) -> Array:
    """Conductivity the paper gives the free water, S/m, cut off at 0."""
    rho = dobson_1985.G_PER_CM3 * column(bulk_density)
    regression = 0.0467 + 0.2204 * rho - 0.4111 * column(sand) + 0.6614 * column(clay)
    return np.maximum(regression, 0.0)


PEPLINSKI_1995 = MixingModel(
    key="peplinski-1995",
    title="Texture-dependent power law, ultra high frequency",
    equation="eps' = 1.15 e - 0.68, e^0.65 = 1 + rho_b / rho_s (eps_s^0.65 - 1) + "
    "theta^b eps_w^0.65 - theta, b = 1.2748 - 0.519 S - 0.152 C, "
    "eps_s = (1.01 + 0.44 rho_s)^2 - 0.062, rho_s in g/cm3",
    source=Citation(
        authors="Peplinski, N. R.; Ulaby, F. T.; Dobson, M. C.",
        year=1995,
        title="Dielectric properties of soils in the 0.3-1.3-GHz range",
        where="IEEE Transactions on Geoscience and Remote Sensing 33(3), 803-807",
        doi="10.1109/36.387598",
        note="coefficients read in public sources, of which one prints 0.411 for 0.4111; ranges of "
        "texture from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="real",
    water="stogryn-1971",
    soils="mineral",
    parameters=dobson_1985.DOBSON_1985.parameters,
    validity=ranges(water_content=(0.01, 0.5), frequency=(0.3e9, 1.3e9), temperature=LIQUID,
                    sand=(0.05, 0.52), clay=(0.08, 0.48)),
    discrepancy=Discrepancy(
        standard_uncertainty=0.045,
        reason="fitted to few soils; no error of water content is published",
    ),
)  # fmt: skip
