"""The whole band inverted: water content, conductivity and bound water of a soil at once.

Variants of the soil (``soil.Variant``) are fitted by weighted complex least squares with analytic
derivatives, and the simplest within reach of the smallest AICc is taken, as for relaxation terms.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from itertools import product

import numpy as np

from models.conductivity.corwin_lesch_2005 import CORWIN_LESCH_2005
from models.conductivity.loss import VACUUM_PERMITTIVITY
from models.conductivity.sodium_chloride import concentration
from models.numerics.complex_fit import complex_least_squares, covariance
from models.relation import Array, ComplexArray
from models.spectrum.choice import CLOSE
from models.spectrum.fit import FINE, ROUGH
from models.spectrum.spectrum import Spectrum
from models.spectrum.water.soil import Scene, Variant, path_of_current, permittivity
from models.water import kaatze_1989, peyman_2007
from models.water.relaxation import Debye

VARIANTS = tuple(
    Variant(bound=bound, interface=interface, beside=beside)
    for bound, interface, beside in product((False, True), repeat=3)
)
WATER_CONTENTS = (0.03, 0.1, 0.2, 0.3, 0.45)
"""m3/m3, of free water, from which fits start."""
BOUND_TIMES = (4e-11, 3e-10)
"""s, of bound water, from which fits start."""
POINTS = 400
"""Of a longer spectrum, as many as an inversion takes."""
AT_BEST = 1e-3
"""Relative: no mixing model, and no model of the water in it, is nearer to a soil than that, and
what is left below it must not decide between variants."""
SALT_ROUNDS = 3
"""Salt lowers the permittivity of water a little, and how much salt there is is found here: each
round brings the answer nearer by two digits."""


@dataclass(frozen=True)
class Band:
    """One variant of the soil, fitted to a band."""

    scene: Scene
    variant: Variant
    spectrum: Spectrum
    vector: Array
    noise: Array
    """Standard uncertainties of both parts, shape (2, n)."""
    noise_stated: bool

    @cached_property
    def fitted(self) -> tuple[ComplexArray, ComplexArray]:
        """Permittivity at the frequencies of the spectrum, and its derivatives."""
        return permittivity(self.scene, self.variant, self.vector)

    @cached_property
    def residuals(self) -> Array:
        """Measured minus fitted, over the noise; shape (2, n)."""
        off = self.spectrum.permittivity - self.fitted[0]
        return np.array([off.real, off.imag]) / self.noise

    @property
    def degrees_of_freedom(self) -> int:
        """Numbers less parameters."""
        return self.residuals.size - len(self.vector)

    @property
    def reduced_chi_square(self) -> float:
        """1 where the noise was stated rightly and the soil is as assumed."""
        return float(np.sum(np.square(self.residuals))) / max(self.degrees_of_freedom, 1)

    @property
    def relative_residual(self) -> float:
        """Root mean square of measured minus fitted, over |eps|."""
        off = np.abs(self.spectrum.permittivity - self.fitted[0]) / np.abs(self.fitted[0])
        return float(np.sqrt(np.mean(np.square(off))))

    @property
    def aicc(self) -> float:
        """Akaike's criterion, corrected for few points."""
        n, k = self.residuals.size, len(self.vector)
        surprise = float(np.sum(np.square(self.residuals)))
        if not self.noise_stated:
            k += 1
            surprise = n * float(np.log(surprise / n + AT_BEST**2))
        return surprise + 2 * k + 2 * k * (k + 1) / max(n - k - 1, 1e-9)

    @cached_property
    def covariance(self) -> Array:
        """Of the vector; scaled by the residuals unless these stay within the stated noise."""
        low, high = self.scene.bounds(self.variant)
        endless = np.array([name.startswith("ln_") for name in self.variant.names])
        held = (self.vector - low < 1e-6) | (high - self.vector < 1e-6)
        factor = self.reduced_chi_square
        if self.noise_stated:
            factor = max(1.0, factor)
        free = np.flatnonzero(~(held & endless))
        return covariance(self.fitted[1], self.noise, free) * factor

    def value(self, name: str) -> float:
        """One parameter; 0 where the variant has none of that name."""
        names = self.variant.names
        return float(self.vector[names.index(name)]) if name in names else 0.0

    @property
    def water_content(self) -> float:
        """Free and bound, m3/m3."""
        return self.value("free_water_content") + self.value("bound_water_content")

    @property
    def conductivities(self) -> tuple[float, float]:
        """Of the pore water and of the whole soil for a direct current, S/m at soil temperature."""
        if self.variant.beside:  # on no path of the mixture's, so all water takes part
            bulk, path = self.value("bulk_conductivity"), self._path(self.water_content)
            return (bulk / path if path > 0 else np.nan), bulk
        path = self._path(self.value("free_water_content"), self.value("bound_water_content"))
        water = self.value("water_conductivity")
        return water, water * path

    def _path(self, free: float, bound: float = 0.0) -> float:
        return path_of_current(self.scene, free, bound)


