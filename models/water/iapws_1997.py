"""IAPWS R8-97: static permittivity of water, from its density and temperature."""

import numpy as np
from numpy.polynomial.polynomial import polyval
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column, ranges
from models.water.blocks import in_blocks
from models.water.family import Parts, WaterModel
from models.water.relaxation import without_relaxation

# Constants as printed in the release. The fit was made with them: newer CODATA
# values would move the result by 8e-6, so they stay.
BOLTZMANN = 1.380658e-23
AVOGADRO = 6.0221367e23
VACUUM = 8.854187817e-12
DIPOLE = 6.138e-30
POLARIZABILITY = 1.636e-40
MOLAR_MASS = 0.018015268

TERMS = (
    (0.978224486826, 1, 0.25), (-0.957771379375, 1, 1), (0.237511794148, 1, 2.5),
    (0.714692244396, 2, 1.5), (-0.298217036956, 3, 1.5), (-0.108863472196, 3, 2.5),
    (0.949327488264e-1, 4, 2), (-0.980469816509e-2, 5, 2), (0.165167634970e-4, 6, 5),
    (0.937359795772e-4, 7, 0.5), (-0.12317921872e-9, 10, 10),
)  # fmt: skip
"""N, i, j of N delta^i tau^j."""

DENSITY = (999.83952, 16.945176, -7.9870401e-3, -46.170461e-6, 105.56302e-9, -280.54253e-12)
DENSITY_DENOMINATOR = (1.0, 16.879850e-3)
"""Kell (1975): density of water at 0.101325 MPa, rising powers of Cel."""


@np.errstate(all="ignore")
def density(temperature: ArrayLike) -> Array:
    """Density of water at 0.101325 MPa by Kell (1975), kg/m3.

    temperature: elementwise, Cel, 0 to 100.
    """
    t = column(temperature)
    return polyval(t, DENSITY) / polyval(t, DENSITY_DENOMINATOR)


@np.errstate(all="ignore")
def static_permittivity_at(density: ArrayLike, temperature: ArrayLike) -> Array:
    """Static permittivity of water or steam.

    density: elementwise, kg/m3.
    temperature: elementwise, Cel, -35.15 to 599.85.
    """
    rho, kelvin = column(density), column(temperature) + 273.15
    delta, tau = rho / 322, 647.096 / kelvin
    g = 1 + 0.196096504426e-2 * delta * (kelvin / 228 - 1) ** -1.2
    for n, i, j in TERMS:
        g = g + n * delta**i * tau**j
    a = AVOGADRO * DIPOLE**2 * rho * g / (MOLAR_MASS * VACUUM * BOLTZMANN * kelvin)
    b = AVOGADRO * POLARIZABILITY * rho / (3 * MOLAR_MASS * VACUUM)
    root = np.sqrt(9 + 2 * a + 18 * b + a**2 + 10 * a * b + 9 * b**2)
    return (1 + a + 5 * b + root) / (4 - 4 * b)


def static_permittivity(temperature: ArrayLike) -> Array:
    """Static permittivity of liquid water at 0.101325 MPa.

    temperature: elementwise, Cel, 0 to 100.
    """
    return static_permittivity_at(density(temperature), temperature)


@in_blocks
def parts(frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike = 0.0) -> Parts:
    """Static permittivity and the loss by conduction alone.

    frequency: elementwise, Hz. temperature: elementwise, Cel, 0 to 100.
    conductivity_25: elementwise, S/m at 25 Cel.
    """
    return without_relaxation(
        static_permittivity(temperature), frequency, temperature, conductivity_25
    )


IAPWS_1997 = WaterModel(
    key="iapws-1997",
    title="Static permittivity of pure water, international reference",
    equation="eps' = eps_s of release R8-97 at the density of Kell (1975) and 0.101325 MPa; "
    "eps'' = sigma_w / (2 pi f eps_0): no relaxation",
    parts=parts,
    static=static_permittivity,
    static_uncertainty=0.05,
    static_departure=0.0005,
    validity=ranges(temperature=(0.0, 100.0), frequency=(1e6, 1.5e9)),
    source=Citation(
        authors="IAPWS",
        year=1997,
        title="Release on the static dielectric constant of ordinary water substance for "
        "temperatures from 238 K to 873 K and pressures up to 1000 MPa",
        where="IAPWS R8-97; Journal of Physical and Chemical Reference Data 26(4), 1125-1166",
        equation="eqs. 1-6",
        doi="10.1063/1.555997",
        note="coefficients read in an independent implementation; density by Kell (1975), Journal "
        "of Chemical and Engineering Data 20(1), 97-105, from memory, confirmed to 4e-6 from 0 to "
        "60 Cel against IAPWS-95; uncertainty and upper frequency ours: eps' of pure water at "
        "20 Cel is 0.33 % below static at 1 GHz, 0.74 % at 1.5 GHz",
    ),
)
