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
from models.mixing.phases import FREQUENCY as FREQUENCIES
from models.mixing.phases import (
    LIQUID,
    SOLID_PERMITTIVITY,
    WATER_PERMITTIVITY,
    Numbers,
)
from models.mixing.physical.complex_refractive import COMPLEX_REFRACTIVE as MIXING
from models.numerics.inverse import ROUNDING
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

STEPS = 50
"""Of Newton's; four to seven are taken."""


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
    index, attenuation = _without_water(theta, porosity, solid_permittivity)
    in_water = _attenuation(loss, theta, real, index, attenuation)
    doubled = 2 * in_water * np.sqrt(real + in_water**2)
    return (doubled - column(water_loss)) / per_conductivity


def _attenuation(loss: Array, theta: Array, real: Array, a: Array, b: Array) -> Array:
    """R of the water where the soil loses so much; NaN where it loses more with r = 0.

    The loss rises with r and bends upward, so that Newton's steps from above come down to the
    root and never beyond it. A row stops for good once a step changes nothing, so that its answer
    does not depend on its company.
    """
    least = 2 * (a + theta * np.sqrt(real)) * b
    r = np.maximum(loss - least, 0.0) / (2 * theta * (a + theta * np.sqrt(real)))
    r = np.where(loss - least >= -ROUNDING * np.abs(loss), r, np.nan)
    moving = np.isfinite(r)
    for _ in range(STEPS):
        p, height = np.sqrt(real + r * r), theta * r + b
        over = 2 * (a + theta * p) * height - loss
        slope = 2 * theta * (r / p * height + a + theta * p)
        nearer = np.maximum(r - over / slope, 0.0)
        moving = moving & (r - nearer > ROUNDING * r)
        if not moving.any():
            break
        r = np.where(moving, nearer, r)
    return r


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
    theta, real = above_zero(water_content), column(water_permittivity)
    loss = column(water_loss) + conduction_loss(pore_water_conductivity, frequency)
    p = np.sqrt((np.hypot(real, loss) + real) / 2)
    a, b = _without_water(theta, porosity, solid_permittivity)
    return np.asarray(2 * (a + theta * p) * (b + theta * loss / (2 * p)))


def _without_water(
    theta: Array, porosity: ArrayLike, solid_permittivity: Numbers
) -> tuple[Array, Array]:
    """A and b of the soil whose water is left out: solid and air."""
    solid = np.sqrt(np.asarray(solid_permittivity, np.complex128))
    phi = column(porosity)
    return column(solid.real * (1 - phi) + phi - theta), column(-solid.imag * (1 - phi))


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
