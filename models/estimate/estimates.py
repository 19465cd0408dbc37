"""Estimates as columns, and the vocabulary of what an estimate says."""

from collections.abc import Mapping
from dataclasses import dataclass

from models.flags import Flags
from models.relation import Array

BANDED = ("", "_u", "_u_shared", "_lower", "_upper")
"""Suffixes of an estimated quantity, in the order of the answer."""


def band_names(quantity: str) -> tuple[str, ...]:
    """The columns an estimated quantity has."""
    return tuple(quantity + suffix for suffix in BANDED)


@dataclass(frozen=True, slots=True)
class Estimates:
    """One row per reading, in the order of the readings."""

    columns: Mapping[str, Array]
    """SI and Cel; NaN where the flags say why there is no number."""
    flags: Flags
