"""What is physically possible of the numbers a reading holds, in the unit of the API."""

from collections.abc import Mapping
from types import MappingProxyType

from models.quantity import QUANTITIES
from models.readings import quantity_of
from service.store.interface import VALUES


def _range_of(name: str) -> tuple[float, float]:
    about, is_width = quantity_of(name)
    gate = QUANTITIES[about].gate
    if is_width:
        return 0.0, float("inf")
    return (float("-inf"), float("inf")) if gate is None else (gate.low, gate.high)


POSSIBLE: Mapping[str, tuple[float, float]] = MappingProxyType(
    {name: _range_of(name) for name in VALUES}
)
"""Lowest and highest value by column."""


def is_possible(name: str, value: float) -> bool:
    """Whether a number can be one of that column."""
    low, high = POSSIBLE[name]
    return low <= value <= high
