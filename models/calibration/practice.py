"""What should be known of a calibration before it is used: practice that was not met, doubts."""

from collections.abc import Iterator

import numpy as np
from scipy.special import ndtri, stdtrit

from models.advisories import Advice
from models.calibration.advisories import advise
from models.calibration.calibration import Calibration
from models.calibration.pairs import Pairs

PAIRS, LEVELS, REPLICATES = 10, 5, 3
"""Common practice, from memory: what a soil-specific calibration has at least."""
SPAN = 0.15
"""m3/m3 between the driest and the wettest pair, at least."""
UNLIKELY = 0.025


def advice_of(found: Calibration) -> tuple[Advice, ...]:
    """Everything to say of one calibration, whatever it is used for."""
    return (
        *_of_scope(found),
        *_of_scatter(found),
        *_of_outlier(found),
        *_of_curve(found),
        *_of_design(found.pairs),
    )


def _of_scope(found: Calibration) -> Iterator[Advice]:
    yield advise("calibration-scope", low=f"{found.range.low:g}", high=f"{found.range.high:g}")


def _of_scatter(found: Calibration) -> Iterator[Advice]:
    scatter = found.scatter
    if not scatter.stated:
        yield advise("calibration-unstated")
        return
    told = {"chi_square": f"{found.settled.chi_square:.3g}", "degrees": scatter.degrees_of_freedom}
    if found.chi_square_probability < UNLIKELY:
        yield advise("calibration-scattered", **told, scatter=f"{found.soil_scatter:.3g}")
    elif found.chi_square_probability > 1.0 - UNLIKELY:
        yield advise("calibration-overstated", **told)


def largest_residual(found: Calibration) -> int:
    """The pair farthest from the curve, in its own standard deviations; from 0."""
    sizes = np.abs(found.standardised)
    return int(np.argmax(np.where(np.isnan(sizes), -1.0, sizes)))


def _of_outlier(found: Calibration) -> Iterator[Advice]:
    place, degrees = largest_residual(found), found.scatter.degrees_of_freedom
    size = float(abs(found.standardised[place]))
    likely = 1.0 - UNLIKELY / found.pairs.count
    if found.scatter.stated and found.settled.variance == 0.0:
        outlying = size > float(ndtri(likely))
    else:  # the pair is left out of the variance that it is measured by
        rest = degrees - size**2
        outlying = degrees > 1 and (
            rest <= 0.0
            or size * np.sqrt((degrees - 1) / rest) > float(stdtrit(degrees - 1, likely))
        )
    if outlying:
        yield advise("calibration-outlier", pair=place + 1,
                     permittivity=f"{found.pairs.permittivity[place]:g}",
                     residual=f"{found.left[place]:+.3g}", times=f"{size:.2g}")  # fmt: skip


def _of_curve(found: Calibration) -> Iterator[Advice]:
    grid = found.grid
    falling = np.flatnonzero(~(found.fit.slope_at(grid) > 0.0))
    if found.flat:
        rise, u = found.rise
        yield advise("calibration-flat", rise=f"{rise:.3g}", u=f"{u:.3g}")
    elif falling.size:
        yield advise("calibration-turns", place=f"{grid[falling[0]]:.3g}")


def _of_design(pairs: Pairs) -> Iterator[Advice]:
    lacking = list(_lacking(pairs))
    if lacking:
        yield advise("calibration-design", lacking="; ".join(lacking))


def _lacking(pairs: Pairs) -> Iterator[str]:
    if pairs.count < PAIRS:
        yield f"{pairs.count} pairs, of at least {PAIRS} to 15"
    if pairs.level is None:
        yield "no level says which pairs are replicates, and each counts as independent"
    else:
        replicates = np.unique(pairs.level, return_counts=True)[1]
        if replicates.size < LEVELS:
            yield f"{replicates.size} levels, of at least {LEVELS} from dry to near saturated"
        if replicates.min() < REPLICATES:
            few = int(np.sum(replicates < REPLICATES))
            yield f"{few} levels with fewer than {REPLICATES} replicates"
    span = float(np.ptp(pairs.water_content))
    if span < SPAN:
        yield (
            f"water contents from {pairs.water_content.min():.3g} to "
            f"{pairs.water_content.max():.3g} m3/m3, of a span of at least {SPAN:g}"
        )
