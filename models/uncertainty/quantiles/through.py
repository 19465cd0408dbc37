"""A sum of curves of inputs, some of which also move an intermediate with a curve of its own."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

from models.numerics.added import added, dotted
from models.relation import Array
from models.uncertainty.quantiles.curves import Curve, Steps, one_way
from models.uncertainty.quantiles.intermediate import Intermediate, Rest
from models.uncertainty.quantiles.sums import (
    NOTABLE,
    ROUNDS,
    End,
    Measurand,
    Point,
    beyond,
    inverse,
    noise_of,
    one_off,
    stacked,
)


@dataclass(frozen=True, slots=True)
class SumThrough:
    """Rows of matrices, shape (m, n), are the direct inputs; columns have shape (n,)."""

    value: Array
    names: tuple[str, ...]
    curves: Curve
    """Of the direct inputs,"""
    over: Curve
    """and of the intermediate, over its own unit."""
    effects: Array
    bends: Array
    """Of the direct inputs on the intermediate."""
    rest: Rest
    straight: Array
    """Standard uncertainty of all direct inputs together whose curves are straight lines."""
    through: Intermediate
    sound: NDArray[np.bool_]

    @classmethod
    def of(
        cls, value: Array, direct: Mapping[str, Steps], straight: Array, through: Intermediate
    ) -> Self:
        """The sum that has these steps, around its value."""
        steps, zero = stacked(direct, value), np.zeros_like(value)
        effects, bends = np.empty_like(steps.up), np.empty_like(steps.up)
        for row, name in enumerate(direct):
            effects[row] = through.effects.get(name, zero)
            bends[row] = through.bends.get(name, zero)
        noise = noise_of(steps)
        sound = one_way(steps, noise).all(axis=0) & one_way(through.steps, noise)
        over = Curve.through(through.steps)
        others = [name for name in through.effects if name not in direct]
        return cls(
            value, tuple(direct), Curve.through(steps),
            Curve(over.bend, over.scale * inverse(through.reach)), effects, bends,
            Rest.of(through, others), straight, through, sound,
        )  # fmt: skip

    def left_out(self, measurand: Measurand) -> tuple[Array, Array]:
        """Probability beyond the ends of curves that run off downwards, and upwards."""
        reach = self._reach()
        over = Curve(self.over.bend, self.over.scale * reach)
        size = added(np.abs(self.curves.scale)) + self.straight + np.abs(over.scale)
        points = (*map(one_off, self.names, self.effects), lambda score: Point(score * reach, {}))
        each = (*map(Curve, self.curves.bend, self.curves.scale), over)
        return beyond(zip(each, points, strict=True), NOTABLE * size, measurand)

    def _reach(self) -> Array:
        """Of the intermediate, on the side on which its curve ends."""
        down = self.over.bend * self.over.scale > 0
        own = np.where(down, self.through.below, self.through.above)
        square = np.square(self.rest.width) + np.square(own)
        return np.sqrt(square + dotted(self.effects, self.effects))

    def end(self, z: float) -> End:
        """Along the gradient of the sum, at distance z, with the curvature across it."""
        over, curves, own = self.over, self.curves, np.square(self.straight)
        rest = self.rest.beside(
            np.where(over.scale * z > 0, self.through.above, self.through.below)
        )
        scores, other = np.zeros_like(curves.scale), np.zeros_like(self.value)
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
            turn = inverse(np.sqrt(dotted(slope, slope) + np.square(of_rest) + own))
            if left:
                score = z * turn
                scores, other = slope * score, of_rest * score
        slope *= turn
        curvature = self._curvature(slope, of_rest * turn, rest, inner, outer)
        straight = own * score
        value = self.value + straight + over.at(moved, wedge) + added(curves.at(scores, wedges))
        point = Point(moved, dict(zip(self.names, scores, strict=True)))
        return End(point, straight, value, curvature)

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
