"""Whose uncertainty a band is: each input's share of the variance, and what the band is without."""

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.numerics.added import added
from models.relation import Array, column
from models.uncertainty.correlation import correlation_matrix

NOBODY = -1
"""In place of the largest, where nothing is uncertain or there is no number."""


@dataclass(frozen=True, slots=True)
class Budget:
    """Columns of shape (n,), by input; NaN where the variance is 0 or no number."""

    share: Mapping[str, Array]
    """Of the variance; the shares of a row add up to 1. With correlation, one can be negative."""
    narrowing: Mapping[str, Array]
    """By what share the standard uncertainty falls if this input were exact and the rest as is."""
    largest: NDArray[np.int8]
    """Which has the largest share: its place in ``names``, or ``NOBODY``."""

    @property
    def names(self) -> tuple[str, ...]:
        """Inputs, in the order they were given."""
        return tuple(self.share)


def budget_of(contributions: Mapping[str, Array], correlation: ArrayLike | None = None) -> Budget:
    """The variance of each row, shared out.

    contributions: signed, one standard uncertainty of each input carried through the measurand, as
        ``propagate`` gives them; a model's own uncertainty may stand among them. Shape (n,).
    correlation: of the inputs, in that order.
    Raises ParameterError when the correlation matrix is none.

    Half the variance is not half the band: without an input that has half of it, the band is 29 %
    narrower.
    """
    parts = np.stack(np.broadcast_arrays(*map(column, contributions.values())))
    if correlation is None:
        together = parts
    else:
        matrix = correlation_matrix(correlation, len(parts))
        together = sum(row[:, None] * part for row, part in zip(matrix.T, parts, strict=True))
    owned = parts * together
    variance = added(owned)
    variance = np.where(variance > 0, variance, np.nan)
    share = owned / variance
    left = np.maximum(1.0 - 2.0 * share + np.square(parts) / variance, 0.0)
    known = ~np.isnan(variance)
    largest = np.where(known, np.argmax(np.where(known, share, 0.0), axis=0), NOBODY)
    return Budget(
        share=MappingProxyType(dict(zip(contributions, share, strict=True))),
        narrowing=MappingProxyType(dict(zip(contributions, 1.0 - np.sqrt(left), strict=True))),
        largest=largest.astype(np.int8),
    )
