"""The medium around the rods from a whole trace, where its end reflection is gone as well."""

import math
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from models.numerics.least_squares import Fit, least_squares
from models.reflection.tdr.probe import System
from models.reflection.tdr.whole.experiment import DELAY_UNIT, SYSTEM, Experiment, Layers
from models.reflection.tdr.whole.identification import Identified
from models.reflection.tdr.whole.medium import Medium
from models.relation import Array

MOST_TERMS = 3
"""Relaxations that are tried, one after another."""
TOO_SIMPLE = 1.5
"""Reduced chi-square above which the model does not explain the trace."""
WORTH = 6.0
"""Gain in Akaike's criterion that another relaxation must bring."""
STARTS = (2.5, 4.5, 8.0, 14.0, 25.0, 45.0, 75.0)
"""Permittivities between which the best start is looked for."""
WATER_TIME, CLAY_TIMES = 9.3e-12, (6e-10, 4e-9)
"""s, of water at 20 Cel; and where bound water and clay relax."""
WATER_SHARE = 2.0
"""Strength of the water's relaxation over the permittivity above it, in a moist soil."""
EXPECTED_U = {"ln_static_permittivity": 1.5, "ln_strength_over_high_permittivity": 2.0,
              "ln_relaxation_time": 2.0, "ln_bulk_conductivity": 4.0, "logit": 2.0}  # fmt: skip
"""What is known of each number before the trace: next to nothing."""
WATER_U = {"ln_strength_over_high_permittivity_1": 0.7, "ln_relaxation_time_1": 0.4}
"""But the first relaxation is that of water, which is faster than any trace: left free, it would
take up noise as dispersion, which is always downward."""

TRIGGER_U = 10.0
"""Of the moment of the step from trace to trace, in units of 0.1 ns: cables warm and triggers
wander, and the trace shows by itself when the cable ends."""


@dataclass(frozen=True, slots=True, eq=False)
class Inversion:
    """The medium that explains a trace, and how well it does."""

    layers: Layers
    covariance: Array
    """Of the layer values: logarithms, and the logit of the share of the first layer."""
    shared: Array
    """Its part that comes from the system."""
    reduced_chi_square: float
    converged: bool
    names: tuple[str, ...] = field(default=())

    @property
    def too_simple(self) -> bool:
        """Whether the model leaves more than noise explains."""
        return self.reduced_chi_square > TOO_SIMPLE

    def apparent(self, frequency: float, layer: int = 0) -> tuple[float, float, float]:
        """Apparent permittivity of a layer at a frequency, Hz; its u, and the shared part."""
        before = sum(len(medium.names) for medium in self.layers.media[:layer])
        value, slopes = self.layers.media[layer].apparent(frequency)
        full = np.zeros(self.covariance.shape[0])
        full[before : before + slopes.size] = slopes
        return value, _width(full, self.covariance), _width(full, self.shared)

    def permittivity(self, frequency: float, layer: int = 0) -> tuple[complex, float, float]:
        """Permittivity of a layer at a frequency, Hz; the u of its real part and of its loss."""
        medium = self.layers.media[layer]
        before = sum(len(above.names) for above in self.layers.media[:layer])
        s = np.array([2j * np.pi * frequency])
        slopes = np.zeros(self.covariance.shape[0], dtype=np.complex128)
        slopes[before : before + len(medium.names)] = medium.derivatives(s)[:, 0]
        widths = (_width(slopes.real, self.covariance), _width(slopes.imag, self.covariance))
        return complex(medium.permittivity(s)[0]), *widths

    def relative(self, place: int) -> tuple[float, float]:
        """Relative standard uncertainty of one of the numbers, and the shared part."""
        unit = np.zeros(self.covariance.shape[0])
        unit[place] = 1.0
        return _width(unit, self.covariance), _width(unit, self.shared)


def _width(slopes: Array, covariance: Array) -> float:
    return math.sqrt(max(float(slopes @ covariance @ slopes), 0.0))


def invert(
    trace: Experiment,
    known: Identified,
    *,
    conductivity: float = 0.02,
    terms: int | None = None,
    guess: float | None = None,
) -> Inversion:
    """One medium along the rods.

    conductivity: S/m, where to start, from the late level. terms: relaxations; None: as few as
    explain the trace, at most MOST_TERMS. guess: apparent permittivity, where one is known.
    """
    candidates = STARTS if guess is None else (guess, *STARTS)
    sigma = max(conductivity, 1e-4)

    def start(permittivity: float) -> Layers:
        return Layers((_moist(permittivity, sigma),))

    ranked = sorted(candidates, key=lambda e: trace.misfit(known.system, start(e)))
    best = _fitted(trace, known, start(ranked[0]))
    if _chi_square(best[1]) > TOO_SIMPLE:
        best = min(best, _fitted(trace, known, start(ranked[1])), key=_cost)
    if terms is not None:
        for extra in range(terms - 1):
            best = _fitted(trace, known, _with_term(best[0], CLAY_TIMES[extra % 2]))
        return _told(trace, known, *best)
    while len(best[0].media[0].times) < MOST_TERMS:
        richer = min(
            (_fitted(trace, known, _with_term(best[0], time)) for time in CLAY_TIMES),
            key=_cost,
        )
        if _criterion(best[1]) - _criterion(richer[1]) < WORTH:
            break
        best = richer
    return _told(trace, known, *best)


