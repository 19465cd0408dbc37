"""A quantity on the way from many inputs to a measurand."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from models.relation import Array
from models.uncertainty.quantiles.curves import Steps


@dataclass(frozen=True, slots=True)
class Intermediate:
    """A quantity on the way that many inputs move; ``reach`` is its standard uncertainty."""

    steps: Steps
    """Of the measurand, by so many times ``reach``."""
    reach: Array
    effects: Mapping[str, Array]
    """Signed, of one standard uncertainty of each input,"""
    bends: Mapping[str, Array]
    """and how far the middle of both of its steps is off; inputs left out do not bend."""
    below: Array
    above: Array
    """Scales of an error of its own, downward and upward."""


@dataclass(frozen=True, slots=True)
class Rest:
    """All that moves the intermediate alone, taken as one input."""

    width: Array
    bend: Array
    """Along the combination of all,"""
    across: Array
    """and how far the middle is off by what bends across it."""

    @classmethod
    def of(cls, through: Intermediate, others: list[str]) -> "Rest":
        """others: names of the inputs that are not direct ones."""
        zero = np.zeros_like(through.reach)
        square, bend, across = zero, zero, zero
        for name in others:
            square = square + np.square(through.effects[name])
        for name in others:
            if name in through.bends:
                part = np.square(through.effects[name])
                along = np.divide(part, square, out=np.zeros_like(zero), where=square > 0)
                bend = bend + along * through.bends[name]
                across = across + (1.0 - along) * through.bends[name]
        return cls(np.sqrt(square), bend, across)

    def beside(self, own: Array) -> "Rest":
        """Together with an error of the intermediate's own, which does not bend."""
        square, whole = np.square(self.width), np.square(self.width) + np.square(own)
        share = np.divide(square, whole, out=np.zeros_like(whole), where=whole > 0)
        bend = self.bend * share
        return Rest(np.sqrt(whole), bend, self.across + self.bend - bend)
