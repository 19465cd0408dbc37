"""Real roots and powers that answer NaN, without a warning, where they have no real value."""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, column


def root(x: ArrayLike) -> Array:
    """The square root, elementwise; NaN below zero."""
    return np.sqrt(_from_zero(x))


@np.errstate(over="ignore")
def square(x: ArrayLike) -> Array:
    """What ``root`` takes back to x, elementwise; NaN below zero, where no root lies."""
    return _from_zero(x) ** 2


@np.errstate(over="ignore")
def power(x: ArrayLike, exponent: float) -> Array:
    """The positive power of x, elementwise; NaN below zero."""
    return _from_zero(x) ** exponent


def _from_zero(x: ArrayLike) -> Array:
    x = column(x)
    return np.where(x >= 0, x, np.nan)
