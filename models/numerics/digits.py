"""Decimal digits that a change of unit keeps: what binary arithmetic adds behind them goes."""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, column

DIGITS = 14
"""Significant digits, of which a double holds 15 to 17: one is for the arithmetic."""


def without_rounding(values: ArrayLike, offset: float = 0.0) -> Array:
    """The decimal numbers that values stand for, elementwise, any unit; NaN stays NaN.

    offset: what was added on the way, in the same unit: digits are counted from the larger of
        both, since the difference has the absolute error of the larger.

    285.1 K comes out as 11.95 Cel, and 0.0238 S/m as 0.238 dS/m. Numbers outside 1e-8 to 1e14 are
    left alone: powers of ten that are exact do not reach them.
    """
    found = column(values)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        size = np.floor(np.log10(np.maximum(np.abs(found), abs(offset))))
        places = DIGITS - 1 - size
        scale = np.power(10.0, np.clip(places, 0, 22))
        rounded = np.rint(found * scale) / scale
    return np.where((places >= 0) & (places <= 22), rounded, found)
