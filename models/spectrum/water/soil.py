"""A wet soil over a whole band: its phases, what conducts, and what relaxes where they meet.

Solids, free water, bound water and air are mixed by any of ``mixtures``. Bound water is water that
relaxes more slowly (Or and Wraith, 1999): the static permittivity of free water and a relaxation
time of its own. Conduction goes through the free water, inside the mixture, or beside it as a
direct current of the whole soil; charges that pile up where phases meet relax as a Cole-Cole term
slower than any water.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from models.relation import Array, ComplexArray
from models.spectrum.form import OUTSIDE, per_conductivity
from models.spectrum.relaxation import dispersion
from models.spectrum.water.mixtures import MIXTURES, Mixed, Phase
from models.water.relaxation import Debye

SLOWEST_BOUND = 1e-9
"""s; what relaxes more slowly is charge at interfaces, not water."""
BOUND_OVER_FREE = 2.0
"""Bound water relaxes at least this much more slowly than free water, or it is free."""
MOST_CONDUCTIVITY = 30.0  # S/m, of saturated brine
MOST_BOUND = 0.4
DIRECT = 1e15
"""Permittivity of water by which conduction is all there is."""


@dataclass(frozen=True, slots=True)
class Variant:
    """Which processes a soil shows in the band."""

    bound: bool = False
    interface: bool = False
    beside: bool = False
    """Conduction lies beside the mixture, not in its water."""

    @property
    def names(self) -> tuple[str, ...]:
        """Parameters, in the order of a vector; those starting with ln_ are logarithms."""
        names = ["free_water_content", "bulk_conductivity" if self.beside else "water_conductivity"]
        names += ["bound_water_content", "ln_bound_relaxation_time"] if self.bound else []
        if self.interface:
            names += ["ln_interface_strength", "ln_interface_relaxation_time", "interface_alpha"]
        return tuple(names)

    @property
    def title(self) -> str:
        """The variant in a few words."""
        parts = ["free water"] + ["bound water"] * self.bound + ["interfaces"] * self.interface
        return " + ".join(parts) + (", conduction beside" if self.beside else "")


@dataclass(frozen=True, slots=True)
class Scene:
    """All that is known of a soil beside its water; SI."""

    frequency: Array
    model: str
    parameters: Mapping[str, Any]
    """Of the mixing model: porosity, solid_permittivity, and its own."""
    water: Debye
    """Of the pore water without conduction."""

    def bounds(self, variant: Variant) -> tuple[Array, Array]:
        """Where a vector may lie."""
        free = float(self.water.relaxation_time)
        slowest = OUTSIDE / (2 * np.pi * float(self.frequency.min()))
        most = {"free_water_content": (0.0, 1.0), "bound_water_content": (0.0, MOST_BOUND),
                "water_conductivity": (0.0, MOST_CONDUCTIVITY),
                "bulk_conductivity": (0.0, MOST_CONDUCTIVITY),
                "ln_bound_relaxation_time": (np.log(BOUND_OVER_FREE * free),
                                             np.log(SLOWEST_BOUND)),
                "ln_interface_strength": (np.log(1e-4), np.log(1e7)),
                "ln_interface_relaxation_time": (np.log(SLOWEST_BOUND),
                                                 np.log(max(slowest, 10 * SLOWEST_BOUND))),
                "interface_alpha": (0.0, 0.6)}  # fmt: skip
        low, high = zip(*(most[name] for name in variant.names), strict=True)
        return np.array(low), np.array(high)


@np.errstate(all="ignore")
def permittivity(
    scene: Scene, variant: Variant, vector: Array
) -> tuple[ComplexArray, ComplexArray]:
    """Permittivity eps' - j eps'' of the soil, and its derivatives by the vector.

    Returns shapes (n,) and (n, parameters).
    """
    given = dict(zip(variant.names, vector.tolist(), strict=True))
    w = 2 * np.pi * scene.frequency
    unit = per_conductivity(w)
    water = scene.water
    strength = float(water.static - water.infinite)
    relaxing, _ = dispersion("debye", w, float(np.log(water.relaxation_time)))
    sigma = given.get("water_conductivity", 0.0)
    free = float(water.infinite) + strength * relaxing + sigma * unit
    bound, by_time = None, None
    if variant.bound:
        slow, slopes = dispersion("debye", w, given["ln_bound_relaxation_time"])
        bound, by_time = float(water.infinite) + strength * slow, strength * slopes[0]
    mixed = _mixed(scene, given, free, bound)
    columns = [mixed.by_fraction[1] - mixed.by_fraction[-1]]
    columns.append(unit if variant.beside else mixed.by_permittivity[1] * unit)
    value = mixed.value
    if variant.beside:
        value = value + given["bulk_conductivity"] * unit
    if by_time is not None:
        columns.append(mixed.by_fraction[2] - mixed.by_fraction[-1])
        columns.append(mixed.by_permittivity[2] * by_time)
    if variant.interface:
        size = np.exp(given["ln_interface_strength"])
        shape = (given["interface_alpha"],)
        g, slopes = dispersion("cole-cole", w, given["ln_interface_relaxation_time"], shape)
        value = value + size * g
        columns += [size * g, *(size * slopes)]
    return value, np.array(columns).T


def _mixed(
    scene: Scene, given: Mapping[str, float], free: ComplexArray, bound: ComplexArray | None
) -> Mixed:
    porosity = scene.parameters["porosity"]
    one = np.ones_like(free)
    theta, held = given["free_water_content"], given.get("bound_water_content", 0.0)
    phases: list[Phase] = [(1 - porosity, scene.parameters["solid_permittivity"] * one)]
    phases.append((theta, free))
    if bound is not None:
        phases.append((held, bound))
    phases.append((porosity - theta - held, one))
    return MIXTURES[scene.model](phases, scene.parameters)


@np.errstate(all="ignore")
def path_of_current(scene: Scene, free: float, bound: float = 0.0) -> float:
    """Bulk conductivity over that of the water, in the mixture, for a direct current.

    free, bound: water contents, m3/m3.
    """
    still = np.full(1, -1j * DIRECT)
    given = {"free_water_content": free, "bound_water_content": bound}
    mixed = _mixed(scene, given, still, np.full(1, complex(float(scene.water.static))))
    return float((mixed.value[0] / still[0]).real)
