"""The medium around the rods from a whole trace, where its end reflection is gone as well."""

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

import numpy as np

from models.reflection.tdr.whole.experiment import Experiment, Layers
from models.reflection.tdr.whole.fitting import TOO_SIMPLE, Found, covariances, fitted, names_of
from models.reflection.tdr.whole.identification import Identified
from models.reflection.tdr.whole.medium import Medium, Polarisable, apparent_of
from models.reflection.tdr.whole.relaxing import TIMES, Relaxing
from models.relation import Array

STARTS = tuple(np.geomspace(2.5, 75.0, 12).tolist())
"""Permittivities between which the best start is looked for."""
WATER_TIME, CLAY_TIMES = 9.3e-12, (6e-10, 4e-9)
"""s, of water at 20 Cel; and where bound water and clay relax."""
WATER_SHARE, WITHOUT_WATER, LEAST_SHARE = 0.19, 2.0, 0.05
"""Strength of the water's relaxation over the permittivity above it: in a square-root mixture of
soil and water it grows by so much with each unit of permittivity above the second number."""
SPECTRUM_U = (0.6, 0.2, 0.06, 0.02, 0.003)
"""What a share of the spectrum may be: nothing in sand, much in clay. The trace itself weighs
these beliefs."""
HOPELESS = 12.0
"""Surprise in excess of the least at which narrower beliefs are no longer tried: e^-6 in weight."""
MOST_SECTIONS_TRIED = 3


@dataclass(frozen=True, slots=True, eq=False)
class Inversion:
    """The medium that explains a trace, and how well it does."""

    layers: Layers
    covariance: Array
    """Of the layer values."""
    shared: Array
    """Its part that readings of one probe in one soil share."""
    reduced_chi_square: float
    converged: bool
    names: tuple[str, ...] = field(default=())

    @property
    def too_simple(self) -> bool:
        """Whether the model leaves more than noise explains."""
        return self.reduced_chi_square > TOO_SIMPLE

    def apparent(self, frequency: float, layer: int = 0) -> tuple[float, float, float]:
        """Apparent permittivity of a layer at a frequency, Hz; its u, and the shared part."""
        value, slopes = apparent_of(self.layers.media[layer], frequency)
        full = self._placed(slopes, layer)
        return value, _width(full, self.covariance), _width(full, self.shared)

    def permittivity(self, frequency: float, layer: int = 0) -> tuple[complex, float, float]:
        """Permittivity of a layer at a frequency, Hz; the u of its real part and of its loss."""
        medium = self.layers.media[layer]
        s = np.array([2j * np.pi * frequency])
        slopes = medium.derivatives(s)[:, 0]
        widths = [_width(self._placed(part, layer), self.covariance)
                  for part in (slopes.real, slopes.imag)]  # fmt: skip
        return complex(medium.permittivity(s)[0]), widths[0], widths[1]

    def _placed(self, slopes: Array, layer: int) -> Array:
        """Slopes to the values of one layer among those of all."""
        before = sum(len(medium.names) for medium in self.layers.media[:layer])
        full = np.zeros(self.covariance.shape[0])
        full[before : before + slopes.size] = slopes
        return full

    def relative(self, place: int) -> tuple[float, float]:
        """Relative standard uncertainty of one of the numbers, and the shared part."""
        unit = np.zeros(self.covariance.shape[0])
        unit[place] = 1.0
        return _width(unit, self.covariance), _width(unit, self.shared)


def _width(slopes: Array, covariance: Array) -> float:
    return math.sqrt(max(float(slopes @ covariance @ slopes), 0.0))


def invert(
    trace: Experiment, known: Identified, *, conductivity: float = 0.02, terms: int | None = None
) -> Inversion:
    """One medium along the rods.

    conductivity: S/m, where to start, from the late level. terms: relaxations; None: that of water
    and a spectrum of slower ones, as much of it as the trace asks for.
    """
    sigma = max(conductivity, 1e-4)
    build = _relaxing if terms is None else _moist
    starts = [Layers((build(level, sigma),)) for level in STARTS]
    ranked = sorted(starts, key=lambda layers: trace.misfit(known.system, layers))

    def told(start: Layers) -> Inversion:
        if terms is None:
            return _averaged(trace, known, start, _spectra(trace, known, start))
        best = fitted(trace, known, start)
        for extra in range(terms - 1):
            best = fitted(trace, known, _with_term(best.layers, CLAY_TIMES[extra % 2]))
        return _told(trace, known, best)

    return _first_good(told, ranked[:2])


