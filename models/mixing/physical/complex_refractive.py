"""Mironov, Dobson, Kaupp, Komarov and Kleshchenko (2004): complex refractive indices add up.

sqrt(eps) = (1 - phi) sqrt(eps_s) + theta sqrt(eps_w) + (phi - theta), with eps = eps' - j eps''
all along. Index and attenuation are two equations, so a complex permittivity tells two things:
water content, and how well the pore water conducts. Both follow in closed form (derived here):
with m, the excess of sqrt(eps) over that of the soil without water, (1 + m / theta)^2 is the
permittivity of the water; its real part is known, which leaves a quadratic equation for theta.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.conductivity.loss import conduction_loss
from models.mixing.family import Discrepancy, MixingModel
from models.mixing.phases import (
    FREQUENCY,
    LIQUID,
    POROSITY,
    SOLID_PERMITTIVITY,
    WATER_PERMITTIVITY,
    Numbers,
    soil_phases,
)
from models.mixing.physical import crim, power_law
from models.numerics.inverse import increasing_inverse
from models.relation import Array, Citation, ComplexArray, Parameter, Range, column, ranges

INDEX = 0.5
"""The exponent of refractive indices."""
WIDER = 1e-6
"""Rounding must not push a root out of its own bracket."""


@np.errstate(all="ignore")
def to_complex_permittivity(
    water_content: Numbers,
    pore_water_conductivity: Numbers,
    frequency: Numbers,
    /,
    *,
    water_permittivity: Numbers,
    porosity: Numbers,
    solid_permittivity: Numbers,
    exponent: float = INDEX,
) -> ComplexArray:
    """Permittivity eps' - j eps'' of a wet soil, conduction included.

    water_content: elementwise, m3/m3. pore_water_conductivity: elementwise, S/m, at the
        temperature of the soil. frequency: elementwise, Hz.
    water_permittivity: elementwise, eps' - j eps'' of the water without conduction.
    porosity: m3/m3; solid_permittivity: real or complex; exponent: above 0, up to 1.
    """
    water = water_permittivity - 1j * conduction_loss(pore_water_conductivity, frequency)
    phases = soil_phases(np.asarray(water_content), porosity, solid_permittivity, water)
    return np.asarray(power_law.mixture(phases, exponent), dtype=np.complex128)


@np.errstate(all="ignore")
def to_water_content_and_conductivity(
    permittivity: Numbers,
    frequency: Numbers,
    /,
    *,
    water_permittivity: Numbers,
    porosity: Numbers,
    solid_permittivity: Numbers,
    exponent: float = INDEX,
) -> tuple[Array, Array]:
    """Water content, m3/m3, and conductivity of the pore water, S/m at soil temperature.

    permittivity: elementwise, eps' - j eps'' of the soil, conduction included; other arguments
        as in ``to_complex_permittivity``, whose exact inverse this is.

    Both are NaN where no soil answers: eps' <= 0, less index than the soil without water has, or
    so much loss that two water contents would explain it. A loss below that of pure water gives a
    conductivity below zero, as noise will; it is not cut off.
    """
    eps = np.asarray(permittivity, dtype=np.complex128)
    water = np.asarray(water_permittivity, dtype=np.complex128)
    lifted = _power(eps, exponent)
    excess = lifted - ((1 - porosity) * _power(solid_permittivity, exponent) + porosity)
    excess = np.where(eps.real > 0, excess, np.nan)
    if exponent == INDEX:
        theta = _from_index(excess, water.real)
    else:
        theta = _from_power(excess, water.real, exponent)
    conducting = (1 + excess / theta) ** (1 / exponent)
    return theta, (water.imag - conducting.imag) / conduction_loss(1.0, frequency)


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    water_loss: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    solid_loss: ArrayLike,
    loss: ArrayLike | None = None,
) -> Array:
    """Water content of a soil of known porosity, elementwise, m3/m3.

    permittivity: elementwise, apparent. loss: elementwise, eps'' of the soil, all of it.
    water_permittivity: eps' of the water; water_loss: its eps'' without conduction.

    With the loss, the conductivity of the pore water is solved for along the way and does no harm;
    NaN as in ``to_water_content_and_conductivity``. Without it, the water is taken to lose no more
    than ``water_loss``.
    """
    ka, solid = column(permittivity), _index(solid_permittivity, solid_loss)
    if loss is None:
        water = _index(water_permittivity, water_loss)
        return crim.to_water_content(
            ka, water_permittivity=water.real**2, porosity=porosity,
            solid_permittivity=solid.real**2,
        )  # fmt: skip
    dry, index = _dry(solid, porosity), np.sqrt(ka)
    excess = index - 1j * column(loss) / (2 * index) - dry
    return _from_index(np.where(2 * ka > column(loss), excess, np.nan), column(water_permittivity))


@np.errstate(all="ignore")
def to_permittivity(
    water_content: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    water_loss: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    solid_loss: ArrayLike,
    loss: ArrayLike | None = None,
) -> Array:
    """Apparent permittivity of a wet soil, elementwise; arguments as in ``to_water_content``.

    With the loss, this is the soil whose pore water conducts just enough to lose that much in
    all; NaN where ``to_water_content`` would not find the way back. To start from a conductivity
    instead, see ``to_complex_permittivity``.
    """
    theta, solid = column(water_content), _index(solid_permittivity, solid_loss)
    if loss is None:
        water = _index(water_permittivity, water_loss)
        return crim.to_permittivity(
            theta, water_permittivity=water.real**2, porosity=porosity,
            solid_permittivity=solid.real**2,
        )  # fmt: skip
    dry = _dry(solid, porosity)
    shift, half_loss = dry.real - theta, column(loss) / 2
    known = column(water_permittivity) * theta**2

    def surplus(index: Array) -> Array:
        """Index minus what the water's real part asks for: (n - shift)^2 - k^2 = known."""
        return index - shift - np.hypot(np.sqrt(known), half_loss / index + dry.imag)

    least = shift + np.sqrt(known)
    most = shift + np.hypot(np.sqrt(known), half_loss / least - dry.imag)
    index = increasing_inverse(surplus, 0.0, least * (1 - WIDER), most * (1 + WIDER))
    excess = index - 1j * half_loss / index - dry
    known_way_back = (theta > 0) & _one_answer(excess, INDEX) & (index > half_loss / index)
    return np.where(known_way_back, index**2, np.nan)


