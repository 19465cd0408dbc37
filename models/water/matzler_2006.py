"""Matzler (2006): ice, whose permittivity a probe sees instead of the water that froze."""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Citation, Relation, column, ranges
from models.water.family import Parts


@np.errstate(all="ignore")
def parts(frequency: ArrayLike, temperature: ArrayLike) -> Parts:
    """Real part and loss of pure ice.

    frequency: elementwise, Hz, 10e6 to 300e9. temperature: elementwise, Cel, -73 to 0.

    Above 1 MHz the slow relaxation of ice is over: eps' lies between 3.16 and 3.19 down to
    -30 Cel, and a probe takes ice for solid matter.
    """
    kelvin, f = column(temperature) + 273.15, column(frequency) / 1e9
    warm, cold = 3.1884 + 9.1e-4 * (kelvin - 273), 3.1611 + 4.3e-4 * (kelvin - 243)
    real = np.where(kelvin >= 243, warm, cold)
    theta = 300 / kelvin - 1
    alpha = (0.00504 + 0.0062 * theta) * np.exp(-22.1 * theta)
    phonon = np.exp(335 / kelvin)
    beta = (
        (0.0207 / kelvin) * phonon / (phonon - 1) ** 2
        + 1.16e-11 * f**2
        + np.exp(-9.963 + 0.0372 * (kelvin - 273.16))
    )
    loss = alpha / f + beta * f
    return np.broadcast_to(real, loss.shape).copy(), loss


MATZLER_2006 = Relation(
    key="matzler-2006",
    title="Pure ice",
    equation="eps' = 3.1884 + 9.1e-4 (T + 0.15); eps'' = alpha(T) / f + beta(T, f) f",
    validity=ranges(temperature=(-73.15, 0.0), frequency=(10e6, 300e9)),
    source=Citation(
        authors="Matzler, C.",
        year=2006,
        title="Microwave dielectric properties of ice",
        where="Thermal Microwave Radiation: Applications for Remote Sensing, chapter 5, IET; "
        "eps' after Matzler and Wegmuller (1987), Journal of Physics D 20, 1623-1630",
        note="coefficients read in two independent families of copies; lowest temperature from "
        "memory",
    ),
)
