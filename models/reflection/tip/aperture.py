"""Admittance of a coaxial aperture on a medium, in units of j w C0: how a tip sees permittivity.

Marcuvitz (1951), Stuchly and Stuchly (1980): capacitance. Marsland and Evans (1987): radiation.
Levine and Papas (1951), Misra (1987): the integral over the aperture field, here as the power
series of its exponential, so that capacitance and radiation are its first two terms.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from functools import lru_cache
from types import MappingProxyType
from typing import Literal

import numpy as np
from scipy.constants import epsilon_0, speed_of_light
from scipy.special import ellipe

from models.errors import Complaint, ParameterError
from models.relation import Array, ComplexArray

Model = Literal["capacitive", "radiating", "fitted", "aperture-field"]
MODELS: Mapping[Model, str] = MappingProxyType({
    "capacitive": "y = eps (Stuchly and Stuchly 1980)",
    "radiating": "y = eps + g eps^2.5, g = -j |g| f^3 (Marsland and Evans 1987), g from the radii",
    "fitted": "y = eps + h f^2 eps^2 - j g f^3 eps^2.5 + what these two bring in higher powers, h "
    "and g real and the same at all frequencies, from four or more standards",
    "aperture-field": "y = eps (1 + sum over n > 1 of m_n (-j k)^n), k = 2 pi f sqrt(eps) / c, "
    "m_n from the radii (Levine and Papas 1951, Misra 1987)",
})  # fmt: skip
"""Relative admittance of every model, and who says so."""

TERMS = 64
REACH = 25.0
"""|k| 2b up to which the series has digits left; beyond, an aperture is no longer small."""
UNIT = 1e9  # Hz, of the fitted coefficients
WAVE_NUMBER = 2 * np.pi * UNIT / speed_of_light
FOLLOWING = 12
"""Powers up to which a fitted aperture is carried on."""
STARTS = (0.75e-3, 1.5e-3, 3e-3, 6e-3)  # m, outer radii
USUAL = 3.3
"""Ratio of the radii of a 50 ohm line filled with PTFE."""


@dataclass(frozen=True, slots=True)
class Geometry:
    """Radii of the inner conductor and of the inside of the outer one, m; the fill between."""

    inner: float
    outer: float
    fill: float = 2.1

    def __post_init__(self) -> None:
        if not 0 < self.inner < self.outer:
            detail = f"inner_radius must be above 0 and below outer_radius, found {self.inner:g} m"
            place = ("aperture", "inner_radius")
            raise ParameterError("aperture", [Complaint("inner_radius", detail, place)])

    @property
    def width(self) -> float:
        """Of the aperture: outer minus inner radius, m."""
        return self.outer - self.inner

    @property
    def capacitance(self) -> float:
        """C0, F per unit of permittivity, of the TEM field: 20 % above that of the true field."""
        log = np.log(self.outer / self.inner)
        return float(2 * epsilon_0 * _moments(self.inner, self.outer)[0] / log**2)

    @property
    def series(self) -> Array:
        """Coefficients m_n of (-j k)^n, shape (TERMS,), m^n: 1, 0, then what the field adds."""
        moments = _moments(self.inner, self.outer)
        return moments / moments[0]


@lru_cache(maxsize=32)
def _moments(inner: float, outer: float) -> Array:
    """Integrals of cos(phi) R^(n-1) / n! over both radii and 0 < phi < pi, shape (TERMS,).

    R is the distance of two points of the aperture. The first has a closed form (Marcuvitz 1951),
    the second is zero. The others are summed where R has no kink: the radii as a triangle.
    """
    nodes, weights = np.polynomial.legendre.leggauss(24)
    half, half_weights = 0.5 * (nodes + 1), 0.5 * weights
    large = inner + (outer - inner) * half
    small = inner + (large[:, None] - inner) * half
    angle, angle_weights = np.pi * half**2, 2 * np.pi * half * half_weights
    area = 2 * (outer - inner) * half_weights[:, None] * (large[:, None] - inner) * half_weights
    a, b = large[:, None, None], small[:, :, None]
    distance = np.sqrt(np.maximum(a * a + b * b - 2 * a * b * np.cos(angle), 0.0))
    weight = area[:, :, None] * angle_weights * np.cos(angle)
    total = inner + outer
    found = np.zeros(TERMS)
    found[0] = 4 * total * (ellipe(4 * inner * outer / total**2) - 1)
    power = weight
    for n in range(2, TERMS):
        power = power * distance / n
        found[n] = power.sum()
    found.flags.writeable = False
    return found


@dataclass(frozen=True, slots=True)
class Aperture:
    """One model with what it needs: radii, or the fitted coefficients h and g at 1 GHz."""

    model: Model
    geometry: Geometry | None = None
    fitted: tuple[float, float] = (0.0, 0.0)

    def __post_init__(self) -> None:
        if self.model in {"radiating", "aperture-field"} and self.geometry is None:
            detail = f"the {self.model} aperture needs inner_radius and outer_radius, in m"
            raise ParameterError("aperture", [Complaint("aperture", detail, ("aperture",))])

    @property
    def coefficients(self) -> ComplexArray:
        """Of y / eps as a power series of sqrt(eps) times the frequency in GHz."""
        if self.model == "capacitive":
            return np.ones(1, dtype=complex)
        if self.model == "fitted":
            return self._fitted()
        assert self.geometry is not None  # noqa: S101 - asked before
        known = self.geometry.series * (-1j * WAVE_NUMBER) ** np.arange(TERMS)
        return known if self.model == "aperture-field" else known[:4] * (1, 0, 0, 1)

    def _fitted(self) -> ComplexArray:
        """H and g, and the higher powers that they bring in an aperture of like proportions."""
        h, g = self.fitted
        shape = Geometry(1.0, USUAL) if self.geometry is None else self.geometry
        series = shape.series[:FOLLOWING]
        found = np.zeros(FOLLOWING, dtype=complex)
        found[0] = 1.0
        for n in range(2, FOLLOWING):
            halves, odd = (n - 3 * (n % 2)) // 2, n % 2
            own = series[n] / (series[2] ** halves * series[3] ** odd)
            found[n] = own * h**halves * (-1j * g) ** odd
        return found

    @np.errstate(all="ignore")
    def admittance(
        self, permittivity: ComplexArray, frequency: Array
    ) -> tuple[ComplexArray, ComplexArray]:
        """Relative admittance Y / (j w C0) and its derivative by permittivity, elementwise.

        permittivity: eps' - j eps''. frequency: Hz, broadcast with it.
        """
        x = np.sqrt(permittivity) * (frequency / UNIT)
        if self.model == "aperture-field" and self.geometry is not None:
            x = np.where(np.abs(x) * WAVE_NUMBER * 2 * self.geometry.outer <= REACH, x, np.nan)
        value, slope = np.zeros_like(x), np.zeros_like(x)  # of the series, by x
        for coefficient in self.coefficients[::-1]:
            slope = slope * x + value
            value = value * x + coefficient
        return permittivity * value, np.asarray(value + 0.5 * x * slope, dtype=complex)

    def by_coefficient(
        self, permittivity: ComplexArray, frequency: Array, steps: Array
    ) -> ComplexArray:
        """Derivative of the relative admittance by h and g, shape (..., 2).

        steps: of h and of g, over which half-differences are taken.
        """
        columns = []
        for place, step in enumerate(steps.tolist()):
            ends = [
                self.moved(place, sign * step).admittance(permittivity, frequency)[0]
                for sign in (1, -1)
            ]
            columns.append((ends[0] - ends[1]) / (2 * step))
        return np.stack(columns, axis=-1)

    def starts(self) -> Iterator["Aperture"]:
        """Where a fit may begin: a capacitance, and apertures from narrow to wide."""
        yield self
        for outer in STARTS if self.geometry is None else (self.geometry.outer,):
            _, _, square, cube = Geometry(outer / USUAL, outer).series[:4] * WAVE_NUMBER ** (
                np.arange(4)
            )
            yield replace(self, fitted=(-float(square), -float(cube)))

    def moved(self, place: int, step: float) -> "Aperture":
        """The same with one of the fitted coefficients moved."""
        h, g = self.fitted
        return replace(self, fitted=(h + step, g) if place == 0 else (h, g + step))

    @np.errstate(all="ignore")
    def permittivity(self, admittance: ComplexArray, frequency: Array) -> ComplexArray:
        """Permittivity of a relative admittance: the inverse, elementwise; NaN where none is near.

        Newton's method from the capacitive value, the rest of the equation let in by parts.
        """
        if self.model == "capacitive":
            return admittance + 0.0
        eps = admittance + 0.0
        for share in (0.25, 0.5, 0.75, 1.0):
            for _ in range(3 if share < 1 else 25):
                value, slope = self.admittance(eps, frequency)
                value = share * value + (1 - share) * eps - admittance
                step = value / (share * slope + (1 - share))
                size = np.abs(step)
                eps = eps - step * np.minimum(1.0, 0.5 * np.abs(eps) / np.maximum(size, 1e-300))
                if not np.any(size > 1e-13 * np.abs(eps)):
                    break
        value, _ = self.admittance(eps, frequency)
        return np.where(np.abs(value - admittance) <= 1e-9 * np.abs(admittance), eps, np.nan)