def _index(real: ArrayLike, loss: ArrayLike) -> ComplexArray:
    return np.sqrt(column(real) - 1j * column(loss))


def _dry(solid: ComplexArray, porosity: ArrayLike) -> ComplexArray:
    """Index of the soil with its pores full of air."""
    return solid - column(porosity) * (solid - 1)


def _power(permittivity: Numbers, exponent: float) -> ComplexArray:
    eps = np.asarray(permittivity, dtype=np.complex128)
    return np.sqrt(eps) if exponent == INDEX else eps**exponent


def _from_index(excess: ComplexArray, water: Array) -> Array:
    """The root of Re (1 + m / theta)^2 = eps_w', in the form that cancels nothing."""
    m, k = excess.real, water - 1
    theta = (m + np.sqrt(m * m + k * (m * m - excess.imag**2))) / k
    return np.where(_one_answer(excess, INDEX), theta, np.nan)


def _from_power(excess: ComplexArray, water: Array, exponent: float) -> Array:
    """1/u with Re (1 + m u)^(1/a) = eps_w'.

    Wherever there is one answer the left side increases with u. As the angle of 1 + m u stays
    below that of m, it is at least (abs(m) u)^(1/a) cos(arg(m) / a), which bounds u.
    """
    steepness = np.cos(np.angle(excess) / exponent)
    most = (water / steepness) ** exponent / np.abs(excess) * (1 + WIDER)
    inverse = increasing_inverse(
        lambda u: ((1 + excess * u) ** (1 / exponent)).real,
        water, 0.0, np.where(_one_answer(excess, exponent), most, np.nan),
    )  # fmt: skip
    return 1 / inverse


def _one_answer(excess: ComplexArray, exponent: float) -> NDArray[np.bool_]:
    """Whether just one water content explains the excess: Re m > 0 and Re m^(1/a) > 0."""
    return np.abs(excess.imag) < excess.real * np.tan(exponent * np.pi / 2)


COMPLEX_REFRACTIVE = MixingModel(
    key="complex-refractive",
    title="Complex refractive indices, with loss",
    equation="sqrt(eps) = (1 - phi) sqrt(eps_s) + theta sqrt(eps_w) + (phi - theta), complex; "
    "sqrt(eps) = sqrt(Ka) - j eps'' / (2 sqrt(Ka)); Re eps_w known, Im eps_w solved for",
    source=Citation(
        authors="Mironov, V. L.; Dobson, M. C.; Kaupp, V. H.; Komarov, S. A.; Kleshchenko, V. N.",
        year=2004,
        title="Generalized refractive mixing dielectric model for moist soils",
        where="IEEE Transactions on Geoscience and Remote Sensing 42(4), 773-785",
        doi="10.1109/TGRS.2003.823288",
        note="the mixing equation; the closed inverse for water content and pore-water "
        "conductivity is derived here; citation from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="apparent",
    water="kaatze-1989",
    parameters=(
        POROSITY,
        SOLID_PERMITTIVITY,
        Parameter(name="solid_loss", meaning="eps'' of the solids", range=Range(0.0, 5.0),
                  default=0.0),
        WATER_PERMITTIVITY,
        Parameter(name="water_loss", meaning="eps'' of the pore water without conduction",
                  range=Range(0.0, 100.0), supplied=True),
        Parameter(name="loss", meaning="eps'' of the soil, conduction included",
                  range=Range(0.0, 20000.0), supplied=True, optional=True),
    ),
    validity=ranges(water_content=(0.02, 0.6), frequency=FREQUENCY, temperature=LIQUID),
    discrepancy=Discrepancy(
        standard_uncertainty=0.012,
        reason="what is left once porosity and solid permittivity are propagated",
    ),
)  # fmt: skip
