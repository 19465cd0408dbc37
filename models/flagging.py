"""What can be said of a row: a flag, and its slug as one bit of a column of uint64."""

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray

Flags = NDArray[np.uint64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Flag:
    """One thing that can be said about a row."""

    key: str
    condition: str
    text: str
    reason: str
    keeps_number: bool
    """False: the row has no number because of it."""
    keeps_pore_water: bool = True
    """False: the row has no conductivity of pore water or extract because of it."""
    names_quantity: bool = False


class Bits:
    """Slugs, each with its bit, in the order in which they are written; at most 64."""

    def __init__(self, slugs: Iterable[str]) -> None:
        self.slugs: tuple[str, ...] = tuple(slugs)
        self.bit: Mapping[str, np.uint64] = MappingProxyType(
            {slug: np.uint64(1) << np.uint64(place) for place, slug in enumerate(self.slugs)}
        )

    def names(self, mask: int) -> tuple[str, ...]:
        """The slugs of one row's bits."""
        return tuple(slug for place, slug in enumerate(self.slugs) if mask >> place & 1)

    def those(self, wanted: Callable[[str], bool]) -> np.uint64:
        """The bits of the slugs that are wanted, together."""
        bits = [bit for slug, bit in self.bit.items() if wanted(slug)]
        return np.uint64(np.bitwise_or.reduce(np.array(bits, dtype=np.uint64)))


def any_of(flags: Flags, bits: np.uint64) -> NDArray[np.bool_]:
    """Rows that have one of the bits."""
    return (flags & bits) != 0