def invert_layers(
    trace: Experiment, known: Identified, *, conductivity: float, share: float, fixed: bool,
    first: Medium | None = None,
) -> Inversion:  # fmt: skip
    """Two media along the rods, the first from the head on.

    share: of the rods' length in the first, where to start, or what is known of it (``fixed``).
    first: the first medium, if it is known, as air is.
    """
    sigma = max(conductivity, 1e-4)
    logit = math.log(share / (1.0 - share))

    def start(upper: float, lower: float) -> Layers:
        return Layers((first or _moist(upper, sigma), _moist(lower, sigma)), logit)

    levels = (4.0, 9.0, 16.0, 28.0)
    pairs = [(a, b) for a in (levels if first is None else (1.0,)) for b in levels if a != b]
    ranked = sorted(pairs, key=lambda pair: trace.misfit(known.system, start(*pair)))
    best = min(
        (_fitted(trace, known, start(*pair), held=first is not None, placed=fixed)
         for pair in ranked[:3]),
        key=_cost,
    )  # fmt: skip
    return _told(trace, known, *best)


def _moist(permittivity: float, conductivity: float) -> Medium:
    """A soil whose water relaxes as water does."""
    high = permittivity / (1.0 + WATER_SHARE)
    return Medium(high, (WATER_SHARE * high,), (WATER_TIME,), conductivity)


def _with_term(layers: Layers, time: float) -> Layers:
    medium = layers.media[0]
    richer = Medium(
        medium.high, (*medium.strengths, 1.0), (*medium.times, time), medium.conductivity
    )
    return Layers((richer,))


Found = tuple[Layers, Fit, NDArray[np.bool_], Array]
"""Layers, fit (trigger first), which values were free, and 1 / u of them beforehand."""


def _fitted(
    trace: Experiment, known: Identified, start: Layers, *, held: bool = False,
    placed: bool = False,
) -> Found:  # fmt: skip
    """Fit the layers and the moment of the step; held: the first medium stays as it is."""
    names = _names(start)
    values = start.values
    free = np.ones(values.size, dtype=np.bool_)
    if held:
        free[: len(start.media[0].names)] = False
    if placed:
        free[-1] = False
    prior = np.array([1.0 / _expected_u(name) for name in names])
    weights = np.append(1.0 / TRIGGER_U, prior[free])
    columns = np.append(SYSTEM.index("delay"), len(SYSTEM) + np.flatnonzero(free))
    base = known.values

    def model(at: Array) -> tuple[Array, Array]:
        full = values.copy()
        full[free] = at[1:]
        return trace.explained(_at(known, at[0]), start.with_values(full), columns)

    begin = np.append(base[SYSTEM.index("delay")], values[free])
    fit = least_squares(model, begin, begin, weights)
    found = values.copy()
    found[free] = fit.values[1:]
    return start.with_values(found), fit, free, weights


def _expected_u(name: str) -> float:
    return WATER_U.get(name) or EXPECTED_U[name.rstrip("_0123456789")]


def _at(known: Identified, delay: float) -> System:
    return replace(known.system, delay=delay * DELAY_UNIT)


def _names(layers: Layers) -> tuple[str, ...]:
    names = [name for medium in layers.media for name in medium.names]
    return (*names, *["logit"] * (len(layers.media) - 1))


def _cost(found: Found) -> float:
    return found[1].cost


def _chi_square(fit: Fit) -> float:
    return float(fit.residuals @ fit.residuals) / max(fit.residuals.size - fit.values.size, 1)


def _criterion(fit: Fit) -> float:
    return fit.cost + 2.0 * fit.values.size


def _told(
    trace: Experiment,
    known: Identified,
    layers: Layers,
    fit: Fit,
    free: NDArray[np.bool_],
    weights: Array,
) -> Inversion:
    """Covariance from noise, widened by what is unexplained, and from the system."""
    chi_square = _chi_square(fit)
    own = fit.covariance(weights)
    _, slopes = trace.explained(_at(known, fit.values[0]), layers)
    gain = own @ fit.jacobian.T @ slopes[:, : len(SYSTEM)]
    shared = gain @ known.covariance @ gain.T
    total = own * max(chi_square, 1.0) + shared
    full, full_shared = (np.zeros((free.size, free.size)) for _ in range(2))
    places = np.ix_(np.flatnonzero(free), np.flatnonzero(free))
    full[places], full_shared[places] = total[1:, 1:], shared[1:, 1:]
    return Inversion(layers, full, full_shared, chi_square, fit.converged, _names(layers))
