"""Apparent permittivity and effective frequency from the times of a trace."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.mixing.apparent import effective_frequency
from models.reflection.tdr.travel_time import Arrivals, Timing
from models.relation import Array, Range

PHYSICAL = Range(1.0, 90.0)
"""Apparent permittivities that a probe in soil or water can show."""
TANGENT_WEIGHT = 0.6
"""Of the tangents in the refractive index: in simulated soils their error is the smaller one."""
METHOD_SHARE = 0.4
"""Of the half-difference between the two ways, for its standard uncertainty."""
LOW_EXCUSED = 0.3
"""How far below 1 a permittivity may lie, however uncertain it is."""
FLOOR = 0.003
"""Relative standard uncertainty of a refractive index, however well both ways agree. The head
rings, and calibration in air and water does not show how it rings in the soil."""
BLUR = 0.025
"""The same, of the rise of the end reflection over the travel time: what is read within a rise."""
DISPERSION = 0.3
"""The same, of the rise in excess of what air and water show, over the travel time: a soil that
slows an edge relaxes within its band, and has as many permittivities as the edge frequencies."""
COMMON_FREQUENCY = 1e9
"""Hz, of which a permittivity by travel time is often taken to speak: dispersion counts for more
by as many e-folds as the effective frequency is below it."""
WATER_SLOWING = 7.5e-11
"""s: square of the rise that water adds, over the travel time in it, where no trace shows it."""
HEAD_SLOWING = 1.2
"""Of a rise, between head and end of rods in air, where no trace shows it."""
RISE_UNCERTAINTY = 0.15
"""Relative standard uncertainty of the rise time of an end reflection."""


@dataclass(frozen=True, slots=True, eq=False)
class ApparentPermittivity:
    """Shape (traces,); NaN where there is no end reflection."""

    value: Array
    standard_uncertainty: Array
    shared: Array
    """Its part that all traces of the same probe calibration share."""
    by_tangents: Array
    by_steepest: Array
    frequency: Array
    """Hz, effective."""
    frequency_u: Array
    travel_time: Array
    """s, two-way, along rods of the effective length."""
    expected_rise: Array
    """s, of an end reflection in a medium that relaxes no more than water does."""
    refused: NDArray[np.bool_]


@np.errstate(all="ignore")
def apparent_permittivity(found: Arrivals, timing: Timing) -> ApparentPermittivity:
    """Square of the refractive index, a weighted mean of both ways of reading the time.

    It is the permittivity at the effective frequency, told beside it. Noise alone differs from
    reading to reading. Shared by all readings of a probe in one soil are its calibration, half the
    difference of the two ways, what both have in common, the blur of the edge, and dispersion.
    """
    times = found.time(timing)
    spans = [high - low for low, high in zip(timing.low, timing.high, strict=True)]
    rise = timing.high_index - timing.low_index
    shares = [(time - low) / span for time, low, span in zip(times, timing.low, spans, strict=True)]
    tangent, steepest = (timing.low_index + rise * share for share in shares)
    index = TANGENT_WEIGHT * tangent + (1 - TANGENT_WEIGHT) * steepest
    share = TANGENT_WEIGHT * shares[0] + (1 - TANGENT_WEIGHT) * shares[1]
    per_second = rise / (0.5 * (spans[0] + spans[1]))
    noise = 0.5 * (found.end.tangent_u + found.end.steepest_u)
    if timing.fixed_start is None:
        noise = np.hypot(noise, 0.5 * (found.start.tangent_u + found.start.steepest_u))
    own = per_second * noise
    time = index / per_second
    expected = _expected_rise(found, timing, time, share)
    excess = np.sqrt(np.maximum(np.square(found.end.rise) - np.square(expected), 0.0))
    frequency = effective_frequency(found.end.rise)
    away = np.log(np.maximum(COMMON_FREQUENCY / frequency, 1.0))
    shared = np.sqrt(
        np.square(per_second * (1 - share) * timing.low_u)
        + np.square(per_second * share * timing.high_u)
        + np.square(share * timing.index_u)
        + np.square(METHOD_SHARE * 0.5 * (tangent - steepest))
        + np.square(FLOOR * index)
        + np.square(BLUR * per_second * found.end.rise)
        + np.square(DISPERSION * per_second * excess * np.hypot(1.0, away))
    )
    value = np.square(index)
    total = 2 * index * np.hypot(own, shared)
    # Air reads 1 give or take its uncertainty: what that explains is not refused.
    excused = np.minimum(3.0 * total, LOW_EXCUSED)
    refused = PHYSICAL.excludes(value + np.where(value < PHYSICAL.low, excused, 0.0))
    lost = np.where(refused, np.nan, 0.0)
    return ApparentPermittivity(
        value=value + lost,
        standard_uncertainty=total + lost,
        shared=2 * index * shared + lost,
        by_tangents=np.square(tangent) + lost,
        by_steepest=np.square(steepest) + lost,
        frequency=frequency + lost,
        frequency_u=RISE_UNCERTAINTY * frequency + lost,
        travel_time=time + lost,
        expected_rise=expected + lost,
        refused=refused,
    )


def _expected_rise(found: Arrivals, timing: Timing, time: Array, share: Array) -> Array:
    """Rise in a medium between those of the calibration, s: its square grows with the index.

    time: s, along the rods. share: of the index, from low to high.
    """
    if timing.rises is None:
        begin = np.square(HEAD_SLOWING * found.start.rise)
        return np.sqrt(begin + WATER_SLOWING * time * np.clip(share, 0.0, 1.0))
    low, high = (rise * rise for rise in timing.rises)
    return np.sqrt(np.maximum(low + share * (high - low), 0.0))
