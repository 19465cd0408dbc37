"""The latest row of each key: of each station, probe or depth."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.errors import ReadingError
from models.relation import column
from models.uncertainty.aggregation import Labels


@dataclass(frozen=True, slots=True)
class Latest:
    """One row per key, in the order of the keys."""

    key: NDArray[Any]
    row: Labels
    """Its place in the columns that came."""


def latest(keys: ArrayLike, seconds: ArrayLike, among: ArrayLike | None = None) -> Latest:
    """Where the latest row of each key is.

    keys: shape (n,), anything that can be sorted: labels, names, depths.
    seconds: shape (n,), since the epoch.
    among: shape (n,), true for the rows that may be chosen (those with a number, say); None: all.
        A key none of whose rows may be chosen is not in the answer.

    Of two rows of one key at one time the later in the columns is taken.
    Raises ReadingError when the columns differ in length.
    """
    key, times = np.asarray(keys), column(seconds)
    choice = np.ones(times.shape, dtype=bool) if among is None else np.asarray(among, dtype=bool)
    if key.ndim != 1 or not key.shape == times.shape == choice.shape:
        shapes = f"{key.shape}, {times.shape}, {choice.shape}"
        raise ReadingError(f"keys, seconds and among must be of equal length, found {shapes}")
    rows = np.flatnonzero(choice)
    names, label = np.unique(key[rows], return_inverse=True)
    order = np.lexsort((times[rows], label))
    last = np.append(np.diff(label[order]) > 0, True)[: rows.size]
    return Latest(names, rows[order[last]])
