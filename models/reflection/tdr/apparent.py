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
METHOD_SHARE = float(1 / np.sqrt(3.0))
"""Of the half-difference between the two ways, for its standard uncertainty: that of a uniform
distribution which ends at both of them."""
FLOOR = 0.005
"""Relative standard uncertainty of a refractive index, however well both ways agree: by so much
simulated soils miss their truth. The head rings, and calibration in air and water does not show
how it rings in the soil: the same for all traces of a probe."""
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
    refused: NDArray[np.bool_]


@np.errstate(all="ignore")
def apparent_permittivity(found: Arrivals, timing: Timing) -> ApparentPermittivity:
    """Square of the refractive index, a weighted mean of both ways of reading the time.

    Its uncertainty holds noise, half the difference of the two ways, what both have in common, and
    the calibration of the probe.
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
    method = METHOD_SHARE * 0.5 * np.abs(tangent - steepest)
    own = np.hypot(per_second * noise, method)
    shared = np.sqrt(
        np.square(per_second * (1 - share) * timing.low_u)
        + np.square(per_second * share * timing.high_u)
        + np.square(share * timing.index_u)
        + np.square(FLOOR * index)
    )
    value = np.square(index)
    total = 2 * index * np.hypot(own, shared)
    # Air reads 1 give or take its uncertainty: what that explains is not refused.
    refused = PHYSICAL.excludes(value + np.where(value < PHYSICAL.low, 3.0 * total, 0.0))
    lost = np.where(refused, np.nan, 0.0)
    frequency = effective_frequency(found.end.rise)
    return ApparentPermittivity(
        value=value + lost,
        standard_uncertainty=total + lost,
        shared=2 * index * shared + lost,
        by_tangents=np.square(tangent) + lost,
        by_steepest=np.square(steepest) + lost,
        frequency=frequency + lost,
        frequency_u=RISE_UNCERTAINTY * frequency + lost,
        travel_time=index / per_second + lost,
        refused=refused,
    )
