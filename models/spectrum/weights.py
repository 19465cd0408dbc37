"""How uncertain the points of a spectrum are, relative to each other: stated, or found out.

Where nothing is stated, three shapes of noise are tried: relative to each part's own size,
relative to |eps|, or the same everywhere. The one under which the residuals of a rich fit are most
probable is taken; its size follows from the residuals.
"""

from collections.abc import Mapping
from types import MappingProxyType

import numpy as np

from models.relation import Array, ComplexArray
from models.spectrum.spectrum import LEAST_LOSS, Spectrum

FLOOR = 1e-7
"""Relative: no instrument is better, and rounding must not decide between forms."""

EACH_PART, MAGNITUDE, CONSTANT = "each-part", "magnitude", "constant"
NOISES: Mapping[str, str] = MappingProxyType({
    EACH_PART: "relative to the size of each part, and not below 1 % of |eps|",
    MAGNITUDE: "relative to |eps|",
    CONSTANT: "the same at all frequencies",
})  # fmt: skip


def unit_noise(shape: str, permittivity: ComplexArray) -> Array:
    """Standard uncertainty of eps' and of eps'' for a noise of size 1; shape (2, n)."""
    size = np.abs(permittivity)
    if shape == EACH_PART:
        least = LEAST_LOSS * size
        return np.array([np.maximum(np.abs(permittivity.real), least),
                         np.maximum(np.abs(permittivity.imag), least)])  # fmt: skip
    if shape == MAGNITUDE:
        return np.array([size, size])
    return np.full((2, len(size)), float(np.sqrt(np.mean(size**2))))


def stated_noise(spectrum: Spectrum) -> Array | None:
    """What the caller states, shape (2, n); None where nothing is."""
    if spectrum.real_u is None or spectrum.loss_u is None:
        return None
    return np.array([spectrum.real_u, spectrum.loss_u])


def likeliest_noise(residual: ComplexArray, permittivity: ComplexArray) -> str:
    """The shape of noise under which the residuals of a rich fit are most probable.

    residual, permittivity: shape (n,); the permittivity is the fitted one.
    """
    parts = np.array([residual.real, residual.imag])

    def surprise(shape: str) -> float:
        unit = unit_noise(shape, permittivity)
        size = np.mean(np.square(parts / unit)) + FLOOR**2
        return float(np.mean(np.log(unit)) + 0.5 * np.log(size))

    return min(NOISES, key=surprise)
