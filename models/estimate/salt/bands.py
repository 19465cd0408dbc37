"""Bands of the pore water and of the extract: quantiles of the logarithm, or draws.

What is left open of a conductivity of pore water is a factor, so all of it is done on logarithms.
Rows in which nothing bends take first order and the shift of its curvature; the others the ends of
the chain's own curves (``uncertainty/quantiles/additive.py``), or, where those will not do, those
of shared draws. Where the caller says that both models are exact, nothing covers what is left of a
curve: those rows go along the gradient of the whole chain.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from models.estimate.equation import OWN
from models.estimate.salt.chain import BEYOND_ALL, OWN_OF_SALT, Chain
from models.estimate.salt.stepped import Stepped
from models.estimate.sources import CONDUCTION, Sources
from models.estimate.water_content import WaterContent
from models.relation import Array
from models.uncertainty.coverage import coverage_factor
from models.uncertainty.draws import Draws, interval_of, moments_of
from models.uncertainty.evaluation import blocks_of, scores_of, values_of
from models.uncertainty.quantiles.additive import ends
from models.uncertainty.quantiles.curves import Steps
from models.uncertainty.quantiles.intermediate import Intermediate
from models.uncertainty.quantiles.reliability import Method, band
from models.uncertainty.quantiles.sums import Point

FEWEST, OUTSIDE = 512, 20
"""Draws for rows that nothing else settles, and how many of them the interval leaves out."""
CALM = 0.05
"""Shift of an end by curvature, in half-widths, up to which first order and that shift will do;"""
STRIDE = 0.4
"""Logarithm that one standard uncertainty of a source may move for that; a longer stride may meet
a floor or a plateau, of which steps of one tell nothing."""
BARE = 0.002
"""the same where neither model has an error of its own to cover it."""


@dataclass(frozen=True, slots=True)
class Through:
    """What moves the water content: signed effects and bends of each source, m3/m3."""

    effects: Sources
    bends: Mapping[str, Array]


@dataclass(frozen=True, slots=True)
class Asked:
    """How the band is to be: its probability, and draws where those are wanted."""

    probability: float
    draws: Draws | None = None
    bare: bool = False
    """Whether neither model has an error of its own, so that curvature is not covered by any."""


@dataclass(frozen=True, slots=True)
class Spread:
    """Of a logarithm, shape (n,): ends, infinite where there is none, and how they were found."""

    lower: Array
    upper: Array
    total: Array
    """Standard uncertainty,"""
    shared: Array
    """and the part that all readings of a soil and probe share."""
    method: NDArray[np.uint8]
    """Codes of ``Method`` for rows that the curves did not settle, 0 for the others."""
    outside: NDArray[np.intp] = field(default_factory=lambda: np.zeros(1, dtype=np.intp))
    """Draws without an answer, where those were asked for."""


def spread_of(
    stepped: Stepped,
    through: Through,
    content: WaterContent,
    chain: Callable[[], Chain],
    asked: Asked,
) -> Spread:
    """Ends of one logarithm; NaN where it has no number.

    chain: makes the whole way to it, which most rows do not need.
    """
    effects = stepped.effects(through.effects, content.standard_uncertainty)
    total, shared = (np.asarray(each) for each in effects.uncertainties())
    shift, calm = _shift(stepped, through, content, total, asked)
    reach = coverage_factor(asked.probability) * total
    lower = np.minimum(stepped.value + shift - reach, stepped.value)
    upper = np.maximum(stepped.value + shift + reach, stepped.value)
    method = np.zeros(lower.shape, dtype=np.uint8)
    known = np.isfinite(stepped.value) & np.isfinite(content.standard_uncertainty)
    rows = np.flatnonzero(known & ~calm)
    plain, first = Spread(lower, upper, total, shared, method), (lower.copy(), upper.copy())
    if asked.draws is not None:
        rows = np.flatnonzero(known)
        drawn = _simulated(chain().sided(effects).rows(rows), asked.draws, asked.probability)
        return _put(plain, rows, stepped.value, drawn)
    if not rows.size:
        return plain
    _curved(plain, rows, stepped, through, content, asked)
    if asked.bare:
        _sharpened(plain, rows, chain().rows(rows), asked)
    hard = rows[np.isnan(lower[rows])]
    if not hard.size:
        return plain
    lower[hard], upper[hard] = first[0][hard], first[1][hard]  # should hardly any draw answer
    few = Draws(max(FEWEST, int(np.ceil(OUTSIDE / (1.0 - asked.probability)))))
    drawn = _simulated(chain().sided(effects).rows(hard), few, asked.probability)
    found = _put(plain, hard, stepped.value, drawn)
    return replace(found, total=total, shared=shared)


def _shift(
    stepped: Stepped, through: Through, content: WaterContent, total: Array, asked: Asked
) -> tuple[Array, NDArray[np.bool_]]:
    """How far curvature moves both ends, and rows in which that is all it does.

    An input moves both by z^2 of its bend along the gradient, and by one of it across.
    """
    z = coverage_factor(asked.probability)
    steeper = np.divide(z * z - 1.0, np.square(total), out=np.zeros_like(total), where=total > 0)
    shift, size = np.zeros_like(total), np.zeros_like(total)
    strides = np.zeros_like(total)
    for name, steps in (*stepped.direct.items(), ("", stepped.through)):
        slope = steps.slope
        if name != OWN_OF_SALT:
            strides = np.maximum(strides, np.abs(slope))
        moved = steps.bend * (1.0 + steeper * np.square(slope))
        shift += moved
        size += np.abs(moved)
    if through.bends:
        slope = np.divide(
            stepped.through.slope, content.standard_uncertainty,
            out=np.zeros_like(total), where=content.standard_uncertainty > 0,
        )  # fmt: skip
        moved = slope * sum(through.bends.values())
        shift += moved
        size += np.abs(moved)
    below, above = content.scales
    limit = (BARE if asked.bare else CALM) * z * total
    return shift, (size <= limit) & (strides <= STRIDE) & (below == above)


def _curved(
    plain: Spread,
    rows: NDArray[np.intp],
    stepped: Stepped,
    through: Through,
    content: WaterContent,
    asked: Asked,
) -> None:
    """Put the ends of the curves into their rows; NaN where those will not do.

    Where it is most of the rows, all are worked out: that takes less than to pick them.
    """
    count = plain.lower.size
    picked = slice(None) if 2 * rows.size > count else rows

    def some(values: Any) -> Any:
        return np.broadcast_to(values, (count,))[picked]

    def stepping(steps: Steps) -> Steps:
        return Steps(some(steps.up), some(steps.down), some(steps.size))

    def whole(values: Array) -> Array:
        if isinstance(picked, slice):
            return values
        every = np.zeros(count)
        every[picked] = values
        return every

    def measurand(point: Point) -> Array:
        scores = {name: whole(score) for name, score in point.scores.items()}
        return stepped.measurand(Point(whole(point.intermediate), scores))[picked]

    moved = None
    if stepped.by_water_content:
        effects = {**through.effects.per_reading, **through.effects.shared}
        moved = Intermediate(
            stepping(stepped.through),
            content.standard_uncertainty[picked],
            {n: some(effect) for n, effect in effects.items() if n not in {OWN, CONDUCTION}},
            {name: some(bend) for name, bend in through.bends.items()},
            *map(some, content.scales_at(asked.probability)),
        )
    direct = {n: stepping(steps) for n, steps in stepped.direct.items() if n != OWN_OF_SALT}
    found = ends(
        measurand, stepped.value[picked], direct, moved,
        straight=stepped.own[picked], probability=asked.probability,
    )  # fmt: skip
    wanted = rows if isinstance(picked, slice) else slice(None)
    plain.lower[rows], plain.upper[rows] = found.lower[wanted], found.upper[wanted]


def _sharpened(plain: Spread, rows: NDArray[np.intp], some: Chain, asked: Asked) -> None:
    """Ends along the gradient of the whole chain, where the curves found any."""
    sharp = band(some, some.distributions(), probability=asked.probability, sharp=True)
    for found, better in ((plain.lower, sharp.lower), (plain.upper, sharp.upper)):
        found[rows] = np.where(np.isinf(found[rows]), found[rows], better)
    plain.method[rows] = sharp.method


@dataclass(frozen=True, slots=True)
class _Draws:
    lower: Array
    upper: Array
    standard_uncertainty: Array
    outside: NDArray[np.intp]


def _simulated(some: Chain, draws: Draws, probability: float) -> _Draws:
    """JCGM 101 on the whole chain; a draw without an answer is beyond one end or the other."""
    every, parts = some.distributions(), []
    scores = scores_of(draws, every, None)
    for rows in blocks_of(every, draws.count):
        (values,) = values_of(some, every, rows, scores)
        inside = np.abs(values) < 0.5 * BEYOND_ALL
        within, possible = inside.sum(axis=1), np.isfinite(values).sum(axis=1)
        ends = interval_of(values, possible, probability=probability, kind="symmetric")
        beyond = [np.where(np.abs(end) < 0.5 * BEYOND_ALL, end, end * np.inf) for end in ends]
        _, u = moments_of(np.where(inside, values, np.nan), within)
        parts.append((*beyond, u, values.shape[1] - within))
    return _Draws(*(np.concatenate(each) for each in zip(*parts, strict=True)))


def _put(plain: Spread, rows: NDArray[np.intp], value: Array, drawn: _Draws) -> Spread:
    """The draws in their rows; the ends reach to the value where that lies outside them.

    Rows with too few draws that are possible keep what they have.
    """
    lower, upper, total = plain.lower.copy(), plain.upper.copy(), plain.total.copy()
    method, outside = plain.method.copy(), np.zeros(lower.shape, dtype=np.intp)
    told = np.isfinite(drawn.standard_uncertainty) & ~np.isnan(drawn.lower)
    at = rows[told]
    lower[at] = np.minimum(drawn.lower[told], value[at])
    upper[at] = np.maximum(drawn.upper[told], value[at])
    total[at], method[at] = drawn.standard_uncertainty[told], Method.DRAWS
    outside[rows] = drawn.outside
    share = np.divide(plain.shared, plain.total, out=np.ones_like(total), where=plain.total > 0)
    return Spread(lower, upper, total, total * share, method, outside)
