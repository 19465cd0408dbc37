"""Liquids and air as standards: permittivity at a temperature, and what is not known of it."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from models.conductivity.corwin_lesch_2005 import CORWIN_LESCH_2005
from models.conductivity.loss import VACUUM_PERMITTIVITY
from models.conductivity.sodium_chloride import concentration
from models.registry import Registry
from models.relation import Array, Citation, ComplexArray, Relation, ranges
from models.water import kaatze_1989, peyman_2007

ROOM = 25.0  # Cel, of the constants below


class Relaxation(NamedTuple):
    """One Debye relaxation and conduction; the same four numbers hold their uncertainties."""

    static: float
    infinite: float
    time: float
    """s"""
    conductivity: float = 0.0
    """S/m, at the temperature of the medium"""

    @np.errstate(all="ignore")
    def permittivity(self, frequency: Array) -> ComplexArray:
        """Permittivity eps' - j eps'' at a frequency, Hz."""
        w = 2 * np.pi * frequency
        relaxed = self.infinite + (self.static - self.infinite) / (1 + 1j * w * self.time)
        return np.asarray(relaxed - 1j * self.conductivity / (w * VACUUM_PERMITTIVITY))


@dataclass(frozen=True, slots=True)
class Known:
    """Permittivity of a standard over frequency, shape (f,)."""

    permittivity: ComplexArray
    variations: tuple[ComplexArray, ...] = ()
    """What one standard uncertainty of each thing that is not known changes, shape (f,) each."""
    outside: NDArray[np.bool_] | None = None
    """Where its source does not vouch for it, shape (f,); None: nowhere."""

    def within(self, relative: float) -> "Known":
        """The same with one relative standard uncertainty, real part and loss apart."""
        if relative == 0.0:
            return replace(self, variations=())
        eps = self.permittivity
        parts = (np.asarray(relative * part, dtype=complex) for part in (eps.real, 1j * eps.imag))
        return replace(self, variations=tuple(parts))


@dataclass(frozen=True, slots=True, kw_only=True)
class Medium(Relation):
    """A medium whose permittivity follows from temperature, and for salt water conductivity."""

    relaxation: Callable[[float, float], Relaxation]
    """From temperature, Cel, and conductivity at 25 Cel, S/m."""
    uncertainty: Relaxation
    """Standard uncertainties: static and time relative, infinite absolute, conductivity relative"""
    needs_temperature: bool = True
    needs_conductivity: bool = False

    def known(
        self,
        frequency: Array,
        temperature: float = ROOM,
        conductivity_25: float = 0.0,
        temperature_u: float = 0.0,
    ) -> Known:
        """Permittivity over frequency, Hz, with what temperature and constants leave open."""
        here = self.relaxation(temperature, conductivity_25)
        u = self.uncertainty
        moved = (
            here._replace(static=here.static * (1 + u.static)),
            here._replace(infinite=here.infinite + u.infinite),
            here._replace(time=here.time * (1 + u.time)),
            here._replace(conductivity=here.conductivity * (1 + u.conductivity)),
            self.relaxation(temperature + temperature_u, conductivity_25),
        )
        eps = here.permittivity(frequency)
        changes = (other.permittivity(frequency) - eps for other in moved if other != here)
        return Known(eps, tuple(changes), self._outside(frequency, temperature))

    def _outside(self, frequency: Array, temperature: float) -> NDArray[np.bool_] | None:
        found = np.zeros(frequency.shape, dtype=bool)
        for name, value in (("frequency", frequency), ("temperature", temperature)):
            if name in self.validity:
                found |= self.validity[name].excludes(value)
        return found if found.any() else None


def _air(_temperature: float, _conductivity: float) -> Relaxation:
    return Relaxation(1.00059, 1.00059, 0.0)


def _water(temperature: float, _conductivity: float) -> Relaxation:
    return Relaxation(*(float(value) for value in kaatze_1989.debye(temperature)))


