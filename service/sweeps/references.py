"""What impedance the sweeps of a request refer to, and what is said where they were brought to one.

Error terms of one port take a common reference with everything else between analyser and plane:
before a tip, files need only agree. A line or a cell is about its own impedance while it is empty.
"""

import numpy as np

from models.advisories import Advice, advise
from models.reflection.renormalise import renormalised
from models.relation import Array, ComplexArray
from service.formats.networks.touchstone import Network

SAME = 1e-9
"""Relative difference of two impedances that is none."""


class References:
    """The impedance that all sweeps of a request are brought to; None: that of the first file."""

    def __init__(self, impedance: float | None) -> None:
        self._common = impedance
        self._others: dict[float, None] = {}
        self._files = 0

    def brought(self, held: Network) -> tuple[ComplexArray, Array]:
        """S-parameters of a file at the common impedance, shape (f, n, n).

        Second, by how much their noise grew on the way, shape (f,).
        """
        own = np.array(held.references)
        common = self._common if self._common is not None else held.references[0]
        self._common = common
        if np.all(np.abs(own - common) <= SAME * common):
            return held.parameters, np.ones(held.frequency.size)
        self._files += 1
        self._others |= dict.fromkeys(held.references)
        return renormalised(held.parameters, own, common)

    @property
    def advice(self) -> tuple[Advice, ...]:
        """Which files were brought to another impedance; empty: none."""
        if not self._files or self._common is None:
            return ()
        told = " and ".join(f"{one:g}" for one in self._others)
        common = f"{self._common:g}"
        return (advise("renormalised", count=self._files, others=told, impedance=common),)
