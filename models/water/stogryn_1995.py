"""Stogryn, Bull, Rubayi and Iravanchy (1995): static permittivity and conductivity of sea water."""

import numpy as np
from numpy.polynomial.polynomial import polyval
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column

SALINITY_35 = (2.903602, 8.607e-2, 4.738817e-4, -2.991e-6, 4.3047e-9)
"""Conductivity at a salinity of 35, S/m, rising powers of Cel."""
SOURCE = Citation(
    authors="Stogryn, A. P.; Bull, H. T.; Rubayi, K.; Iravanchy, S.",
    year=1995,
    title="The microwave permittivity of sea and fresh water",
    where="GenCorp Aerojet report, Azusa, California",
    note="read in two independent copies; 1004.75 and not 10004.75, which several copies print",
)


@np.errstate(all="ignore")
def static_permittivity(temperature: ArrayLike) -> Array:
    """Static permittivity of pure water.

    temperature: elementwise, Cel, -25 to 40.
    """
    t = column(temperature)
    return (3.70886e4 - 82.168 * t) / (421.854 + t)


@np.errstate(all="ignore")
def conductivity(salinity: ArrayLike, temperature: ArrayLike) -> Array:
    """Electrical conductivity of sea water, S/m.

    salinity: elementwise, g/kg, up to 40. temperature: elementwise, Cel, -2 to 34.

    For sea water only: 1.7 % below the practical salinity scale at 1 g/kg.
    """
    s, t = column(salinity), column(temperature)
    a0 = (6.9431 + 3.2841 * s - 9.9486e-2 * s**2) / (84.850 + 69.024 * s + s**2)
    a1 = 49.843 - 0.2276 * s + 0.198e-2 * s**2
    at_15 = s * (37.5109 + 5.45216 * s + 1.4409e-2 * s**2) / (1004.75 + 182.283 * s + s**2)
    return polyval(t, SALINITY_35) * at_15 * (1 + a0 * (t - 15) / (a1 + t))
