"""One matrix of standard-normal draws, the same for every row of a request.

Common draws make rows comparable and answers repeatable: a row's numbers depend on that row and
the seed, not on its neighbours or on how a file was cut into blocks.
"""

import importlib
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np
from scipy.special import ndtri

from models.errors import Complaint, ParameterError
from models.relation import Array

KEPT = 2**20
"""Numbers in a matrix up to which it is kept for the next block."""
HALF_STEP = 2.0**-31
"""Half the spacing of the points: none lies on 0, whose normal deviate is not finite."""


@dataclass(frozen=True, slots=True)
class Draws:
    """How many, of which kind, from which seed.

    kind: ``quasi-random`` (scrambled Sobol points; ``count`` is rounded up to a power of two)
        or ``pseudo-random``. About ten pseudo-random draws do the work of one quasi-random one.
    Raises ParameterError for a count below 2 or a negative seed.
    """

    count: int = 8192
    seed: int = 1
    kind: Literal["quasi-random", "pseudo-random"] = "quasi-random"

    def __post_init__(self) -> None:
        if self.count < 2 or self.seed < 0:
            found = f"{self.count} and {self.seed}"
            detail = f"needs at least 2 draws and a seed of at least 0, found {found}"
            raise ParameterError("uncertainty", [Complaint("draws", detail)])
        if self.kind == "quasi-random":
            object.__setattr__(self, "count", 1 << (self.count - 1).bit_length())

    def normal(self, inputs: int, batch: int = 0) -> Array:
        """Standard-normal draws, read-only, shape (inputs, count); each batch is independent."""
        make = _kept if inputs * self.count <= KEPT else _made
        return make(self, inputs, batch)


def _made(draws: Draws, inputs: int, batch: int) -> Array:
    generator = np.random.default_rng([draws.seed, batch])
    if draws.kind == "pseudo-random":
        normal = generator.standard_normal((inputs, draws.count))
    else:
        # Loaded when first needed: it brings all of scipy's statistics, 0.3 s at every start.
        sobol = importlib.import_module("scipy.stats.qmc").Sobol(inputs, rng=generator)
        points = sobol.random_base2(draws.count.bit_length() - 1)
        normal = ndtri(np.ascontiguousarray(points.T) + HALF_STEP)
    normal.flags.writeable = False
    return normal


_kept = lru_cache(maxsize=8)(_made)
