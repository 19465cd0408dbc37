"""Calibration of a probe from traces in air, in water, and with its rods shorted."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from scipy.constants import speed_of_light

from models.errors import Complaint, ParameterError
from models.mixing.apparent import to_apparent
from models.reflection.tdr.markers import first_rise
from models.reflection.tdr.record import Traces
from models.reflection.tdr.smoothing import following_widths, smooth
from models.reflection.tdr.travel_time import (
    AIR_INDEX,
    Timing,
    find,
    plain_timing,
    width_in_points,
)
from models.water import DEFAULT_WATER, WATER_MODELS

WATER_FREQUENCY = 1e9
"""Hz, at which the water of a calibration is taken; below, its permittivity hardly changes."""
USUAL_OFFSET = 0.5e-9
"""s, from the first rise to the rods, where nothing is known of the head."""
BLURRED = 0.1
"""Of a rise: where the first rises in air and water differ by more, the medium shapes them."""
EARLY, LATE = 0.75, 1.3
"""Shares of the index within which the end reflection of a calibration is looked for."""
SUSPECT_LENGTH = 0.05
"""Share by which the effective length of rods may differ from their own, without a remark."""


def water_index(temperature: float, temperature_u: float = 0.0) -> tuple[float, float]:
    """Refractive index of the water of a calibration, and its standard uncertainty.

    That is of temperature and formula.

    temperature: Cel.
    """

    def index(at: float) -> float:
        real, loss = WATER_MODELS[DEFAULT_WATER].parts(WATER_FREQUENCY, at)
        return float(np.sqrt(to_apparent(real, loss)))

    here = index(temperature)
    of_formula = WATER_MODELS[DEFAULT_WATER].static_uncertainty / (2.0 * here)
    return here, float(np.hypot(index(temperature + temperature_u) - here, of_formula))


def calibrate(
    air: Traces,
    water: Traces,
    *,
    length: float,
    temperature: float,
    temperature_u: float = 0.0,
    offset: float | None = None,
) -> Timing:
    """Time in air and in water, by both ways, from one or more traces of each.

    length: of the rods, m, for where to look. offset: s, from the first rise to the rods, if known.
    Raises ParameterError when a trace shows no end reflection.

    Where the cable blurs the first rise so much that it depends on the medium, the mean of both
    stands for all traces, which must then come through the same cable; and the air's own end, which
    overlaps with it, counts no more than the length of the rods does.
    """
    width = float(np.min(following_widths(air))) * air.step
    index, index_u = water_index(temperature, temperature_u)
    starts = [first_rise(part, smooth(part, width_in_points(width, part))) for part in (air, water)]
    rise = float(np.mean(starts[0].rise))
    apart = [np.mean(starts[0].tangent) - np.mean(starts[1].tangent),
             np.mean(starts[0].steepest) - np.mean(starts[1].steepest)]  # fmt: skip
    fixed = None
    if not max(map(abs, apart)) <= BLURRED * rise:
        fixed = float(min(np.mean(start.steepest) for start in starts))
    known = USUAL_OFFSET if offset is None else offset
    guess = replace(plain_timing(length, 0.0, known, 0.0, width), fixed_start=fixed)
    low, low_u, low_rise = _time(air, "air", guess, AIR_INDEX)
    high, high_u, high_rise = _time(water, "water", guess, index)
    if fixed is not None:
        low, low_u = _by_length(low, low_u, high, length, index)
    rises = (low_rise, high_rise)
    return Timing(low, high, AIR_INDEX, index, low_u, high_u, index_u, fixed, width, rises)


def rise_of(given: Sequence[Traces]) -> tuple[float, float]:
    """Two-way time of the first rise, s, the earliest of several traces; and how long it takes.

    Of those that show one; NaN where none does.
    """
    width = min(float(np.min(following_widths(part))) * part.step for part in given)
    starts = [first_rise(part, smooth(part, width_in_points(width, part))) for part in given]
    first = min(starts, key=lambda start: float(np.nan_to_num(np.mean(start.steepest), nan=np.inf)))
    return float(np.mean(first.steepest)), float(np.mean(first.rise))


def _by_length(
    low: tuple[float, float], low_u: float, high: tuple[float, float], length: float, index: float
) -> tuple[tuple[float, float], float]:
    """Time in air, halfway between what a blurred trace shows and what the rods' length says.

    A quarter of what they are apart is the standard uncertainty: half of it ends at both.
    """
    span = 2.0 * length * (index - AIR_INDEX) / speed_of_light
    told = (high[0] - span, high[1] - span)
    apart = 0.5 * (abs(told[0] - low[0]) + abs(told[1] - low[1]))
    middle = (0.5 * (low[0] + told[0]), 0.5 * (low[1] + told[1]))
    return middle, float(np.hypot(low_u, 0.25 * apart))


def _time(
    given: Traces, name: str, guess: Timing, index: float
) -> tuple[tuple[float, float], float, float]:
    """Mean time to the end by both ways in a medium of known index, its noise, and the rise."""
    found = find(given, guess, (EARLY * index, LATE * index))
    if np.isnan(found.end.steepest).any():
        detail = f"the {name} trace shows no end reflection where the rods should end"
        place = ("calibration", name)
        raise ParameterError("calibration", [Complaint(name, detail, place)])
    tangent, steepest = (float(np.mean(time)) for time in found.time(guess))
    noise = np.square(0.5 * (found.end.tangent_u + found.end.steepest_u))
    if guess.fixed_start is None:
        noise = noise + np.square(0.5 * (found.start.tangent_u + found.start.steepest_u))
    noise_u = float(np.sqrt(np.mean(noise) / noise.size))
    return (tangent, steepest), noise_u, float(np.mean(found.end.rise))
