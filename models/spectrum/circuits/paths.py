"""Two materials in three paths: each alone, and both one after the other.

Sachs and Spiegler (1964) described plugs of ion-exchange resin so, and soils conduct alike: through
water alone, along grains alone, and through grains and water in turn. Here both materials have a
permittivity and a conductivity. Only the third path relaxes, once; so the mixture is a Debye
relaxation with a conductivity, and where the geometry is known it tells both materials.
"""

from dataclasses import dataclass
from functools import partial

import numpy as np
from scipy.optimize import brentq

from models.conductivity.loss import VACUUM_PERMITTIVITY
from models.errors import Complaint, ParameterError
from models.spectrum.circuits.units import Relaxing

RATIOS = np.geomspace(1e-5, 1e5, 801)
"""Of the two permittivities, between which solutions are looked for."""


@dataclass(frozen=True, slots=True)
class Material:
    """A lossy material without a relaxation of its own."""

    permittivity: float
    conductivity: float
    """S/m"""


@dataclass(frozen=True, slots=True)
class Geometry:
    """Shares of the cross-section: first alone, second alone; the rest has both in turn."""

    first: float
    second: float
    split: float
    """Of the third path's length, the part that is of the first material."""

    def __post_init__(self) -> None:
        """Raises ParameterError unless all shares lie where shares can."""
        both = 1 - self.first - self.second
        if min(self.first, self.second, both) < 0 or not 0 < self.split < 1:
            detail = "shares must be at least 0 and add up to at most 1, split between 0 and 1"
            raise ParameterError("geometry", [Complaint("geometry", detail)])

    @property
    def both(self) -> float:
        """Share of the path that has both materials in turn."""
        return 1 - self.first - self.second

    def along(self, ratio: float) -> float:
        """Permittivity or conductivity of the mixture over the first material's.

        ratio: the second's over the first's.
        """
        return self.first + self.second * ratio + self.both * ratio / self.across(ratio)

    def across(self, ratio: float) -> float:
        """What lies under the third path's fraction, over the first material's."""
        return self.split * ratio + 1 - self.split


def mixed(first: Material, second: Material, geometry: Geometry) -> Relaxing:
    """The relaxation and conductivity of the mixture, exactly."""
    e, s = second.permittivity / first.permittivity, second.conductivity / first.conductivity
    slow, quick = geometry.across(s), geometry.across(e)
    turn = geometry.both * geometry.split * (1 - geometry.split)
    return Relaxing(
        infinite_permittivity=first.permittivity * geometry.along(e),
        relaxation_strength=first.permittivity * turn * (s - e) ** 2 / (quick * slow**2),
        relaxation_time=VACUUM_PERMITTIVITY * first.permittivity * quick
        / (first.conductivity * slow),
        conductivity=first.conductivity * geometry.along(s),
    )  # fmt: skip


def materials(mixture: Relaxing, geometry: Geometry) -> tuple[tuple[Material, Material], ...]:
    """Every pair of materials that makes this mixture in this geometry; may be none.

    For each ratio of the permittivities, the relaxation time leaves a quadratic equation for that
    of the conductivities; the strength then picks the ratios.
    """
    logs = np.log(RATIOS)
    found: list[tuple[Material, Material]] = []
    for branch in (0, 1):
        surplus = partial(_surplus, mixture, geometry, branch)
        values = np.array([surplus(one) for one in logs])
        for i in np.flatnonzero(np.sign(values[:-1]) * np.sign(values[1:]) < 0).tolist():
            ratio = float(np.exp(brentq(surplus, logs[i], logs[i + 1], xtol=1e-14)))
            other = _other(mixture, geometry, ratio, branch)
            if other is not None:
                found.append(_pair(mixture, geometry, ratio, other))
    return tuple(found)


def _surplus(mixture: Relaxing, geometry: Geometry, branch: int, log_ratio: float) -> float:
    """Strength that a ratio of permittivities makes, less the one that is there."""
    ratio = float(np.exp(log_ratio))
    other = _other(mixture, geometry, ratio, branch)
    wanted = mixture.relaxation_strength / mixture.infinite_permittivity
    return np.nan if other is None else _strength(geometry, ratio, other) - wanted


def _strength(geometry: Geometry, e: float, s: float) -> float:
    """Strength over infinite permittivity."""
    turn = geometry.both * geometry.split * (1 - geometry.split)
    under = geometry.across(e) * geometry.across(s) ** 2 * geometry.along(e)
    return turn * (s - e) ** 2 / under


def _other(mixture: Relaxing, geometry: Geometry, e: float, branch: int) -> float | None:
    """Ratio of the conductivities that goes with one of the permittivities, by the time."""
    scaled = mixture.relaxation_time * mixture.conductivity
    scaled /= VACUUM_PERMITTIVITY * mixture.infinite_permittivity
    k = scaled * geometry.along(e) / geometry.across(e)
    a, b, d, s = geometry.first, geometry.second, geometry.both, geometry.split
    c = 1 - s
    square, linear, constant = b * s - k * s * s, a * s + b * c + d - 2 * k * c * s, c * (a - k * c)
    roots = np.roots([square, linear, constant])
    real = sorted(float(root.real) for root in roots if abs(root.imag) < 1e-12 * abs(root))
    positive = [root for root in real if root > 0]
    return positive[branch] if branch < len(positive) else None


def _pair(mixture: Relaxing, geometry: Geometry, e: float, s: float) -> tuple[Material, Material]:
    first = Material(
        mixture.infinite_permittivity / geometry.along(e),
        mixture.conductivity / geometry.along(s),
    )
    return first, Material(first.permittivity * e, first.conductivity * s)
