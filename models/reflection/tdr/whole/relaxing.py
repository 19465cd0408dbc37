"""A soil that relaxes in more ways than a trace can tell apart: a spectrum over fixed times."""

from dataclasses import dataclass

import numpy as np

from models.reflection.tdr.whole.line import conducting
from models.reflection.tdr.whole.medium import LARGEST
from models.relation import Array, ComplexArray

TIMES = tuple(np.geomspace(1.2e-10, 8e-9, 7).tolist())
"""s, from where a trace no longer mistakes them for water to where conduction hides all else."""


@dataclass(frozen=True, slots=True)
class Relaxing:
    """Moist soil, whose water relaxes, and beside it a spectrum of slower relaxations.

    base (1 - w + w / (1 + s t) + sum q / (1 + s TIMES)) + conductivity / (s eps0), w = r / (1 + r).
    The shares q of the spectrum may fall below zero by their uncertainty: a bound at zero would let
    noise through upward only.
    """

    base: float
    """Permittivity below the relaxation of water, without the spectrum."""
    ratio: float
    """r: what water relaxes, over the permittivity above it."""
    time: float
    """Of water, s."""
    shares: tuple[float, ...]
    """q: strengths of the spectrum, over ``base``."""
    conductivity: float
    """S/m"""

    @property
    def high(self) -> float:
        """Permittivity far above the relaxations."""
        return self.base / (1.0 + self.ratio)

    @property
    def static(self) -> float:
        """Permittivity far below the relaxations."""
        return self.base * (1.0 + sum(self.shares))

    @property
    def strengths(self) -> tuple[float, ...]:
        """Of water, then of the spectrum."""
        return (self.base - self.high, *(self.base * share for share in self.shares))

    @property
    def times(self) -> tuple[float, ...]:
        """Of water, then of the spectrum, s."""
        return (self.time, *TIMES)

    @property
    def names(self) -> tuple[str, ...]:
        """Of ``values``, in their order."""
        return (
            "ln_permittivity_above_spectrum",
            "ln_strength_over_high_permittivity_1",
            "ln_relaxation_time_1",
            *(f"share_of_spectrum_{k}" for k in range(1, len(TIMES) + 1)),
            "ln_bulk_conductivity",
        )

    @property
    def values(self) -> Array:
        """Logarithms, and the shares of the spectrum as they are."""
        begin = np.log([self.base, self.ratio, self.time])
        return np.concatenate([begin, self.shares, [np.log(self.conductivity)]])

    def with_values(self, values: Array) -> "Relaxing":
        """The medium with these numbers."""
        base, ratio, time = np.exp(np.clip(values[:3], -LARGEST, LARGEST)).tolist()
        last = float(np.exp(np.clip(values[-1], -LARGEST, LARGEST)))
        return Relaxing(base, ratio, time, tuple(values[3:-1].tolist()), last)

    def permittivity(self, s: ComplexArray) -> ComplexArray:
        """At complex frequencies, 1/s; at s = j w it is eps' - j eps''."""
        return self._polar(s) + conducting(s, self.conductivity)

    def derivatives(self, s: ComplexArray) -> ComplexArray:
        """To each of ``values``: shape (values, frequencies)."""
        share = self.ratio / (1.0 + self.ratio)
        decay = 1 / (1 + s * self.time)
        ratio = self.base * share * (1 - share) * (decay - 1)
        time = -self.base * share * decay * (1 - decay)
        spectrum = [self.base / (1 + s * slow) for slow in TIMES]
        conduction = conducting(s, self.conductivity)
        return np.array([self._polar(s), ratio, time, *spectrum, conduction])

    def _polar(self, s: ComplexArray) -> ComplexArray:
        share = self.ratio / (1.0 + self.ratio)
        total = 1 - share + share / (1 + s * self.time)
        for part, slow in zip(self.shares, TIMES, strict=True):
            total = total + part / (1 + s * slow)
        return self.base * total
