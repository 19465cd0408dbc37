"""Long columns are worked through in pieces that stay in the processor's cache."""

import functools
from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike

from models.relation import column
from models.water.family import Parts

BLOCK = 8192
"""Rows: a dozen intermediate columns of this length fit the second-level cache."""


def in_blocks(parts: Callable[..., Parts]) -> Callable[..., Parts]:
    """The same ``parts(frequency, temperature, conductivity_25=0.0)``, faster on long columns.

    Anything but scalars and columns of one length is passed on as it is. No warning is emitted,
    whatever the numbers.
    """

    @functools.wraps(parts)
    @np.errstate(all="ignore")
    def blocked(
        frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike = 0.0
    ) -> Parts:
        given = (column(frequency), column(temperature), column(conductivity_25))
        rows = max(values.size for values in given)
        if rows <= BLOCK or not {values.shape for values in given} <= {(), (rows,)}:
            return parts(*given)
        real, loss = np.empty(rows), np.empty(rows)
        for start in range(0, rows, BLOCK):
            piece = slice(start, start + BLOCK)
            real[piece], loss[piece] = parts(*(v[piece] if v.ndim else v for v in given))
        return real, loss

    return blocked