def _saline(temperature: float, conductivity_25: float) -> Relaxation:
    pure, salt = kaatze_1989.debye(temperature), concentration(conductivity_25)
    return Relaxation(
        float(pure.static * peyman_2007.static_factor(temperature, salt)),
        float(pure.infinite),
        float(pure.relaxation_time * peyman_2007.time_factor(temperature, salt)),
        float(CORWIN_LESCH_2005.from_25(conductivity_25, temperature)),
    )


def _organic(
    static: float, slope: float, infinite: float, time: float, activation: float
) -> Callable[[float, float], Relaxation]:
    """From values at 25 Cel; slope: of log10 static, 1/K; activation: of the time, K."""

    def relaxation(temperature: float, _conductivity: float) -> Relaxation:
        warmer = temperature - ROOM
        inverse = 1 / (temperature + 273.15) - 1 / (ROOM + 273.15)
        power, factor = 10.0 ** (slope * warmer), np.exp(activation * inverse)
        return Relaxation(static * float(power), infinite, time * float(factor))

    return relaxation


_DEBYE = "eps = eps_inf + (eps_s - eps_inf) / (1 + j 2 pi f tau) - j sigma / (2 pi f eps_0)"
_LIQUIDS = Citation(
    authors="Gregory, A. P.; Clarke, R. N.",
    year=2012,
    title="Tables of the complex permittivity of dielectric reference liquids at frequencies up "
    "to 5 GHz",
    where="NPL Report MAT 23",
    note="rounded values at 25 Cel from memory; slope of the static permittivity as in Maryott and "
    "Smith (1951), NBS Circular 514, from memory; give permittivity or relaxation of your own "
    "where a percent matters",
)

MEDIA: Registry[Medium] = Registry(
    "standard",
    Medium(key="air", title="Air", equation="eps = 1.00059", relaxation=_air,
           uncertainty=Relaxation(1e-4, 1e-4, 0.0), needs_temperature=False,
           source=Citation(authors="Birnbaum, G.; Kryder, S. J.; Lyons, H.", year=1951,
                           title="Microwave measurements of the dielectric properties of gases",
                           where="Journal of Applied Physics 22, 95-102",
                           note="from memory; moist air at 20 Cel is within 0.0001")),
    Medium(key="water", title="Distilled water", equation=_DEBYE, relaxation=_water,
           uncertainty=Relaxation(6e-4, kaatze_1989.KAATZE_1989.infinite_uncertainty,
                                  kaatze_1989.KAATZE_1989.relaxation_time_uncertainty),
           validity=kaatze_1989.KAATZE_1989.validity, source=kaatze_1989.KAATZE_1989.source),
    Medium(key="saline", title="Sodium chloride in water", equation=_DEBYE, relaxation=_saline,
           uncertainty=Relaxation(5e-3, 0.5, 0.02, 0.01), needs_conductivity=True,
           validity=peyman_2007.PEYMAN_2007.saline_validity,
           source=peyman_2007.PEYMAN_2007.source),
    Medium(key="methanol", title="Methanol", equation=_DEBYE,
           relaxation=_organic(32.6, -2.64e-3, 5.6, 50e-12, 1810.0),
           uncertainty=Relaxation(5e-3, 0.3, 0.02),
           validity=ranges(temperature=(5.0, 50.0), frequency=(1e7, 5e9)), source=_LIQUIDS),
    Medium(key="ethanol", title="Ethanol", equation=_DEBYE,
           relaxation=_organic(24.4, -2.70e-3, 4.5, 165e-12, 2655.0),
           uncertainty=Relaxation(5e-3, 0.2, 0.02),
           validity=ranges(temperature=(5.0, 50.0), frequency=(1e7, 5e9)), source=_LIQUIDS),
    Medium(key="acetone", title="Acetone", equation=_DEBYE,
           relaxation=_organic(20.7, -2.05e-3, 1.9, 3.3e-12, 600.0),
           uncertainty=Relaxation(0.01, 0.3, 0.1),
           validity=ranges(temperature=(0.0, 40.0), frequency=(1e7, 10e9)), source=_LIQUIDS),
)  # fmt: skip
"""What may stand before a tip under its name alone."""
