"""Turner, Kneifel and Cadeddu (2016): pure water, supercooled included, as two relaxations."""

import numpy as np
from numpy.polynomial.polynomial import polyval
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column, ranges
from models.water.blocks import in_blocks
from models.water.family import Parts, WaterModel
from models.water.relaxation import relaxation, with_conduction

STATIC = (87.9144, -0.404399, 9.58726e-4, -1.32802e-6)
"""Rising powers of Cel; one copy in use has the sign of the square wrong."""
TERMS = (
    (81.11, 4.434e-3, 1.302e-13, 662.7),
    (2.025, 1.073e-2, 1.012e-14, 608.9),
)
"""a, b, c, d of each relaxation: strength a exp(-b T), time c exp(d / (T + tc)) s."""
CRITICAL = 134.2
"""tc, Cel; 133.1383 belongs to another model."""


@np.errstate(all="ignore")
def static_permittivity(temperature: ArrayLike) -> Array:
    """Static permittivity of pure water.

    temperature: elementwise, Cel, -40 to 50.
    """
    return column(polyval(column(temperature), STATIC))


@in_blocks
def parts(frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike = 0.0) -> Parts:
    """Real part and loss of water, salt acting through conduction alone.

    frequency: elementwise, Hz, up to 500e9. temperature: elementwise, Cel, -40 to 50.
    conductivity_25: elementwise, S/m at 25 Cel.
    """
    t, omega = column(temperature), 2 * np.pi * column(frequency)
    real, loss = static_permittivity(t), np.zeros_like(t)
    for a, b, c, d in TERMS:
        strength, time = a * np.exp(-b * t), c * np.exp(d / (t + CRITICAL))
        slow, lost = relaxation(strength, omega * time)
        real, loss = real - strength + slow, loss + lost
    return with_conduction((real, loss), frequency, temperature, conductivity_25)


TURNER_KNEIFEL_CADEDDU_2016 = WaterModel(
    key="turner-kneifel-cadeddu-2016",
    title="Pure water down to -40 Cel, two Debye relaxations",
    equation="eps = eps_s - sum of D_i + sum of D_i / (1 + j 2 pi f tau_i) "
    "- j sigma_w / (2 pi f eps_0), D_i = a_i exp(-b_i T), tau_i = c_i exp(d_i / (T + 134.2)), "
    "eps_s = 87.9144 - 0.404399 T + 9.58726e-4 T^2 - 1.32802e-6 T^3",
    parts=parts,
    static=static_permittivity,
    static_uncertainty=0.05,
    static_departure=0.041,
    relaxation_time_uncertainty=0.015,
    infinite_uncertainty=0.5,
    validity=ranges(temperature=(-40.0, 50.0), frequency=(1e6, 500e9)),
    source=Citation(
        authors="Turner, D. D.; Kneifel, S.; Cadeddu, M. P.",
        year=2016,
        title="An improved liquid water absorption model at microwave frequencies for "
        "supercooled liquid water clouds",
        where="Journal of Atmospheric and Oceanic Technology 33(1), 33-44",
        equation="eqs. 2-6 and the table of coefficients",
        doi="10.1175/JTECH-D-15-0074.1",
        note="coefficients read in five independent copies, static permittivity after Ellison "
        "(2007); fitted from 0.5 to 500 GHz, below that the relaxations are at their static "
        "limit; uncertainties taken to be those of Kaatze (1989), from which it differs less",
    ),
)