def invert(
    spectrum: Spectrum,
    scene: Scene,
    noise: Array,
    temperature: float,
    variants: Sequence[Variant] = VARIANTS,
) -> list[Band]:
    """Every variant, fitted; the chosen one first, then by AICc.

    noise: shape (2, n). temperature: Cel. scene: its water need not know of salt yet.
    """
    few = replace(scene, frequency=spectrum.frequency)
    tried = [refined(_best(spectrum, few, variant, noise), temperature) for variant in variants
             if len(variant.names) < 2 * len(spectrum.frequency) - 2]  # fmt: skip
    tried.sort(key=lambda band: band.aicc)
    close = [band for band in tried if band.aicc <= tried[0].aicc + CLOSE]
    chosen = min(close, key=lambda band: (len(band.vector), band.aicc))
    rest = [band for band in tried if band is not chosen]
    return [chosen, *rest]


def refined(band: Band, temperature: float) -> Band:
    """The same variant from where it stands, its water now with the salt that it was found to hold.

    temperature: Cel.
    """
    for _ in range(SALT_ROUNDS):
        scene = replace(band.scene, water=salty_water(temperature, band.conductivities[0]))
        vector, _ = _from(band.spectrum, scene, band.variant, band.noise, band.vector, FINE)
        band = Band(scene, band.variant, band.spectrum, vector, band.noise, band.noise_stated)
    return band


def salty_water(temperature: float, conductivity: float = 0.0) -> Debye:
    """Relaxation of water with as much sodium chloride as makes it conduct so.

    temperature: Cel. conductivity: S/m at that temperature.
    """
    pure = kaatze_1989.debye(temperature)
    salt = float(concentration(CORWIN_LESCH_2005.to_25(conductivity, temperature)))
    if not salt > 0:
        return pure
    return Debye(
        pure.static * peyman_2007.static_factor(temperature, salt),
        pure.infinite,
        pure.relaxation_time * peyman_2007.time_factor(temperature, salt),
    )


def _best(spectrum: Spectrum, scene: Scene, variant: Variant, noise: Array) -> Band:
    tried = [
        _from(spectrum, scene, variant, noise, start, ROUGH)
        for start in _starts(spectrum, scene, variant, noise)
    ]
    vector = min(tried, key=lambda pair: pair[1])[0]
    vector, _ = _from(spectrum, scene, variant, noise, vector, 1e-10)
    return Band(scene, variant, spectrum, vector, noise, spectrum.noise_stated)


def _from(
    spectrum: Spectrum, scene: Scene, variant: Variant, noise: Array, start: Array, tolerance: float
) -> tuple[Array, float]:
    return complex_least_squares(
        lambda vector: permittivity(scene, variant, vector), start, scene.bounds(variant),
        spectrum.permittivity, noise, tolerance,
    )  # fmt: skip


def _starts(spectrum: Spectrum, scene: Scene, variant: Variant, noise: Array) -> Iterator[Array]:
    """The two best of a grid of water contents and times, the rest guessed."""
    guesses = list(_grid(spectrum, scene, variant))

    def misfit(vector: Array) -> float:
        off = permittivity(scene, variant, vector)[0] - spectrum.permittivity
        return float(np.sum(np.square(off.real / noise[0]) + np.square(off.imag / noise[1])))

    guesses.sort(key=misfit)
    yield from guesses[:2]
    yield guesses[len(guesses) // 2]


def _grid(spectrum: Spectrum, scene: Scene, variant: Variant) -> Iterator[Array]:
    slow = int(np.argmin(spectrum.frequency))
    w = 2 * np.pi * spectrum.frequency[slow]
    bulk = float(max(-spectrum.permittivity[slow].imag, 1e-6) * w * VACUUM_PERMITTIVITY)
    times = BOUND_TIMES if variant.bound else BOUND_TIMES[:1]
    strengths = (1.0, 10.0) if variant.interface else (0.0,)
    for theta, time, strength in product(WATER_CONTENTS, times, strengths):
        path = max(path_of_current(scene, theta), 1e-4)
        vector = [theta, bulk if variant.beside else bulk / path]
        if variant.bound:
            vector += [0.05, np.log(time)]
        if variant.interface:
            vector += [np.log(strength), np.log(1 / w / 4), 0.1]
        yield np.array(vector)
