"""Water content and pore-water conductivity together, from a complex permittivity, and back.

The equation of Mironov, Dobson, Kaupp, Komarov and Kleshchenko (2004), with any exponent:
eps^a = (1 - phi) eps_s^a + theta eps_w^a + (phi - theta), eps = eps' - j eps'' all along. Index and
attenuation are two equations, so a complex permittivity tells two things: water content, and how
well the pore water conducts. Both follow (derived here): with m, the excess of eps^a over that of
the soil without water, (1 + m / theta)^(1/a) is the permittivity of the water; its real part is
known. For a = 1/2 that is a quadratic equation for theta, otherwise one unknown is left to solve
for.
"""

import numpy as np
from numpy.typing import NDArray

from models.conductivity.loss import conduction_loss
from models.mixing.phases import Numbers, soil_phases
from models.mixing.physical import power_law
from models.numerics.newton import Rows, increasing_root
from models.relation import Array, ComplexArray

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
    per_conductivity = conduction_loss(1.0, frequency)
    if exponent == INDEX:
        theta = from_index(excess, water.real)
        along, across = 1 + excess.real / theta, excess.imag / theta
        return theta, (water.imag - 2 * along * across) / per_conductivity
    theta = _from_power(excess, water.real, exponent)
    conducting = (1 + excess / theta) ** (1 / exponent)
    return theta, (water.imag - conducting.imag) / per_conductivity


def _power(permittivity: Numbers, exponent: float) -> ComplexArray:
    eps = np.asarray(permittivity, dtype=np.complex128)
    return np.sqrt(eps) if exponent == INDEX else eps**exponent


def from_index(excess: ComplexArray, water: Array) -> Array:
    """The root of Re (1 + m / theta)^2 = eps_w', in the form that cancels nothing."""
    m, k = excess.real, water - 1
    theta = (m + np.sqrt(m * m + k * (m * m - excess.imag**2))) / k
    return np.where(one_answer(excess, INDEX), theta, np.nan)


def _from_power(excess: ComplexArray, water: Array, exponent: float) -> Array:
    """1/u with Re (1 + m u)^(1/a) = eps_w', by Newton's method from above.

    Wherever there is one answer the left side increases with u. As the angle of 1 + m u stays
    below that of m, it is at least (abs(m) u)^(1/a) cos(arg(m) / a), which bounds u.
    """
    m, target = np.broadcast_arrays(np.atleast_1d(excess), water)
    shape, power = np.broadcast_shapes(np.shape(excess), np.shape(water)), 1 / exponent
    steepness = np.cos(np.angle(m) * power)
    most = (target / steepness) ** exponent / np.abs(m) * (1 + WIDER)
    most = np.where(one_answer(m, exponent), most, np.nan)
    real, imag = np.ascontiguousarray(m.real), np.ascontiguousarray(m.imag)

    def step(u: Array, rows: Rows) -> tuple[Array, Array]:
        """Left side minus right side, and its slope, in real arithmetic."""
        along, across = real[rows], imag[rows]
        x, y = 1 + along * u, across * u
        size = np.exp(0.5 * (power - 1) * np.log(x * x + y * y))
        angle = (power - 1) * np.arctan2(y, x)
        p, q = size * np.cos(angle), size * np.sin(angle)  # (1 + m u)^(1/a - 1)
        return p * x - q * y - target[rows], power * (p * along - q * across)

    return (1 / increasing_root(step, np.zeros(most.shape), most)).reshape(shape)


def one_answer(excess: ComplexArray, exponent: float) -> NDArray[np.bool_]:
    """Whether just one water content explains the excess: Re m > 0 and Re m^(1/a) > 0."""
    return np.abs(excess.imag) < excess.real * np.tan(exponent * np.pi / 2)
