"""Inputs that are not uncertain: they go with the rows, and nothing is drawn or moved for them."""

from dataclasses import dataclass, replace
from typing import Any, Self

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, column
from models.uncertainty.distributions import Distribution


@dataclass(frozen=True, slots=True)
class Exact(Distribution):
    """Known: the same wherever the others are. No derivative is taken along it."""

    width: Any = 0.0

    def __post_init__(self) -> None:
        """Nothing can be wrong with it."""

    def take(self, index: Any) -> Self:
        """Some of the rows."""
        return self if np.size(self.mean) == 1 else replace(self, mean=column(self.mean)[index])

    @property
    def rows(self) -> int:
        """How many; 1 for a scalar."""
        return int(np.size(self.mean))

    @property
    def exact(self) -> bool:
        """It is."""
        return True

    def from_normal(self, z: ArrayLike) -> Array:
        """The value itself."""
        del z
        return column(self.mean)

    @property
    def standard_uncertainty(self) -> Array:
        """None."""
        return column(0.0)
