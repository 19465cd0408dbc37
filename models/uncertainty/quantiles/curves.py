"""A curve through three points that may end: f(z) = ln(1 + bend scale z) / bend, f(0) = 0.

The inverse of the power transformation of Box and Cox (1964), in which a ratio, a power, a
logarithm and a straight line are the same curve with another bend. Where 1 + bend scale z would be
below zero there is nothing: a denominator has gone through zero.
"""

from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

from models.relation import Array

ONE_WAY = 0.9
"""Middle of two steps over half their difference, from which they count as to the same side."""
STRAIGHT = 1e-6
"""Bend over a step, below which the curve is a straight line."""
WEDGE = 0.02
"""Least of 1 + bend scale z at which a slope is taken."""


@dataclass(frozen=True, slots=True)
class Steps:
    """A measurand at ``size`` and at ``-size``, less its value at 0; NaN outside its domain."""

    up: Array
    down: Array
    size: Array | float = 1.0

    @property
    def slope(self) -> Array:
        """Half the difference, for a step of 1; by one step alone where the other is outside."""
        both = 0.5 * (self.up - self.down)
        astray = np.isnan(both)
        if astray.any():
            both = np.where(astray, np.where(np.isnan(self.up), -self.down, self.up), both)
        return both / self.size

    @property
    def bend(self) -> Array:
        """How far the middle of both is off, for a step of 1."""
        return 0.5 * (self.up + self.down) / np.square(self.size)


@dataclass(frozen=True, slots=True)
class Curve:
    """Bend and scale, any shape."""

    bend: Array
    scale: Array

    @classmethod
    def through(cls, steps: Steps) -> Self:
        """The curve that has these steps; a straight line where none bends so much.

        With c half the difference and r c the middle of the steps, y = bend c solves
        r = -ln cosh(y) / y, which 2 r (0.307 r^2 - 1) / (1 - r^2) does to 3 % of y.
        """
        half, middle = 0.5 * (steps.up - steps.down), 0.5 * (steps.up + steps.down)
        with np.errstate(all="ignore"):
            ratio = middle / half
            square = ratio * ratio
            y = 2.0 * ratio * (0.307 * square - 1.0) / (1.0 - square)
            bends = (np.abs(ratio) < ONE_WAY) & (np.abs(y) > STRAIGHT)
            bend = np.where(bends, y / half, 0.0)
            scale = half * np.where(bends, np.tanh(y) / y, 1.0)
        return cls(bend, scale / steps.size)

    def wedge(self, z: Array) -> Array:
        """1 + bend scale z, and never so little that a slope would be without bound."""
        wedge = self.bend * self.scale * z
        wedge += 1.0
        return np.maximum(wedge, WEDGE, out=wedge)

    def at(self, z: Array, wedge: Array) -> Array:
        """The curve at z, whose ``wedge`` that is."""
        with np.errstate(all="ignore"):
            return np.where(self.bend != 0.0, np.log(wedge) / self.bend, self.scale * z)

    @property
    def reach(self) -> Array:
        """Distance at which the curve ends, infinite where it does not."""
        ends = np.abs(self.bend * self.scale)
        return np.divide(1.0, ends, out=np.full_like(ends, np.inf), where=ends > 0.0)


def one_way(steps: Steps, noise: Array) -> NDArray[np.bool_]:
    """Whether both steps are known and go to different sides, or are both within the noise."""
    middle, difference = np.abs(steps.up + steps.down), np.abs(steps.up - steps.down)
    return (middle <= ONE_WAY * difference) | (np.maximum(middle, difference) <= noise)
