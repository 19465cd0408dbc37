"""One conductivity's logarithm as a function of the water content and of every source beside it."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from models.estimate.moving import PER_READING, Moving
from models.estimate.salt.chain import OWN_OF_SALT
from models.estimate.salt.pore_water import PoreWater, logarithm
from models.estimate.sources import Sources
from models.relation import Array
from models.uncertainty.quantiles.curves import Steps
from models.uncertainty.quantiles.sums import Point

SHORT = 0.2
"""Steps of rows in which a whole standard uncertainty leads out of the domain."""
NONE = Steps(np.zeros(1), np.zeros(1))


@dataclass(frozen=True, slots=True)
class Stepped:
    """The logarithm of one conductivity, and its steps along every source."""

    value: Array
    direct: Mapping[str, Steps]
    """Of sources that work not only through the water content."""
    through: Steps
    """Of the water content, by its standard uncertainty."""
    own: Array
    """Standard uncertainty that is the pore-water model's own."""
    measurand: Callable[[Point], Array]
    """The conductivity's logarithm where sources are off, but for the model's own."""

    @classmethod
    def of(cls, pore: PoreWater, value: Array, own: Array) -> "Stepped":
        """Of the pore water; value: its conductivity, own: the model's own uncertainty."""
        here, theta = logarithm(value), pore.inputs["water_content"]
        reach = pore.content.standard_uncertainty

        def at(scores: Mapping[str, Any], off: Array | float = 0.0) -> Array:
            return pore.logarithm(theta + off, scores)

        def along(name: str) -> Steps:
            return _steps(lambda size: at({name: size}), here)

        direct = {name: along(name) for name in pore.sources if pore.moves(name)}
        direct[OWN_OF_SALT] = Steps(own, -own)
        through = NONE
        if "water_content" in pore.salinity.takes:
            through = _steps(lambda size: at({}, size * reach), here)

        def measurand(point: Point) -> Array:
            return at(point.scores, point.intermediate)

        return cls(here, direct, through, own, measurand)

    def of_extract(self, pore: PoreWater, extract: Array, paste: Mapping[str, Moving]) -> "Stepped":
        """Of the extract: the more water above one paste, the more salt in it."""
        theta, reach = pore.inputs["water_content"], pore.content.standard_uncertainty
        here = logarithm(extract)
        drying = dict.fromkeys(source for each in paste.values() for source in each.by)

        def diluted(source: str, size: Any) -> Any:
            return -sum(_log(each, source, size) for each in paste.values())

        def along(name: str) -> Steps:
            of = self.direct.get(name, NONE)
            return Steps(of.up + diluted(name, of.size), of.down + diluted(name, -of.size), of.size)

        step = self.through.size * reach / theta
        through = Steps(
            self.through.up + logarithm(1.0 + step),
            self.through.down + logarithm(1.0 - step),
            self.through.size,
        )

        def measurand(point: Point) -> Array:
            moved = self.measurand(point) - self.value + here
            moved = moved + logarithm(1.0 + point.intermediate / theta)
            for source in drying:
                moved = moved + diluted(source, point.scores.get(source, 0.0))
            return moved

        direct = {name: along(name) for name in dict.fromkeys((*self.direct, *drying))}
        return Stepped(here, direct, through, self.own, measurand)

    @property
    def by_water_content(self) -> bool:
        """Whether the water content moves it at all."""
        return self.through is not NONE

    def effects(self, through: Sources, reach: Array) -> Sources:
        """First order, signs kept, of each source in all; ``through``: on the water content."""
        zero = np.zeros_like(self.value)
        slope = np.divide(self.through.slope + zero, reach, out=zero.copy(), where=reach > 0)
        found = Sources()
        for name, steps in self.direct.items():
            kept = found.per_reading if name in PER_READING else found.shared
            kept[name] = steps.slope + zero
        return found.plus(through, slope)


def _steps(at: Callable[[Any], Array], here: Array) -> Steps:
    """Steps of 1; short ones in rows where one of those leads out of the domain."""
    steps = Steps(at(1.0) - here, at(-1.0) - here)
    out = np.isnan(steps.up + steps.down) & ~np.isnan(here)
    if not out.any():
        return steps
    size = np.where(out, SHORT, 1.0)
    return Steps(at(size) - here, at(-size) - here, size)


def _log(each: Moving, source: str, score: Any) -> Any:
    """Logarithm of a quantity over its value, where one source is so far off; lognormal."""
    return each.by.get(source, 0.0) / each.value * score
