"""Gaps: the times in which nothing was read."""

from dataclasses import dataclass

import numpy as np

from models.errors import Complaint, ParameterError
from models.relation import Array
from models.series.series import Series


@dataclass(frozen=True, slots=True)
class Gaps:
    """One row per gap, in time order; seconds since the epoch."""

    start: Array
    """The last number before it, or the start of the time that was asked for."""
    end: Array
    """The first number after it, or the end of the time that was asked for."""

    @property
    def duration(self) -> Array:
        """Seconds."""
        return self.end - self.start


def find_gaps(
    rows: Series, longer_than: float, *, start: float | None = None, end: float | None = None
) -> Gaps:
    """Times between neighbouring numbers that lie further apart than a limit.

    longer_than: s, positive; a gap of just that length is none.
    start, end: of the time that was asked for, s since the epoch. Where they are given, what is
        missing before the first and after the last number is a gap as well, and what lies outside
        does not count.

    A row without a number does not end a gap.
    Raises ParameterError when the limit is not positive.
    """
    if not longer_than > 0:
        detail = f"takes a gap limit above 0 s, found {longer_than:g}"
        raise ParameterError("series", [Complaint("gap", detail)])
    times = rows.seconds[np.isfinite(rows.value)]
    if start is not None:
        times = np.concatenate([[start], times[times >= start]])
    if end is not None:
        times = np.concatenate([times[times <= end], [end]])
    apart = np.flatnonzero(np.diff(times) > longer_than)
    return Gaps(times[apart], times[apart + 1])


def usual_step(rows: Series) -> float:
    """The time from one number to the next, s: their median; NaN where there are fewer than two.

    For a station that does not say how often it reads.
    """
    apart = np.diff(rows.seconds[np.isfinite(rows.value)])
    apart = apart[apart > 0]
    return float(np.median(apart)) if apart.size else float("nan")
