"""What surrounds the rods: relaxations and conduction, as numbers a fit can move freely."""

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from models.reflection.tdr.whole.line import conducting
from models.relation import Array, ComplexArray

LARGEST = 80.0
"""Logarithms beyond which nothing is asked for."""


@dataclass(frozen=True, slots=True)
class Medium:
    """high + sum strength / (1 + s time) + conductivity / (s eps0), at complex frequency s."""

    high: float
    """Permittivity far above the relaxations."""
    strengths: tuple[float, ...] = ()
    times: tuple[float, ...] = ()
    """s"""
    conductivity: float = 0.0
    """S/m"""

    @property
    def static(self) -> float:
        """Permittivity far below the relaxations."""
        return self.high + sum(self.strengths)

    @property
    def names(self) -> tuple[str, ...]:
        """Of ``values``, in their order."""
        terms = range(1, len(self.strengths) + 1)
        return (
            "ln_static_permittivity",
            *(f"ln_strength_over_high_permittivity_{k}" for k in terms),
            *(f"ln_relaxation_time_{k}" for k in terms),
            "ln_bulk_conductivity",
        )

    @property
    def values(self) -> Array:
        """Logarithms of static permittivity, of strengths over ``high``, times, conductivity.

        Far above its band a relaxation shows only the product of strength and time: a straight
        line in these numbers, and the static permittivity does not move along it.
        """
        ratios = [strength / self.high for strength in self.strengths]
        numbers = np.array((self.static, *ratios, *self.times, self.conductivity))
        return np.log(np.maximum(numbers, np.finfo(np.float64).tiny))

    @classmethod
    def of_values(cls, values: Array) -> "Medium":
        """The medium with these numbers."""
        numbers = np.exp(np.clip(values, -LARGEST, LARGEST)).tolist()
        terms = (len(numbers) - 2) // 2
        ratios = numbers[1 : 1 + terms]
        high = numbers[0] / (1 + sum(ratios))
        times = tuple(numbers[1 + terms : 1 + 2 * terms])
        return cls(high, tuple(high * ratio for ratio in ratios), times, numbers[-1])

    def with_values(self, values: Array) -> "Medium":
        """The medium with these numbers."""
        return Medium.of_values(values)

    def permittivity(self, s: ComplexArray) -> ComplexArray:
        """At complex frequencies, 1/s; at s = j w it is eps' - j eps''."""
        total = self.high + conducting(s, self.conductivity)
        for strength, time in zip(self.strengths, self.times, strict=True):
            total = total + strength / (1 + s * time)
        return total

    def derivatives(self, s: ComplexArray) -> ComplexArray:
        """To each of ``values``: shape (values, frequencies)."""
        conduction = conducting(s, self.conductivity)
        decays = [1 / (1 + s * time) for time in self.times]
        polar = self.high + 0 * s
        for strength, decay in zip(self.strengths, decays, strict=True):
            polar = polar + strength * decay
        pairs = list(zip(self.strengths, decays, strict=True))
        ratio = [strength * (decay - polar / self.static) for strength, decay in pairs]
        time = [-strength * decay * (1 - decay) for strength, decay in pairs]
        return np.array([polar, *ratio, *time, conduction])


class Polarisable(Protocol):
    """What a medium says of itself to a fit."""

    @property
    def conductivity(self) -> float:
        """In S/m."""

    @property
    def static(self) -> float:
        """Permittivity far below the relaxations."""

    @property
    def high(self) -> float:
        """Permittivity far above the relaxations."""

    @property
    def strengths(self) -> tuple[float, ...]:
        """Of the relaxations."""

    @property
    def times(self) -> tuple[float, ...]:
        """Of the relaxations, s."""

    @property
    def names(self) -> tuple[str, ...]:
        """Of ``values``, in their order."""

    @property
    def values(self) -> Array:
        """What a fit moves."""

    def with_values(self, values: Array) -> "Polarisable":
        """The medium with these numbers."""

    def permittivity(self, s: ComplexArray) -> ComplexArray:
        """At complex frequencies, 1/s."""

    def derivatives(self, s: ComplexArray) -> ComplexArray:
        """To each of ``values``: shape (values, frequencies)."""


def apparent_of(medium: Polarisable, frequency: float) -> tuple[float, Array]:
    """Apparent permittivity of a medium at a frequency, Hz, and its derivatives to its values.

    Ka = (Re n)^2, n = sqrt(eps): dKa = Re n Re(d eps / n).
    """
    s = np.array([2j * np.pi * frequency])
    index = np.sqrt(medium.permittivity(s))[0]
    slopes = index.real * (medium.derivatives(s)[:, 0] / index).real
    return float(index.real**2), slopes
