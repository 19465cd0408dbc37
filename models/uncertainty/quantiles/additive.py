"""Ends of the interval of a measurand that is nearly a sum of curves of its inputs.

The steps of one standard uncertainty that first order takes anyway give each input a curve
(``curves.py``); one intermediate quantity, which many inputs move, has a curve of its own. On their
sum inverse first-order reliability and its curvature term are closed forms, a few operations a row.
The measurand itself is then taken at the two points found, so that only the way to them is
approximate; how far both are apart says whether the sum is good enough.

A curve that ends leaves some of its input's probability beyond, once the measurand itself was seen
to end there. Where more of it runs off upwards, or downwards, than the interval leaves out on that
side, there is no end: infinity.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

from models.numerics.added import added, dotted
from models.relation import Array
from models.uncertainty.coverage import coverage_factor
from models.uncertainty.quantiles.curves import Curve, Steps, one_way
from models.uncertainty.quantiles.intermediate import Intermediate, Rest

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
APART = 0.3
"""In half-widths, of measurand and sum of curves at an end: beyond, the row is not settled."""


@dataclass(frozen=True, slots=True)
class Point:
    """Where an end is: the intermediate less its value, and each direct input in its own u."""

    intermediate: Array
    scores: Mapping[str, Array]


Measurand = Callable[[Point], Array]


@dataclass(frozen=True, slots=True)
class Ends:
    """Ends of the interval, shape (n,); infinite where there is none, NaN where not settled."""

    lower: Array
    upper: Array
    settled: NDArray[np.bool_]


@np.errstate(all="ignore")
def ends(
    measurand: Measurand,
    value: Array,
    direct: Mapping[str, Steps],
    through: Intermediate,
    *,
    probability: float,
    within: float = APART,
) -> Ends:
    """Interval that leaves the same probability on both sides of a measurand.

    measurand: elementwise, at a point. value: shape (n,), where nothing is moved.
    direct: steps of inputs that work not only through the intermediate. Inputs are independent and
        standard-normal.
    within: of measurand and sum of curves at an end, in half-widths, for a row to be settled.
    """
    sums = _Sum.of(value, direct, through)
    low, high = sums.left_out(measurand)
    tail = float(ndtr(-coverage_factor(probability)))
    z = np.full_like(value, coverage_factor(probability))
    below, above = sums.end(-z), sums.end(z)
    at_lower, at_upper = measurand(sums.point(below)), measurand(sums.point(above))
    # What the inputs do together shows along the way; half of its square is missing across it.
    together = 1.0 / coverage_factor(probability) ** 2
    off_below, off_above = at_lower - below.value, at_upper - above.value
    lower = at_lower + below.curvature - together * off_below
    upper = at_upper + above.curvature - together * off_above
    lower, off_below = np.where(low > tail, -np.inf, lower), np.where(low > tail, 0.0, off_below)
    upper, off_above = np.where(high > tail, np.inf, upper), np.where(high > tail, 0.0, off_above)
    half = np.minimum(0.5 * (upper - lower), np.maximum(value - lower, upper - value))
    half = np.where(np.isinf(half), np.minimum(value - lower, upper - value), half)
    off = np.maximum(np.abs(off_below), np.abs(off_above))
    settled = sums.sound & (off <= within * half) & (lower <= upper)
    return Ends(np.where(settled, lower, np.nan), np.where(settled, upper, np.nan), settled)


@dataclass(frozen=True, slots=True)
class _End:
    """An end on the sum of curves; rows of ``scores`` are the direct inputs."""

    scores: Array
    intermediate: Array
    value: Array
    curvature: Array


@dataclass(frozen=True, slots=True)
class _Sum:
    value: Array
    names: tuple[str, ...]
    curves: Curve
    """Of the direct inputs, shape (m, n),"""
    over: Curve
    """and of the intermediate, shape (n,), over its own unit."""
    effects: Array
    bends: Array
    """Of the direct inputs on the intermediate, shape (m, n)."""
    rest: Rest
    through: Intermediate
    sound: NDArray[np.bool_]

    @classmethod
    def of(cls, value: Array, direct: Mapping[str, Steps], through: Intermediate) -> "_Sum":
        names, zero = tuple(direct), np.zeros_like(value)
        steps = Steps(*(np.empty((len(names), *value.shape)) for _ in range(3)))
        effects, bends = np.empty_like(steps.up), np.empty_like(steps.up)
        for row, name in enumerate(names):
            of_input = direct[name]
            steps.up[row], steps.down[row] = of_input.up, of_input.down
            np.asarray(steps.size)[row] = of_input.size
            effects[row] = through.effects.get(name, zero)
            bends[row] = through.bends.get(name, zero)
        noise = SLIGHT * added(np.nan_to_num(np.abs(steps.up - steps.down)))
        sound = one_way(steps, noise).all(axis=0) & one_way(through.steps, noise)
        over = Curve.through(through.steps)
        unit = np.divide(1.0, through.reach, out=np.zeros_like(value), where=through.reach > 0)
        others = [name for name in through.effects if name not in direct]
        return cls(
            value, names, Curve.through(steps), Curve(over.bend, over.scale * unit), effects,
            bends, Rest.of(through, others), through, sound,
        )  # fmt: skip

    def left_out(self, measurand: Measurand) -> tuple[Array, Array]:
        """Probability beyond the ends of curves that run off downwards, and upwards.

        An end is real where the measurand has nothing just beyond it.
        """
        reach = self._reach()
        over = Curve(self.over.bend, self.over.scale * reach)
        size = np.abs(self.curves.scale)
        notable = NOTABLE * (added(size) + np.abs(over.scale))
        low, high = np.zeros_like(self.value), np.zeros_like(self.value)
        of_inputs = zip(self.curves.bend, self.curves.scale, strict=True)
        for place, curve in enumerate((*(Curve(*each) for each in of_inputs), over)):
            distance = curve.reach
            counts = np.flatnonzero((np.abs(curve.scale) > notable) & (distance < NEARLY))
            if not counts.size:
                continue
            there = np.zeros_like(self.value)
            there[counts] = -np.sign(curve.bend * curve.scale)[counts] * distance[counts] * BEYOND
            real = np.isnan(measurand(self._only(place, there, reach)))[counts]
            mass, falls = np.where(real, ndtr(-distance[counts]), 0.0), curve.bend[counts] > 0
            low[counts] += np.where(falls, mass, 0.0)
            high[counts] += np.where(falls, 0.0, mass)
        return low, high

    def _reach(self) -> Array:
        """Of the intermediate, on the side on which its curve ends."""
        down = self.over.bend * self.over.scale > 0
        own = np.where(down, self.through.below, self.through.above)
        square = np.square(self.rest.width) + np.square(own)
        return np.sqrt(square + dotted(self.effects, self.effects))

    def _only(self, place: int, score: Array, reach: Array) -> Point:
        """Where one input is off, or, after the last of them, the intermediate."""
        scores = {name: np.zeros_like(score) for name in self.names}
        if place == len(self.names):
            return Point(score * reach, scores)
        scores[self.names[place]] = score
        return Point(self.effects[place] * score, scores)

    def end(self, z: Array) -> _End:
        """Along the gradient of the sum, at distance z, with the curvature across it."""
        over, curves = self.over, self.curves
        rest = self.rest.beside(
            np.where(over.scale * z > 0, self.through.above, self.through.below)
        )
        scores, other = np.zeros_like(curves.scale), np.zeros_like(z)
        for left in range(ROUNDS, -1, -1):
            moved = self._moved(scores, other, rest)
            wedge, wedges = over.wedge(moved), curves.wedge(scores)
            inner, outer = over.scale / wedge, curves.scale / wedges
            slope = 2.0 * self.bends
            slope *= scores
            slope += self.effects
            slope *= inner
            slope += outer
            of_rest = inner * (rest.width + 2.0 * rest.bend * other)
            length = np.sqrt(dotted(slope, slope) + np.square(of_rest))
            turn = np.divide(1.0, length, out=np.zeros_like(length), where=length > 0)
            if left:
                scores, other = slope * (z * turn), of_rest * (z * turn)
        slope *= turn
        curvature = self._curvature(slope, of_rest * turn, rest, inner, outer)
        value = self.value + over.at(moved, wedge) + added(curves.at(scores, wedges))
        return _End(scores, moved, value, curvature)

    def point(self, end: _End) -> Point:
        """The same for the measurand."""
        return Point(end.intermediate, dict(zip(self.names, end.scores, strict=True)))

    def _moved(self, scores: Array, other: Array, rest: Rest) -> Array:
        """The intermediate, less its value."""
        direct = self.bends * scores
        direct += self.effects
        return dotted(direct, scores) + (rest.width + rest.bend * other) * other

    def _curvature(
        self, at: Array, at_rest: Array, rest: Rest, inner: Array, outer: Array
    ) -> Array:
        """Half of (tr H - a'Ha) on the sum of curves, a the direction to the end."""
        along = dotted(at, self.effects) + at_rest * rest.width
        whole = dotted(self.effects, self.effects) + np.square(rest.width)
        found = -self.over.bend * np.square(inner) * (whole - np.square(along))
        bent = 2.0 * inner * self.bends
        bent -= self.curves.bend * np.square(outer)
        found += dotted(bent, 1.0 - np.square(at))
        return 0.5 * found + inner * (rest.across + rest.bend * (1.0 - np.square(at_rest)))
