"""Mironov, Dobson, Kaupp, Komarov and Kleshchenko (2004): pore water from the loss of the soil.

The mixing model of ``models.mixing.physical.complex_refractive``, whose
``to_water_content_and_conductivity`` finds water content and conductivity together from a complex
permittivity. Here the water content is known, by that way or by any other, and one equation is
left: with sqrt(eps_w) = p - j r and the soil without its water a - j b, the loss of the soil is
2 (a + theta p) (b + theta r), and p^2 - r^2 is the known real part of the water's permittivity.
"""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from models.conductivity.loss import conduction_loss
from models.mixing.joint import to_complex_permittivity
from models.mixing.phases import FREQUENCY as FREQUENCIES
from models.mixing.phases import (
    LIQUID,
    SOLID_PERMITTIVITY,
    WATER_PERMITTIVITY,
    Numbers,
)
from models.mixing.physical.complex_refractive import COMPLEX_REFRACTIVE as MIXING
from models.numerics.inverse import increasing_inverse
from models.relation import Array, Parameter, Range, column, ranges
from models.salinity.family import (
    DRIEST,
    TOO_DRY,
    Discrepancy,
    Marks,
    PoreWaterModel,
    above_zero,
    marks,
)
from models.salinity.inputs import FREQUENCY, POROSITY, WATER_CONTENT

WIDER = 1e-6
"""Rounding must not push the root out of its own bracket."""


@np.errstate(all="ignore")
def to_bulk(pore_water_conductivity: ArrayLike, /, *, frequency: ArrayLike, **soil: Any) -> Array:
    """Bulk conductivity: what conduction in the water adds to the loss of the soil, as S/m.

    pore_water_conductivity: elementwise, S/m, at soil temperature, as the answer is.
    frequency: Hz. water_content, porosity: m3/m3; NaN at and below zero water content.
    water_permittivity, water_loss: eps' and eps'' of the water without conduction.
    solid_permittivity: real, or eps' - j eps''.
    """
    salty = _loss(pore_water_conductivity, frequency, **soil)
    return (salty - _loss(0.0, frequency, **soil)) / conduction_loss(1.0, frequency)


@np.errstate(all="ignore")
def bulk_of_loss(loss: ArrayLike, /, *, frequency: ArrayLike, **soil: Any) -> Array:
    """Bulk conductivity, S/m, of a soil whose eps'' was measured, relaxation included.

    loss: elementwise, all of eps''; other arguments as in ``to_bulk``.

    Together with ``to_pore_water`` this continues the joint inversion: the water content that was
    found there gives the conductivity that was found there.
    """
    return (column(loss) - _loss(0.0, frequency, **soil)) / conduction_loss(1.0, frequency)


@np.errstate(all="ignore")
def to_pore_water(
    bulk_conductivity: ArrayLike,
    /,
    *,
    water_content: ArrayLike,
    frequency: ArrayLike,
    water_permittivity: ArrayLike,
    water_loss: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: Numbers,
) -> Array:
    """Conductivity of the pore water at soil temperature, elementwise, S/m; the exact inverse.

    Arguments as in ``to_bulk``. Below zero for a soil that loses less than it would with pure
    water, and NaN for one that loses less than it would with water without any loss.
    """
    soil: dict[str, Any] = {
        "water_content": water_content, "water_permittivity": water_permittivity,
        "water_loss": water_loss, "porosity": porosity, "solid_permittivity": solid_permittivity,
    }  # fmt: skip
    per_conductivity = conduction_loss(1.0, frequency)
    loss = column(bulk_conductivity) * per_conductivity + _loss(0.0, frequency, **soil)
    theta, real = above_zero(water_content), above_zero(water_permittivity)
    solid = np.sqrt(np.asarray(solid_permittivity, np.complex128))
    rest = solid * (1 - column(porosity)) + column(porosity) - theta
    most = loss / (2 * theta * (rest.real + theta * np.sqrt(real))) * (1 + WIDER)

    def lost(attenuation: Array) -> Array:
        """2 n k of the soil, from the attenuation r of its water."""
        index = rest.real + theta * np.sqrt(real + attenuation**2)
        return 2 * index * (theta * attenuation - rest.imag)

    attenuation = increasing_inverse(lost, loss, 0.0, most)
    in_water = 2 * attenuation * np.sqrt(real + attenuation**2)
    return (in_water - column(water_loss)) / per_conductivity


def _loss(
    pore_water_conductivity: ArrayLike,
    frequency: ArrayLike,
    *,
    water_content: ArrayLike,
    water_permittivity: ArrayLike,
    water_loss: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: Numbers,
) -> Array:
    """All of the soil's eps'', elementwise."""
    return -to_complex_permittivity(
        above_zero(water_content), column(pore_water_conductivity), column(frequency),
        water_permittivity=column(water_permittivity) - 1j * column(water_loss),
        porosity=column(porosity), solid_permittivity=np.asarray(solid_permittivity),
    ).imag  # fmt: skip


def gates(bulk_conductivity: ArrayLike, /, *, water_content: ArrayLike, **_others: Any) -> Marks:
    """Water content below 0.05."""
    return marks(bulk_conductivity, {TOO_DRY: column(water_content) < DRIEST})


COMPLEX_REFRACTIVE = PoreWaterModel(
    key="complex-refractive",
    title="Loss of the soil by complex refractive indices",
    equation="sigma_b / (2 pi f eps0) = eps''(sigma_w) - eps''(0), eps by sqrt(eps) = "
    "(1 - phi) sqrt(eps_s) + theta sqrt(eps_w) + (phi - theta), complex, with "
    "eps_w'' = water_loss + sigma_w / (2 pi f eps0)",
    source=MIXING.source,
    to_pore_water=to_pore_water,
    to_bulk=to_bulk,
    at="soil temperature",
    gates=gates,
    parameters=(
        WATER_CONTENT,
        FREQUENCY,
        WATER_PERMITTIVITY,
        Parameter(
            name="water_loss", meaning="eps'' of the pore water without conduction",
            range=Range(0.0, 100.0), supplied=True,
        ),
        POROSITY,
        SOLID_PERMITTIVITY,
    ),
    validity=ranges(
        water_content=(0.05, 0.6), frequency=FREQUENCIES, temperature=LIQUID, clay=(0.0, 0.2)
    ),
    published_error="not stated",
    discrepancy=Discrepancy(
        sand=0.20, loam=0.45, clay=0.70,
        reason="no published figure, ours: like Archie (1942) it knows no conduction along "
        "surfaces, and takes conduction to be the same at all frequencies",
    ),
)  # fmt: skip
