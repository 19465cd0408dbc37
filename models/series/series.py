"""One quantity over time: columns of equal length, sorted by time."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.errors import ReadingError
from models.flags import Flags
from models.relation import Array, column
from models.uncertainty.aggregation import Labels


@dataclass(frozen=True, slots=True)
class Series:
    """Rows in time order, shape (n,); made by ``series``."""

    seconds: Array
    value: Array
    """NaN where the row has no number."""
    standard_uncertainty: Array
    shared: Array
    flags: Flags
    sources: Labels
    """Rows with the same label share an error."""
    ends: tuple[Array, Array] | None = None
    """Lower and upper end of the band of each value, NaN where there is none; None: not stated."""

    def numbers(self) -> "Series":
        """The rows that have a number."""
        known = np.isfinite(self.value)
        return self if known.all() else self.rows(known)

    def rows(self, kept: slice | NDArray[np.bool_] | Labels) -> "Series":
        """Some of the rows."""
        return Series(
            self.seconds[kept],
            self.value[kept],
            self.standard_uncertainty[kept],
            self.shared[kept],
            self.flags[kept],
            self.sources[kept],
            None if self.ends is None else (self.ends[0][kept], self.ends[1][kept]),
        )


def series(
    seconds: ArrayLike,
    value: ArrayLike,
    standard_uncertainty: ArrayLike = 0.0,
    shared: ArrayLike = 0.0,
    *,
    flags: ArrayLike | None = None,
    sources: ArrayLike | None = None,
    ends: tuple[ArrayLike, ArrayLike] | None = None,
) -> Series:
    """Columns brought into time order; any order in gives the same series out.

    seconds: shape (n,), since the epoch.
    value: shape (n,), any unit; NaN: no number.
    standard_uncertainty: of each value, both parts together; shared: the part of it that rows with
        the same source share. Scalars or shape (n,).
    flags: shape (n,), bits as in ``models.flags``, or true and false; None: no row is flagged.
    sources: shape (n,), who shares an error with whom, 0, 1, 2, ... (for instance one label for
        each soil and probe that was installed in turn); None: all rows do.
    ends: lower and upper end of the band of each value; None: not stated.

    Raises ReadingError when the columns differ in length or a time is no number.
    """
    times = np.atleast_1d(column(seconds))
    shape = times.shape
    given = {
        "value": column(value),
        "standard_uncertainty": column(standard_uncertainty),
        "shared": column(shared),
        "flags": np.asarray(0 if flags is None else flags).astype(np.uint64),
        "sources": np.asarray(0 if sources is None else sources).astype(np.intp),
    }
    if ends is not None:
        given |= {"lower": column(ends[0]), "upper": column(ends[1])}
    misfit = [name for name, held in given.items() if held.shape not in {(), shape}]
    if times.ndim != 1 or misfit:
        told = ", ".join(f"{name} {given[name].shape}" for name in misfit)
        raise ReadingError(f"columns must be of equal length: seconds {shape}, {told}")
    if not np.isfinite(times).all():
        raise ReadingError("every row needs a time; one is no number")
    held = {name: np.broadcast_to(values, shape) for name, values in given.items()}
    stated = (held.pop("lower"), held.pop("upper")) if ends is not None else None
    found = Series(seconds=times, ends=stated, **held)
    if np.all(np.diff(times) > 0):
        return found
    return found.rows(np.lexsort((
        found.sources, found.flags, found.shared, found.standard_uncertainty, found.value, times,
    )))  # fmt: skip
