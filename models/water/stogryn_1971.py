"""Stogryn (1971): pure water as one Debye relaxation, as the soil models of radiometry use it."""

import numpy as np
from numpy.polynomial.polynomial import polyval
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column, ranges
from models.water.blocks import in_blocks
from models.water.family import Parts, WaterModel
from models.water.relaxation import Debye, with_conduction

STATIC = (88.045, -0.4147, 6.295e-4, 1.075e-5)
TIME = (1.1109e-10, -3.824e-12, 6.938e-14, -5.096e-16)
"""2 pi tau, s. Both in rising powers of Cel; copies with 6.398e-14 are wrong."""
INFINITE = 4.9


@np.errstate(all="ignore")
def static_permittivity(temperature: ArrayLike) -> Array:
    """Static permittivity of pure water.

    temperature: elementwise, Cel, 0 to 40; 1.0 too high at 60.
    """
    return column(polyval(column(temperature), STATIC))


@np.errstate(all="ignore")
def debye(temperature: ArrayLike) -> Debye:
    """Relaxation parameters of pure water.

    temperature: elementwise, Cel, 0 to 40; the relaxation time is 14 % too short at 60.
    """
    t = column(temperature)
    return Debye(
        static=static_permittivity(t),
        infinite=np.full_like(t, INFINITE),
        relaxation_time=column(polyval(t, TIME) / (2 * np.pi)),
    )


@in_blocks
def parts(frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike = 0.0) -> Parts:
    """Real part and loss of water, salt acting through conduction alone.

    frequency: elementwise, Hz. temperature: elementwise, Cel, 0 to 40.
    conductivity_25: elementwise, S/m at 25 Cel.
    """
    pure = debye(temperature).parts(frequency)
    return with_conduction(pure, frequency, temperature, conductivity_25)


STOGRYN_1971 = WaterModel(
    key="stogryn-1971",
    title="Pure water of the soil models of radiometry, one Debye relaxation",
    equation="eps = 4.9 + (eps_s - 4.9) / (1 + j 2 pi f tau) - j sigma_w / (2 pi f eps_0), "
    "eps_s = 88.045 - 0.4147 T + 6.295e-4 T^2 + 1.075e-5 T^3, "
    "2 pi tau = 1.1109e-10 - 3.824e-12 T + 6.938e-14 T^2 - 5.096e-16 T^3 s",
    parts=parts,
    static=static_permittivity,
    static_uncertainty=0.12,
    static_departure=0.98,
    relaxation_time_uncertainty=0.02,
    infinite_uncertainty=0.5,
    validity=ranges(temperature=(0.0, 40.0), frequency=(1e6, 50e9)),
    source=Citation(
        authors="Stogryn, A.",
        year=1971,
        title="Equations for calculating the dielectric constant of saline water",
        where="IEEE Transactions on Microwave Theory and Techniques 19(8), 733-736; static "
        "permittivity as in Ulaby, Moore and Fung (1986), Microwave Remote Sensing III, "
        "appendix E",
        doi="10.1109/TMTT.1971.1127617",
        note="coefficients read in several independent copies; upper frequency from memory; static "
        "uncertainty is the r.m.s. difference from IAPWS R8-97",
    ),
)
