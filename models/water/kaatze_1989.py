"""Kaatze (1989): pure water as one Debye relaxation."""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column, ranges
from models.water.blocks import in_blocks
from models.water.family import Parts, WaterModel
from models.water.relaxation import Debye, with_conduction

LN_10 = float(np.log(10.0))


@np.errstate(all="ignore")
def static_permittivity(temperature: ArrayLike) -> Array:
    """Static permittivity of pure water.

    temperature: elementwise, Cel, -4.1 to 60.
    """
    # exp, not a power of 10: a power takes several times as long.
    return np.exp(LN_10 * 1.94404 - LN_10 * 1.991e-3 * column(temperature))


@np.errstate(all="ignore")
def debye(temperature: ArrayLike) -> Debye:
    """Relaxation parameters of pure water.

    temperature: elementwise, Cel, -4.1 to 60.
    """
    t = column(temperature)
    return Debye(
        static=static_permittivity(t),
        infinite=5.77 - 2.74e-2 * t,
        relaxation_time=3.745e-15 * (1 + 7e-5 * (t - 27.5) ** 2) * np.exp(2295.7 / (t + 273.15)),
    )


@in_blocks
def parts(frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike = 0.0) -> Parts:
    """Real part and loss of water, salt acting through conduction alone.

    frequency: elementwise, Hz, up to 57e9. temperature: elementwise, Cel, -4.1 to 60.
    conductivity_25: elementwise, S/m at 25 Cel.
    """
    pure = debye(temperature).parts(frequency)
    return with_conduction(pure, frequency, temperature, conductivity_25)


KAATZE_1989 = WaterModel(
    key="kaatze-1989",
    title="Pure water, one Debye relaxation",
    equation="eps = eps_inf + (eps_s - eps_inf) / (1 + j 2 pi f tau) - j sigma_w / (2 pi f eps_0), "
    "eps_s = 10^(1.94404 - 1.991e-3 T), eps_inf = 5.77 - 0.0274 T, "
    "tau = 3.745e-15 s (1 + 7e-5 (T - 27.5)^2) exp(2295.7 / (T + 273.15))",
    parts=parts,
    static=static_permittivity,
    static_uncertainty=0.05,
    static_departure=0.021,
    relaxation_time_uncertainty=0.015,
    infinite_uncertainty=0.5,
    validity=ranges(temperature=(-4.1, 60.0), frequency=(1e6, 57e9)),
    source=Citation(
        authors="Kaatze, U.",
        year=1989,
        title="Complex permittivity of water as a function of frequency and temperature",
        where="Journal of Chemical and Engineering Data 34(4), 371-374",
        equation="eqs. 6-8",
        doi="10.1021/je00058a001",
        note="coefficients read in five independent copies; measured from 1.1 to 57 GHz, below "
        "that the relaxation is at its static limit",
    ),
)
