"""Axes: from values to pixels, linear or logarithmic, and where their ticks stand."""

import math
from dataclasses import dataclass

import numpy as np

from models.relation import Array, column


@dataclass(frozen=True, slots=True)
class Axis:
    """A stretch of values laid over a stretch of pixels."""

    low: float
    high: float
    start: float
    """Pixel of ``low``; above ``end`` where values grow upwards."""
    end: float
    logarithmic: bool = False

    def place(self, values: Array | float) -> Array:
        """Pixels of values; NaN where a logarithmic axis has no place for one."""
        known, low, high = column(values), self.low, self.high
        if self.logarithmic:
            with np.errstate(invalid="ignore", divide="ignore"):
                known = np.where(known > 0, np.log10(known), np.nan)
            low, high = math.log10(low), math.log10(high)
        return self.start + (known - low) / (high - low) * (self.end - self.start)

    def ticks(self, most: int = 6) -> tuple[tuple[float, str], ...]:
        """At most about that many round values on the axis, each with its label."""
        if self.logarithmic:
            return _decades(self.low, self.high, most)
        return round_values(self.low, self.high, most)


def axis_for(
    values: Array,
    start: float,
    end: float,
    *,
    logarithmic: bool = False,
    floor: float = -math.inf,
    least: float = 0.0,
) -> Axis:
    """An axis that holds all values with a little room, and not less than ``floor``.

    values: any shape; those that are no number, or have no logarithm, do not count.
    least: what a linear axis spans at least, so that the last digits of numbers do not fill it.
    """
    known = values[np.isfinite(values) & ((values > 0) | (not logarithmic))]
    if not known.size:
        return Axis(*((1.0, 10.0) if logarithmic else (0.0, 1.0)), start, end, logarithmic)
    low, high = float(known.min()), float(known.max())
    if logarithmic:
        room = max(high / low, 1.1) ** 0.04
        return Axis(low / room, high * room, start, end, logarithmic=True)
    if high - low < least:
        low, high = 0.5 * (low + high - least), 0.5 * (low + high + least)
    room = 0.06 * (high - low) or 0.05 * abs(high) or 0.5
    return Axis(max(low - room, min(floor, low)), high + room, start, end)


def round_values(low: float, high: float, most: int = 6) -> tuple[tuple[float, str], ...]:
    """Multiples of 1, 2 or 5 times a power of ten between two values."""
    rough = (high - low) / most
    power = 10.0 ** math.floor(math.log10(rough))
    step = next(factor * power for factor in (1, 2, 5, 10) if factor * power >= rough * 0.999)
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    return tuple(
        (place * step, _written(place * step, decimals)) for place in range(first, last + 1)
    )


def _decades(low: float, high: float, most: int) -> tuple[tuple[float, str], ...]:
    first, last = math.ceil(math.log10(low) - 1e-9), math.floor(math.log10(high) + 1e-9)
    if last - first < 1:
        return round_values(low, high, most)
    stride = max(1, math.ceil((last - first + 1) / most))
    return tuple((10.0**power, f"{10.0**power:g}") for power in range(first, last + 1, stride))


def _written(value: float, decimals: int) -> str:
    if value != 0 and (abs(value) >= 1e6 or abs(value) < 1e-4):
        return f"{value:g}"
    text = f"{value:.{decimals}f}"
    return text if float(text) != 0 else text.lstrip("-")
