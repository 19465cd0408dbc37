"""Readings as columns: SI numbers, NaN where there is none, and the reason in the flags."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.errors import ReadingError
from models.flags import BIT, Flags
from models.quantity import QUANTITIES, Quantity
from models.relation import Array
from models.units import UNITS


@dataclass(frozen=True, slots=True)
class Readings:
    """One row per reading; only the columns that came."""

    count: int
    columns: Mapping[str, Array]
    """By quantity name or name_u; shape (count,), SI and Cel."""
    flags: Flags

    def rows(self, start: int, stop: int) -> "Readings":
        """A block of rows, without copying."""
        return Readings(
            min(stop, self.count) - start,
            {name: values[start:stop] for name, values in self.columns.items()},
            self.flags[start:stop],
        )


def quantity_of(name: str) -> tuple[str, bool]:
    """The quantity a column is about, and whether the column is its uncertainty."""
    if name not in QUANTITIES and name.endswith("_u"):
        return name.removesuffix("_u"), True
    return name, False


def read(
    columns: Mapping[str, Array],
    units: Mapping[str, str],
    unreadable: Mapping[str, NDArray[np.bool_]],
    absent: Mapping[str, NDArray[np.bool_]] | None = None,
) -> Readings:
    """Bring columns to SI and gate them.

    columns: by quantity name or name_u, shape (n,), in ``units`` or else the unit of the API;
    NaN where there was no number.
    units: UCUM codes by quantity name.
    unreadable: by column name, where NaN stands for text that is no number.
    absent: by column name, rows that do not have the column at all, while their neighbours do.

    A row is flagged by what it holds itself: what only its neighbours have is not missing from it.
    Raises ReadingError when the columns differ in length.
    """
    counts = {name: len(values) for name, values in columns.items()}
    if len(set(counts.values())) > 1:
        told = ", ".join(f"{name} {n}" for name, n in counts.items())
        raise ReadingError(f"columns must be of equal length, found {told}")
    count = next(iter(counts.values()), 0)
    flags = np.zeros(count, dtype=np.uint64)
    gated = {
        name: _gate(name, values, units, unreadable.get(name), flags)
        for name, values in columns.items()
    }
    for name, values in columns.items():
        about, is_width = quantity_of(name)
        if is_width and about in gated:
            # A value whose uncertainty cannot be used must not pass for exact.
            lost = np.isnan(gated[name]) & (~np.isnan(values) | unreadable.get(name, False))
            gated[about] = np.where(lost, np.nan, gated[about])
    for name, rows in (absent or {}).items():
        about, is_width = quantity_of(name)
        if not is_width:
            flags[rows] &= ~BIT[f"missing:{about}"]
    return Readings(count, gated, flags)


def _gate(
    name: str,
    values: Array,
    units: Mapping[str, str],
    unreadable: NDArray[np.bool_] | None,
    flags: Flags,
) -> Array:
    """One column in SI, NaN where impossible; its flags are set in place."""
    about, is_width = quantity_of(name)
    quantity = QUANTITIES[about]
    unit = UNITS[units.get(about, quantity.unit)]
    absent = np.isnan(values)
    if unreadable is not None:
        flags[unreadable] |= BIT["unusable-uncertainty" if is_width else f"unreadable:{about}"]
        absent &= ~unreadable
    if not is_width:
        flags[absent] |= BIT[f"missing:{about}"]
    si = unit.width_to_si(values) if is_width else unit.to_si(values)
    impossible = impossible_in(quantity, si, is_width=is_width)
    if impossible.any():
        flags[impossible] |= BIT["unusable-uncertainty" if is_width else f"out-of-gate:{about}"]
        si = np.where(impossible, np.nan, si)
    return si


def impossible_in(quantity: Quantity, si: Array, *, is_width: bool) -> NDArray[np.bool_]:
    """Which values are outside the gate of a quantity, or cannot be widths within it; SI."""
    gate = quantity.gate_si
    if is_width:
        return (si < 0) | (si > gate.high - gate.low)
    return (si < gate.low) | (si > gate.high)
