"""What a tip reads of a layered medium: how deep it sees, and what an air gap hides.

Static field of the aperture by the variational principle: the field of the line's own mode and
of its next ones, in the coaxial line and in a layer on a half-space, with the least capacitance.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import j0, j1, y0, y1

from models.numerics.inverse import increasing_inverse
from models.reflection.tip.aperture import Geometry
from models.relation import Array, ComplexArray, column

MODES = 10
WAVES = 1000
FAR = 1e3
"""Thickness of a layer that has no end, in outer radii."""
MOST = 30
REFERENCES = (1.0, 78.4)
"""Permittivities between which a calibrated tip is linear: air and water."""
DEEPEST = 8.0
"""Sample thickness in widths of the aperture beyond which nothing is seen."""


@dataclass(frozen=True, slots=True)
class _Field:
    """Energies of the pairs of modes, wave number by wave number across the aperture."""

    wave_number: Array
    """Shape (waves,)."""
    energy: ComplexArray
    """Shape (waves, modes^2); all modes but the first are scaled to unit energy in the line."""
    fill: float

    def capacitance(self, effective: ComplexArray) -> ComplexArray:
        """Up to a factor, on media of effective permittivity, shape (k, waves) to (k,)."""
        size = MODES + 1
        # Not by @: threads of a busy machine wait for one another longer than this takes.
        energy = np.einsum("kw,wp->kp", effective, self.energy).reshape(-1, size, size)
        own = energy[:, 1:, 1:] + self.fill * np.eye(size - 1)
        bent = np.linalg.solve(own, energy[:, 1:, :1])
        return np.asarray(energy[:, 0, 0] - (energy[:, :1, 1:] @ bent)[:, 0, 0], dtype=complex)


@lru_cache(maxsize=32)
def _field(inner: float, outer: float, fill: float) -> _Field:
    width = outer - inner

    def crossing(k: Array) -> Array:
        return np.asarray(j0(k * inner) * y0(k * outer) - j0(k * outer) * y0(k * inner))

    orders = np.arange(1, MODES + 1)
    near, share = orders * np.pi / width, 0.3 / orders
    rising = np.sign(crossing(near * (1 + share)))
    own = increasing_inverse(
        lambda k: rising * crossing(k), np.zeros(MODES), near * (1 - share), near * (1 + share)
    ).tolist()
    wave = np.geomspace(1e-3 / outer, 40 * MODES / width, WAVES)
    rows = [(j0(wave * inner) - j0(wave * outer)) / wave]
    for k in own:
        at = [j1(k * r) * y0(k * inner) - y1(k * r) * j0(k * inner) for r in (outer, inner)]
        energy = 0.5 * ((outer * at[0]) ** 2 - (inner * at[1]) ** 2) / k
        edges = outer * at[0] * j0(wave * outer) - inner * at[1] * j0(wave * inner)
        rows.append(wave / (k**2 - wave**2) * edges / np.sqrt(energy))
    spectra = np.stack(rows)
    pairs = (spectra[:, None, :] * spectra).reshape(-1, wave.size).T
    return _Field(wave, pairs * np.gradient(wave)[:, None] + 0j, fill)


@np.errstate(all="ignore")
def reading(
    geometry: Geometry, layer: ArrayLike, thickness: float, behind: ArrayLike
) -> ComplexArray:
    """Permittivity that a tip calibrated with air and water reads of a layer on a half-space.

    layer, behind: permittivities, shape (k,), that behind infinite for metal.
    thickness: of the layer, m.
    """
    front, back = (np.atleast_1d(np.asarray(v, dtype=complex))[:, None] for v in (layer, behind))
    field = _field(geometry.inner, geometry.outer, geometry.fill)
    thin = np.tanh(field.wave_number * thickness)
    mixed = front * (back + front * thin) / (front + back * thin)
    effective = np.where(np.isinf(back), front / thin, mixed)
    low, high = _references(geometry)
    share = (field.capacitance(effective) - low) / (high - low)
    return np.asarray(REFERENCES[0] + (REFERENCES[1] - REFERENCES[0]) * share)


@lru_cache(maxsize=32)
def _references(geometry: Geometry) -> tuple[complex, complex]:
    """Capacitances on the media between which a tip is calibrated."""
    field = _field(geometry.inner, geometry.outer, geometry.fill)
    low, high = (field.capacitance(np.full((1, WAVES), r + 0j))[0] for r in REFERENCES)
    return complex(low), complex(high)


def backing_error(geometry: Geometry, permittivity: float, thickness: float) -> float:
    """Largest relative error that metal or air behind a sample of that thickness makes."""
    whole = reading(geometry, permittivity, FAR * geometry.outer, permittivity)
    ends = (reading(geometry, permittivity, thickness, back) for back in (np.inf, 1.0))
    return max(float(np.abs(end / whole - 1)[0]) for end in ends)


@lru_cache(maxsize=32)
def sensing_depth(geometry: Geometry, error: float = 0.01, permittivity: float = 20.0) -> float:
    """Thickness, m, from which what lies behind a sample changes the reading by less than that.

    Hardly depends on the permittivity, and scales with the aperture.
    """

    def closeness(thickness: Array) -> Array:
        return column([-backing_error(geometry, permittivity, t) for t in thickness.tolist()])

    low, high = 0.05 * geometry.width, DEEPEST * geometry.width
    return float(increasing_inverse(closeness, column([-error]), low, high)[0])


def gap_error(geometry: Geometry, permittivity: ArrayLike, gap: float) -> Array:
    """Relative change of the real part by a film of air of that thickness, m, under the tip."""
    eps = np.atleast_1d(np.asarray(permittivity, dtype=complex))
    whole = reading(geometry, eps, FAR * geometry.outer, eps)
    return np.asarray(reading(geometry, 1.0, gap, eps).real / whole.real - 1)


@np.errstate(all="ignore")
def without_gap(geometry: Geometry, read: ComplexArray, gap: float) -> ComplexArray:
    """Permittivity of a sample that is read through a film of air, shape (k,); NaN: none is.

    Steep once the gap is a hundredth of the aperture's width: an error of the gap comes out
    larger than it went in.
    """
    if gap == 0.0:
        return read + 0.0

    def through(eps: ComplexArray) -> ComplexArray:
        flat = reading(geometry, eps, FAR * geometry.outer, eps)
        return reading(geometry, 1.0, gap, eps) * eps / flat

    eps: ComplexArray = np.where(np.isfinite(read), read, 1.0 + 0j)
    for _ in range(MOST):
        here, step = through(eps), 1e-4 * eps
        slope = (through(eps + step) - here) / step
        move = (here - read) / slope
        size = np.maximum(np.abs(move), 1e-300)
        eps = eps - move * np.minimum(1.0, 0.7 * np.abs(eps) / size)
        if not np.any(np.abs(move) > 1e-9 * np.abs(eps)):
            break
    close = np.abs(through(eps) - read) <= 1e-6 * np.abs(read)
    return np.where(close & np.isfinite(read), eps, np.nan)
