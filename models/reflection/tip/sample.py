"""What was before a tip besides its standards."""

from dataclasses import dataclass

import numpy as np

from models.relation import Array, ComplexArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Sample:
    """A medium, and what was read of it; shape (f,)."""

    read: ComplexArray
    spread: Array | None = None
    """Standard uncertainty of each part of what was read; None: as of the standards."""
    freedom: float = np.inf
    """Degrees of freedom of the spread."""
    scatter: float = float("nan")
    """Standard deviation of each part of a single sweep, where there are several."""
    grain_size: float | None = None
    """Of the largest grain, m."""
    thickness: float | None = None
    """To whatever lies behind, m."""
    gap: float | None = None
    """Thickness of a film of air between tip and sample, m."""
    gap_u: float = 0.0
