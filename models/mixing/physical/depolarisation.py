"""Stratton (1941): depolarisation factors of spheroids, from needle over sphere to disc."""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, column

NEARLY_ROUND = 0.05
"""Below this |1 - 1/r^2| the closed forms lose digits and the series has them all."""
TERMS = 12


@np.errstate(all="ignore")
def depolarisation_factors(aspect_ratio: ArrayLike) -> tuple[Array, Array]:
    """Factors along the axis of symmetry, and along each of the two others.

    aspect_ratio: elementwise, length along the axis of symmetry over length across it; below 1
        flattened, above 1 drawn out. NaN where it is not above 0.

    The three factors of a spheroid sum to one; a sphere has 1/3 three times, a disc 1, 0, 0.
    """
    ratio = column(aspect_ratio)
    s = 1 - 1 / ratio**2  # squared eccentricity, negative for the flattened
    axial = np.where(
        np.abs(s) < NEARLY_ROUND, _nearly_round(s), np.where(s > 0, _long(s), _flat(s))
    )
    axial = np.where(ratio > 0, axial, np.nan)
    return axial, (1 - axial) / 2


def _long(s: Array) -> Array:
    e = np.sqrt(s)
    return (1 - s) / (2 * e**3) * (np.log((1 + e) / (1 - e)) - 2 * e)


def _flat(s: Array) -> Array:
    e = np.sqrt(-s)
    return (1 - s) / e**3 * (e - np.arctan(e))


def _nearly_round(s: Array) -> Array:
    """(1 - s) (1/3 + s/5 + s^2/7 + ...), the series of both."""
    series = np.zeros_like(s)
    for k in reversed(range(TERMS)):
        series = series * s + 1 / (2 * k + 3)
    return (1 - s) * series
