"""What the draws of each row establish: JCGM 101, 7.6, 7.7 and 7.9, some of them no number."""

from typing import Literal

import numpy as np
from numpy.typing import NDArray

from models.relation import Array, column

Counts = NDArray[np.intp]
Kind = Literal["symmetric", "shortest"]


def interval_of(
    ordered: Array, count: Counts, *, probability: float, kind: Kind
) -> tuple[Array, Array]:
    """Ends of the coverage interval of each row.

    ordered: shape (n, m), each row sorted, with what is no number at its end.
    count: shape (n,), how many of a row are numbers; NaN where they are too few for the interval.
    kind: ``symmetric`` leaves the same probability on both sides, ``shortest`` is the shortest.
    """
    held = np.floor(probability * count + 0.5).astype(np.intp)
    enough = count - held >= 1
    held = np.where(enough, held, 0)
    if kind == "symmetric":
        first = np.where(enough, (count - held + 1) // 2 - 1, 0)
    else:
        first = _shortest(ordered, count, held)
    lower = np.take_along_axis(ordered, first[:, None], axis=1)[:, 0]
    upper = np.take_along_axis(ordered, (first + held)[:, None], axis=1)[:, 0]
    return np.where(enough, lower, np.nan), np.where(enough, upper, np.nan)


def _shortest(ordered: Array, count: Counts, held: Counts) -> Counts:
    """Where the shortest interval starts; rows with as many numbers are done together."""
    first = np.zeros(count.shape, dtype=np.intp)
    for number in np.unique(count[held > 0]):
        rows = np.flatnonzero(count == number)
        step = held[rows[0]]
        widths = ordered[rows, step:number] - ordered[rows, : number - step]
        first[rows] = np.argmin(widths, axis=1)
    return first


def moments_of(values: Array, count: Counts) -> tuple[Array, Array]:
    """Mean and standard deviation of each row, shape (n, m), over what are numbers."""
    known = np.isfinite(values)
    all_known = bool((count == values.shape[1]).all())
    number = np.maximum(column(count), 1.0)
    filled = values if all_known else np.where(known, values, 0.0)
    mean = filled.sum(axis=1) / number
    away = values - mean[:, None]
    away = away if all_known else np.where(known, away, 0.0)
    variance = np.square(away).sum(axis=1) / np.maximum(number - 1.0, 1.0)
    return np.where(count > 0, mean, np.nan), np.where(count > 1, np.sqrt(variance), np.nan)


def numerical_tolerance(standard_uncertainty: Array, digits: int) -> Array:
    """Half a unit in the last of so many significant digits, elementwise (JCGM 101, 7.9.2).

    0.35 to two digits is 35 x 10^-2, so its tolerance is 0.005. NaN where there is no uncertainty.
    """
    u = np.where(standard_uncertainty > 0, standard_uncertainty, np.nan)
    unit = np.floor(np.log10(u)) - (digits - 1)
    carried = np.rint(u / 10.0**unit) >= 10.0**digits  # 0.0996 is 10 x 10^-2, not 100 x 10^-3
    return column(0.5 * 10.0 ** (unit + carried))