def _first_good(told: Callable[[Layers], Inversion], starts: Sequence[Layers]) -> Inversion:
    """From the first start that explains the trace, else the one that does best."""
    tried: list[Inversion] = []
    for start in starts:
        tried.append(told(start))
        if not tried[-1].too_simple:
            break
    return min(tried, key=lambda one: one.reduced_chi_square)


def invert_layers(
    trace: Experiment, known: Identified, *, conductivity: float, share: float, fixed: bool,
    first: Medium | None = None,
) -> Inversion:  # fmt: skip
    """Two media along the rods, the first from the head on.

    share: of the rods' length in the first, where to start, or what is known of it (``fixed``).
    first: the first medium, if it is known, as air is; the second then has a spectrum of
    relaxations, elsewhere each has that of its water.
    """
    sigma = max(conductivity, 1e-4)
    logit = math.log(share / (1.0 - share))
    levels = (4.0, 9.0, 16.0, 28.0)
    if first is not None:
        starts = [Layers((first, _relaxing(level, sigma)), logit) for level in levels]
        ranked = sorted(starts, key=lambda layers: trace.misfit(known.system, layers))

        def told(start: Layers) -> Inversion:
            found = _spectra(trace, known, start, held=True, placed=fixed)
            return _averaged(trace, known, start, found)

        return _first_good(told, ranked)
    starts = [Layers((_moist(a, sigma), _moist(b, sigma)), logit)
              for a in levels for b in levels if a != b]  # fmt: skip
    ranked = sorted(starts, key=lambda layers: trace.misfit(known.system, layers))
    tried = [fitted(trace, known, start, placed=fixed) for start in ranked[:MOST_SECTIONS_TRIED]]
    return _told(trace, known, min(tried, key=lambda one: one.cost))


def _moist(permittivity: float, conductivity: float) -> Medium:
    """A soil whose water relaxes as water does."""
    ratio = _of_water(permittivity)
    high = permittivity / (1.0 + ratio)
    return Medium(high, (ratio * high,), (WATER_TIME,), conductivity)


def _of_water(permittivity: float) -> float:
    return max(WATER_SHARE * (permittivity - WITHOUT_WATER), LEAST_SHARE)


def _relaxing(permittivity: float, conductivity: float) -> Relaxing:
    """The same, and as yet nothing slower."""
    nothing = (0.0,) * len(TIMES)
    return Relaxing(permittivity, _of_water(permittivity), WATER_TIME, nothing, conductivity)


def _with_term(layers: Layers, time: float) -> Layers:
    medium: Polarisable = layers.media[0]
    strengths, times = (*medium.strengths, 1.0), (*medium.times, time)
    return Layers((Medium(medium.high, strengths, times, medium.conductivity),))


def _spectra(
    trace: Experiment, known: Identified, start: Layers, *, held: bool = False,
    placed: bool = False,
) -> list[Found]:  # fmt: skip
    """One fit for each belief about the spectrum, from wide to narrow, as long as they help.

    Not the other way: where nothing slow is allowed, the relaxation of water takes its place.
    """
    found: list[Found] = []
    at = start
    for spectrum_u in SPECTRUM_U:
        found.append(fitted(trace, known, at, held=held, placed=placed, spectrum_u=spectrum_u,
                            expected=start))  # fmt: skip
        at = found[-1].layers
        if found[-1].surprise > min(one.surprise for one in found) + HOPELESS:
            break
    return found


def _averaged(
    trace: Experiment, known: Identified, start: Layers, found: Sequence[Found]
) -> Inversion:
    """The mean over beliefs, weighted by their evidence; their spread widens the covariance."""
    surprise = np.array([one.surprise for one in found])
    weights = np.exp(-0.5 * (surprise - surprise.min()))
    weights /= weights.sum()
    values = np.array([one.layers.values for one in found])
    mean = weights @ values
    parts = [covariances(trace, known, one) if weight > 0.001 else None
             for one, weight in zip(found, weights, strict=True)]  # fmt: skip
    away = values - mean
    total, shared = (away.T * weights) @ away, np.zeros((mean.size, mean.size))
    for part, weight in zip(parts, weights, strict=True):
        if part is not None:
            total, shared = total + weight * part[0], shared + weight * part[1]
    best = found[int(np.argmax(weights))]
    return Inversion(start.with_values(mean), total, shared, best.chi_square,
                     best.fit.converged, names_of(start))  # fmt: skip


def _told(trace: Experiment, known: Identified, found: Found) -> Inversion:
    """Covariance from noise, widened by what is unexplained, and from the system."""
    total, shared = covariances(trace, known, found)
    return Inversion(found.layers, total, shared, found.chi_square, found.fit.converged,
                     names_of(found.layers))  # fmt: skip
