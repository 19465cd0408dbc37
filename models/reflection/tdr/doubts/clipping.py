"""Whether traces were cut off at the end of an instrument's range."""

import numpy as np
from numpy.typing import NDArray

from models.reflection.tdr.record import Traces
from models.relation import Array

FEWEST = 8
"""Points that lie exactly at the highest or lowest level of a trace."""
ALIKE = 0.1
"""Share of the other points that are exactly like the one before: what is written down in coarse
steps has more of them, and often a whole level at its end."""


def clipped(given: Traces) -> NDArray[np.bool_]:
    """Traces that lie exactly at one end over many points, and nowhere else repeat themselves."""
    rho = given.rho
    ends = (rho == rho.max(axis=-1, keepdims=True)), (rho == rho.min(axis=-1, keepdims=True))
    cut = np.maximum(ends[0].sum(axis=-1), ends[1].sum(axis=-1)) >= FEWEST
    other = ~(ends[0] | ends[1])[:, 1:]
    repeats = (np.diff(rho, axis=-1) == 0.0) & other
    share: Array = repeats.sum(axis=-1) / np.maximum(other.sum(axis=-1), 1)
    return np.asarray(cut & other.any(axis=-1) & (share < ALIKE))
