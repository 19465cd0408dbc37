"""A measurand at common draws of its inputs, block by block."""

from collections.abc import Callable, Iterator, Mapping
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, column
from models.uncertainty.correlation import correlation_matrix, triangular
from models.uncertainty.distributions import Distribution, rows_of
from models.uncertainty.draws import Draws
from models.uncertainty.exact import Exact
from models.uncertainty.joint import outputs_of

BLOCK = 2**15
"""Values a measurand gives per call: its working columns stay near the processor."""


def scores_of(
    draws: Draws,
    inputs: Mapping[str, Distribution],
    correlation: ArrayLike | None,
    batch: int = 0,
) -> dict[str, Array | float]:
    """Standard-normal draws of each input; what is exact needs none."""
    if correlation is None:
        drawn = [name for name, given in inputs.items() if not isinstance(given, Exact)]
        normal = draws.normal(max(len(drawn), 1), batch)
        return dict.fromkeys(inputs, 0.0) | dict(zip(drawn, normal, strict=False))
    normal = draws.normal(len(inputs), batch)
    correlated = column(triangular(correlation_matrix(correlation, len(inputs))) @ normal)
    return dict(zip(inputs, correlated, strict=True))


def blocks_of(inputs: Mapping[str, Distribution], draws: int) -> Iterator[slice]:
    """So many rows at a time that their draws fit a block; at least one."""
    count, step = rows_of(inputs.values()), max(1, BLOCK // draws)
    return (slice(start, min(start + step, count)) for start in range(0, max(count, 1), step))


def values_of(
    measurand: Callable[..., Any],
    inputs: Mapping[str, Distribution],
    rows: Any,
    scores: Mapping[str, Array | float],
) -> list[Array]:
    """Every output of the measurand at every draw, shape (rows, draws) each."""
    some = {name: given.take((rows, None)) for name, given in inputs.items()}
    count = rows.stop - rows.start if isinstance(rows, slice) else rows.size
    draws = max(np.size(each) for each in scores.values())
    parts = []
    for start in range(0, draws, BLOCK):
        now = slice(start, min(start + BLOCK, draws))
        at = {
            name: given.from_normal(0.0 if given.exact else column(scores[name])[now])
            for name, given in some.items()
        }
        with np.errstate(all="ignore"):
            outputs = outputs_of(measurand(**at))
        parts.append([np.broadcast_to(one, (count, now.stop - now.start)) for one in outputs])
    return [_numbers(*chunks) for chunks in zip(*parts, strict=True)]


def _numbers(*chunks: Array) -> Array:
    """All draws of one output, NaN for what is no number."""
    values = chunks[0] if len(chunks) == 1 else np.concatenate(chunks, axis=1)
    if np.isfinite(values.sum()):  # takes half as long as to look at each
        return values
    known = np.isfinite(values)
    return values if known.all() else np.where(known, values, np.nan)
