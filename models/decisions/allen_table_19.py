"""Allen and others (1998), Table 19: field capacity and wilting point by texture; defaults.

The rows of the table are ranges, and wide: a default is their middle, with the standard
uncertainty of a rectangle over the range. A texture class gives a default, never a field value.
Both numbers of a class are taken as independent, which leaves the available water wider open than
the table's own range of it.
"""

from collections.abc import Mapping
from types import MappingProxyType

import numpy as np

from models.decisions.allen_1998 import SOURCE as PAPER
from models.relation import Citation

SOURCE = Citation(
    authors=PAPER.authors,
    year=PAPER.year,
    title=PAPER.title,
    where="FAO Irrigation and Drainage Paper 56, Table 19",
    note="ranges from a secondary copy",
)

_RANGES: Mapping[str, tuple[tuple[float, float], tuple[float, float]]] = MappingProxyType({
    "sand": ((0.07, 0.17), (0.02, 0.07)),
    "loamy-sand": ((0.11, 0.19), (0.03, 0.10)),
    "sandy-loam": ((0.18, 0.28), (0.06, 0.16)),
    "loam": ((0.20, 0.30), (0.07, 0.17)),
    "silt-loam": ((0.22, 0.36), (0.09, 0.21)),
    "silt": ((0.28, 0.36), (0.12, 0.22)),
    "silty-clay-loam": ((0.30, 0.37), (0.17, 0.24)),
    "silty-clay": ((0.30, 0.42), (0.17, 0.29)),
    "clay": ((0.32, 0.40), (0.20, 0.24)),
})  # fmt: skip
"""Field capacity and wilting point, m3/m3, as printed."""

CLASSES = tuple(_RANGES)
"""Texture classes of the table; the others have no default."""


def field_capacity(texture: str) -> tuple[float, float]:
    """Middle of the range of a class, m3/m3, and its standard uncertainty."""
    return _middle(_RANGES[texture][0])


def wilting_point(texture: str) -> tuple[float, float]:
    """Middle of the range of a class, m3/m3, and its standard uncertainty."""
    return _middle(_RANGES[texture][1])


def _middle(ends: tuple[float, float]) -> tuple[float, float]:
    low, high = ends
    return 0.5 * (low + high), 0.5 * (high - low) / float(np.sqrt(3.0))
