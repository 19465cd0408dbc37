"""Mixing models as a whole band needs them: complex, with bound water, with their derivatives.

A mixture takes phases, volume fraction and permittivity over frequency, and returns the
permittivity with its derivatives by every fraction and by every permittivity. The equations are
those of ``models.mixing.physical``; the tests hold them against each other.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

import numpy as np

from models.relation import ComplexArray

Phase = tuple[complex, ComplexArray]
"""Volume fraction, and permittivity eps' - j eps'', shape (n,)."""


@dataclass(frozen=True, slots=True)
class Mixed:
    """A mixture and its derivatives, by phase, each of shape (n,)."""

    value: ComplexArray
    by_fraction: tuple[ComplexArray, ...]
    by_permittivity: tuple[ComplexArray, ...]


Mixture = Callable[[Sequence[Phase], Mapping[str, Any]], Mixed]


def power_law(phases: Sequence[Phase], parameters: Mapping[str, Any]) -> Mixed:
    """eps^a = sum f eps_i^a; a is ``exponent``."""
    a = parameters["exponent"]
    lifted = [eps**a for _, eps in phases]
    height = sum(f * one for (f, _), one in zip(phases, lifted, strict=True))
    slope = height ** (1 / a - 1)
    return Mixed(
        slope * height,
        tuple(slope * one / a for one in lifted),
        tuple(f * slope * one / eps for (f, eps), one in zip(phases, lifted, strict=True)),
    )


def complex_refractive(phases: Sequence[Phase], parameters: Mapping[str, Any]) -> Mixed:  # noqa: ARG001
    """The same with a = 1/2: complex indices add up."""
    return power_law(phases, {"exponent": 0.5})


def discs(phases: Sequence[Phase], parameters: Mapping[str, Any]) -> Mixed:  # noqa: ARG001
    """De Loor: thin discs of every other phase among the first, the solids."""
    solid = phases[0][1]
    above = 3 * solid + 2 * sum(f * (eps - solid) for f, eps in phases[1:])
    below = 3 + sum(f * (solid / eps - 1) for f, eps in phases[1:])
    value = above / below
    by_fraction = [np.zeros_like(value)]
    by_permittivity = [np.zeros_like(value)]
    for f, eps in phases[1:]:
        by_fraction.append((2 * (eps - solid) - value * (solid / eps - 1)) / below)
        by_permittivity.append(f * (2 + value * solid / np.square(eps)) / below)
    return Mixed(value, tuple(by_fraction), tuple(by_permittivity))


def spheres_in_water(phases: Sequence[Phase], parameters: Mapping[str, Any]) -> Mixed:
    """Maxwell Garnett: spheres in a host, one of ``host`` water, solid and air.

    phases: solids, free water, bound water where there is any, and air last.
    """
    host = {"solid": 0, "water": 1, "air": len(phases) - 1}[parameters["host"]]
    medium = phases[host][1]
    response = [1 / (eps + 2 * medium) for _, eps in phases]
    total = sum(f * one for (f, _), one in zip(phases, response, strict=True))
    square = 1 / np.square(total)
    by_permittivity: list[Any] = [
        square * f * np.square(one) for (f, _), one in zip(phases, response, strict=True)
    ]
    around = sum(f * np.square(one) for (f, _), one in zip(phases, response, strict=True))
    by_permittivity[host] = by_permittivity[host] + 2 * square * around - 2
    return Mixed(
        1 / total - 2 * medium,
        tuple(-square * one for one in response),
        tuple(by_permittivity),
    )


MIXTURES: Mapping[str, Mixture] = MappingProxyType({
    "complex-refractive": complex_refractive,
    "power-law": power_law,
    "de-loor-1968": discs,
    "maxwell-garnett": spheres_in_water,
})  # fmt: skip
"""By the name of the mixing model whose equation it is."""
DEFAULT_MIXTURE = "complex-refractive"
