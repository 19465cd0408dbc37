"""Media along the rods fitted to one trace, with what is known of each number beforehand."""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray

from models.numerics.least_squares import Fit, least_squares
from models.reflection.tdr.probe import System
from models.reflection.tdr.whole.experiment import DELAY_UNIT, SYSTEM, Experiment, Layers
from models.reflection.tdr.whole.identification import Identified
from models.relation import Array

TOO_SIMPLE = 1.5
"""Reduced chi-square above which the model does not explain the trace."""
EXPECTED_U: Mapping[str, float] = MappingProxyType({
    "ln_static_permittivity": 1.5, "ln_permittivity_above_spectrum": 1.5,
    "ln_strength_over_high_permittivity": 2.0, "ln_relaxation_time": 2.0,
    "ln_bulk_conductivity": 4.0, "logit": 2.0,
})  # fmt: skip
"""What is known of each number before the trace: next to nothing."""
WATER_U: Mapping[str, float] = MappingProxyType(
    {"ln_strength_over_high_permittivity_1": 0.5, "ln_relaxation_time_1": 0.4}
)
"""But the first relaxation is that of water, which is faster than any trace: left free, it would
take up noise as dispersion, which is always downward."""
SPECTRUM = "share_of_spectrum"
FLOORS: Mapping[str, float] = MappingProxyType({
    "ln_static_permittivity": 4e-4, "ln_permittivity_above_spectrum": 4e-4,
    "ln_bulk_conductivity": 2e-3,
})  # fmt: skip
"""Standard uncertainties that remain whatever the noise: no mixture is exactly a sum of
relaxations, no line exactly the sections it is made of here, and late on a slow relaxation looks
like conduction."""
TRIGGER_U = 10.0
"""Of the moment of the step from trace to trace, in units of 0.1 ns: cables warm and triggers
wander, and the trace shows by itself when the cable ends."""


@dataclass(frozen=True, slots=True, eq=False)
class Found:
    """Layers where the sum of squares is least."""

    layers: Layers
    fit: Fit
    """Of the moment of the step, then of the free values."""
    free: NDArray[np.bool_]
    """Which of the layer values were fitted."""
    known: Array
    """1 / u of what was fitted, beforehand."""

    @property
    def cost(self) -> float:
        """Sum of squares, what was known beforehand included."""
        return self.fit.cost

    @property
    def chi_square(self) -> float:
        """Reduced."""
        residuals = self.fit.residuals
        return float(residuals @ residuals) / max(residuals.size - self.fit.values.size, 1)

    @property
    def surprise(self) -> float:
        """Minus twice the logarithm of the evidence: what the trace says against these beliefs.

        Laplace's approximation, a constant left out: cost + ln det(normal) - ln det(known).
        """
        normal = self.fit.jacobian.T @ self.fit.jacobian + np.diag(np.square(self.known))
        return self.cost + float(np.linalg.slogdet(normal)[1] - 2 * np.sum(np.log(self.known)))


def fitted(
    trace: Experiment, system: Identified, start: Layers, *, held: bool = False,
    placed: bool = False, spectrum_u: float = 1.0, expected: Layers | None = None,
) -> Found:  # fmt: skip
    """Fit the layers and the moment of the step.

    held: the first medium stays as it is. placed: so does the share of its length. spectrum_u:
    standard uncertainty of each share of a spectrum beforehand. expected: what is expected before
    the trace, where that is not the start.
    """
    names, values = names_of(start), start.values
    free = np.ones(values.size, dtype=np.bool_)
    if held:
        free[: len(start.media[0].names)] = False
    if placed:
        free[-1] = False
    beliefs = np.array([1.0 / _expected_u(name, spectrum_u) for name in names])
    weights = np.append(1.0 / TRIGGER_U, beliefs[free])
    columns = np.append(SYSTEM.index("delay"), len(SYSTEM) + np.flatnonzero(free))

    def model(at: Array) -> tuple[Array, Array]:
        full = values.copy()
        full[free] = at[1:]
        return trace.explained(moved(system, at[0]), start.with_values(full), columns)

    delay = system.values[SYSTEM.index("delay")]
    begin = np.append(delay, values[free])
    believed = begin if expected is None else np.append(delay, expected.values[free])
    fit = least_squares(model, begin, believed, weights)
    best = values.copy()
    best[free] = fit.values[1:]
    return Found(start.with_values(best), fit, free, weights)


def covariances(trace: Experiment, system: Identified, found: Found) -> tuple[Array, Array]:
    """Covariance of the layer values, and the part that readings of one probe in one soil share.

    Shared are the system, and what is only believed: the inverse N of the normal matrix is that of
    noise, N J'J N, and that of the beliefs P, N P N. The former is widened by what is unexplained.
    """
    own = found.fit.covariance(found.known)
    believed = own @ (np.square(found.known)[:, None] * own)
    _, slopes = trace.explained(moved(system, found.fit.values[0]), found.layers)
    gain = own @ found.fit.jacobian.T @ slopes[:, : len(SYSTEM)]
    of_system = gain @ system.covariance @ gain.T
    widened = max(found.chi_square, 1.0)
    total = (own * widened + of_system)[1:, 1:]
    common = (believed * widened + of_system)[1:, 1:]
    full, shared = (np.zeros((found.free.size, found.free.size)) for _ in range(2))
    places = np.ix_(np.flatnonzero(found.free), np.flatnonzero(found.free))
    full[places], shared[places] = total, common
    floors = np.array([FLOORS.get(name, 0.0) for name in names_of(found.layers)])
    floor = np.diag(np.where(found.free, np.square(floors), 0.0))
    return full + floor, shared + floor


def moved(system: Identified, delay: float) -> System:
    """The system with the step at another moment, in DELAY_UNIT."""
    return replace(system.system, delay=delay * DELAY_UNIT)


def names_of(layers: Layers) -> tuple[str, ...]:
    """Of the layer values, in their order."""
    names = [name for medium in layers.media for name in medium.names]
    return (*names, *["logit"] * (len(layers.media) - 1))


def _expected_u(name: str, spectrum_u: float) -> float:
    stem = name.rstrip("_0123456789")
    return spectrum_u if stem == SPECTRUM else WATER_U.get(name) or EXPECTED_U[stem]
