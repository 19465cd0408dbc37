"""Mironov, Kosolapova and Fomin (2009): dry soil, bound water and free water, from clay alone."""

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from models.conductivity.loss import conduction_loss
from models.mixing.family import Discrepancy, MixingModel
from models.mixing.phases import soil_property
from models.numerics.power import root, square
from models.relation import Array, Citation, ComplexArray, Parameter, Range, column, ranges

HIGH_FREQUENCY = 4.9
PERCENT = 100.0  # the paper's unit of clay, from kg/kg


class Spectrum(NamedTuple):
    """Refraction of a soil as water comes in; complex indices are n - j kappa."""

    dry: ComplexArray
    """Index of the dry soil."""
    bound: ComplexArray
    """Rise of the index per unit of bound water."""
    free: ComplexArray
    """Rise of the index per unit of free water."""
    transition: Array
    """The most bound water there can be, m3/m3."""

    @property
    def full(self) -> ComplexArray:
        """Index where bound water is complete and free water starts."""
        return self.dry + self.bound * self.transition


@np.errstate(all="ignore")
def spectrum(frequency: ArrayLike, clay: ArrayLike) -> Spectrum:
    """What the paper's regressions on clay say at one frequency.

    frequency: elementwise, Hz. clay: elementwise, kg/kg.
    """
    f, c = column(frequency), PERCENT * column(clay)
    n_d = 1.634 - 0.539e-2 * c + 0.2748e-4 * c**2
    k_d = 0.03952 - 0.04038e-2 * c
    bound = _debye(
        f,
        79.8 - 85.4e-2 * c + 32.7e-4 * c**2,
        1.062e-11 + 3.450e-14 * c,
        0.3112 + 0.467e-2 * c,
    )
    free = _debye(f, 100.0, 8.5e-12, 0.3631 + 1.217e-2 * c)
    transition = column(0.02863 + 0.30673e-2 * c)
    return Spectrum(n_d - 1j * k_d, np.sqrt(bound) - 1, np.sqrt(free) - 1, transition)


@np.errstate(all="ignore")
def complex_permittivity(
    water_content: ArrayLike, frequency: ArrayLike, /, *, clay: ArrayLike
) -> ComplexArray:
    """Permittivity eps' - j eps'' of a moist soil near 20 Cel.

    water_content: elementwise, m3/m3. frequency: elementwise, Hz. clay: elementwise, kg/kg.
    """
    return _index(column(water_content), spectrum(frequency, clay)) ** 2


@np.errstate(all="ignore")
def to_permittivity(water_content: ArrayLike, /, *, frequency: ArrayLike, clay: ArrayLike) -> Array:
    """Apparent permittivity of a moist soil: the real part of its index, squared; elementwise."""
    return square(_index(column(water_content), spectrum(frequency, clay)).real)


@np.errstate(all="ignore")
def to_water_content(permittivity: ArrayLike, /, *, frequency: ArrayLike, clay: ArrayLike) -> Array:
    """Water content from apparent permittivity, elementwise, m3/m3: two straight lines in n."""
    n, soil = root(permittivity), spectrum(frequency, clay)
    bound = (n - soil.dry.real) / soil.bound.real
    free = soil.transition + (n - soil.full.real) / soil.free.real
    return np.where(bound <= soil.transition, bound, free)


@np.errstate(all="ignore")
def water_content_from_real_part(
    permittivity: ArrayLike, /, *, frequency: ArrayLike, clay: ArrayLike
) -> Array:
    """Water content from eps' alone, elementwise, m3/m3: a quadratic on either side."""
    eps, soil = column(permittivity), spectrum(frequency, clay)
    bound = _rise(eps, soil.dry, soil.bound)
    free = soil.transition + _rise(eps, soil.full, soil.free)
    return np.where(bound <= soil.transition, bound, free)


def _debye(frequency: Array, static: ArrayLike, tau: ArrayLike, sigma: ArrayLike) -> ComplexArray:
    turning = 1 + 2j * np.pi * frequency * column(tau)
    loss = conduction_loss(sigma, frequency)
    return HIGH_FREQUENCY + (column(static) - HIGH_FREQUENCY) / turning - 1j * loss


def _index(theta: Array, soil: Spectrum) -> ComplexArray:
    bound = np.minimum(theta, soil.transition)
    return soil.dry + soil.bound * bound + soil.free * (theta - bound)


def _rise(eps: Array, start: ComplexArray, slope: ComplexArray) -> Array:
    """The x with Re (start + slope x)^2 = eps', in the form that cancels nothing."""
    linear, missing = (start * slope).real, eps - (start**2).real
    return 2 * missing / (2 * linear + 2 * np.sqrt(linear**2 + (slope**2).real * missing))


MIRONOV_2009 = MixingModel(
    key="mironov-2009",
    title="Bound and free water by clay content",
    equation="sqrt(Ka) = n_d + (n_b - 1) theta up to theta_t, above it n_d + (n_b - 1) theta_t + "
    "(n_u - 1) (theta - theta_t); n_d, n_b, n_u from clay and frequency; "
    "theta_t = 0.02863 + 0.30673 C",
    source=Citation(
        authors="Mironov, V. L.; Kosolapova, L. G.; Fomin, S. V.",
        year=2009,
        title="Physically and mineralogically based spectroscopic dielectric model for moist soils",
        where="IEEE Transactions on Geoscience and Remote Sensing 47(7), 2059-2070",
        doi="10.1109/TGRS.2008.2011631",
        note="coefficients read in a public source; ranges from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="apparent",
    conducting=True,
    soils="mineral",
    parameters=(
        Parameter(name="frequency", meaning="of the measurement, or effective frequency",
                  range=Range(1e6, 1e11)),
        soil_property("clay"),
    ),
    # From memory. The soils were at 20 to 22 Cel and of their natural density.
    validity=ranges(water_content=(0.0, 0.5), frequency=(45e6, 26.5e9), clay=(0.0, 0.76),
                    temperature=(15.0, 27.0)),
    discrepancy=Discrepancy(
        standard_uncertainty=0.035,
        reason="soils of one clay content differ in mineralogy and density, which it does not ask",
    ),
)  # fmt: skip
