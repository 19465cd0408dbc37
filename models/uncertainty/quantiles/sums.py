"""A sum of curves of independent standard-normal inputs, and its ends along the gradient.

On such a sum inverse first-order reliability and its curvature term are closed forms, a few
operations a row.
"""

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

from models.numerics.added import added, dotted
from models.relation import Array
from models.uncertainty.quantiles.curves import WEDGE, Curve, Steps, one_way

ROUNDS = 2
"""Of the direction to an end."""
SLIGHT = 1e-3
"""Of the sum of all steps: what a curve does with less does not matter."""
NOTABLE = 0.05
"""Likewise: a curve of less cannot leave out any of the whole."""
NEARLY = 5.0
"""Standard uncertainties to the end of a curve beyond which that end does not count."""
BEYOND = 1.25
"""Of the distance to the end of a curve: where there must be nothing, for the end to be real."""


@dataclass(frozen=True, slots=True)
class Point:
    """Where an end is: the intermediate less its value, and each direct input in its own u.

    Inputs that are left out are where they are.
    """

    intermediate: Array
    scores: Mapping[str, Array]


Measurand = Callable[[Point], Array]


@dataclass(frozen=True, slots=True)
class End:
    """An end on the sum of curves, shape (n,): where it is, how high, and what is added to it."""

    point: Point
    straight: Array
    """What the straight inputs add there,"""
    value: Array
    """and all of them together with the value where nothing is moved."""
    curvature: Array


@dataclass(frozen=True, slots=True)
class Sum:
    """Curves of inputs alone; matrices have shape (m, n), columns (n,)."""

    value: Array
    names: tuple[str, ...]
    curves: Curve
    straight: Array
    """Standard uncertainty of all inputs together whose curves are straight lines."""
    sound: NDArray[np.bool_]

    @classmethod
    def of(cls, value: Array, direct: Mapping[str, Steps], straight: Array) -> Self:
        """The sum that has these steps, around its value."""
        steps = stacked(direct, value)
        sound = np.logical_and.reduce(one_way(steps, noise_of(steps)), axis=0)
        return cls(value, tuple(direct), Curve.through(steps), straight, sound)

    def end(self, z: float) -> End:
        """Along the gradient, at distance z, with the curvature across it."""
        scale, bend, own = self.curves.scale, self.curves.bend, np.square(self.straight)
        turning = bend * scale
        slope, square = scale, np.square(scale)
        turn = inverse(np.sqrt(added(square) + own))
        wedge = np.empty_like(scale)
        for _ in range(ROUNDS):
            score = z * turn
            scores = slope * score
            np.multiply(turning, scores, out=wedge)
            wedge += 1.0
            np.maximum(wedge, WEDGE, out=wedge)
            slope = scale / wedge
            np.square(slope, out=square)
            turn = inverse(np.sqrt(added(square) + own))
        bent = bend * square
        curvature = -0.5 * (added(bent) - np.square(turn) * dotted(bent, square))
        straight = own * score
        value = self.value + straight + added(self.curves.at(scores, wedge))
        point = Point(np.zeros_like(value), dict(zip(self.names, scores, strict=True)))
        return End(point, straight, value, curvature)

    def left_out(self, measurand: Measurand) -> tuple[Array, Array]:
        """Probability beyond the ends of curves that run off downwards, and upwards."""
        notable = NOTABLE * (added(np.abs(self.curves.scale)) + self.straight)
        none = np.zeros_like(self.value)
        points = (one_off(name, none) for name in self.names)
        each = map(Curve, self.curves.bend, self.curves.scale)
        return beyond(zip(each, points, strict=True), notable, measurand)


def one_off(name: str, effect: Array) -> Callable[[Array], Point]:
    """The way from the score of one input, which moves the intermediate by so much, to a point."""
    return lambda score: Point(effect * score, {name: score})


@np.errstate(all="ignore")
def inverse(length: Array) -> Array:
    """1 over it, 0 where it is 0."""
    return np.where(length > 0, 1.0 / length, 0.0)


def stacked(direct: Mapping[str, Steps], value: Array) -> Steps:
    """Steps of all inputs as one, shape (m, n)."""
    shape = (len(direct), *value.shape)
    up, down, size = np.empty(shape), np.empty(shape), np.empty(shape)
    for row, steps in enumerate(direct.values()):
        up[row], down[row], size[row] = steps.up, steps.down, steps.size
    return Steps(up, down, size)


def noise_of(steps: Steps) -> Array:
    """What a curve does with less does not matter beside all others; shape (n,)."""
    return SLIGHT * added(np.nan_to_num(np.abs(steps.up - steps.down)))


def beyond(
    curves: Iterable[tuple[Curve, Callable[[Array], Point]]], notable: Array, measurand: Measurand
) -> tuple[Array, Array]:
    """Probability beyond the ends of curves that run off downwards, and upwards.

    curves: each with the way from its score to a point. notable: a curve of less is passed over.

    An end is real where the measurand has nothing just beyond it.
    """
    low, high = np.zeros_like(notable), np.zeros_like(notable)
    for curve, point in curves:
        distance = curve.reach
        counts = np.flatnonzero((np.abs(curve.scale) > notable) & (distance < NEARLY))
        if not counts.size:
            continue
        there = np.zeros_like(notable)
        there[counts] = -np.sign(curve.bend * curve.scale)[counts] * distance[counts] * BEYOND
        real = np.isnan(measurand(point(there)))[counts]
        mass, falls = np.where(real, ndtr(-distance[counts]), 0.0), curve.bend[counts] > 0
        low[counts] += np.where(falls, mass, 0.0)
        high[counts] += np.where(falls, 0.0, mass)
    return low, high
