"""Whether calibration traces are of what they are said to be, and traces of the same line."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.errors import Complaint, ParameterError
from models.reflection.tdr.late_level import level_after
from models.reflection.tdr.markers import FIRST_SHARE, Edge, first_rise
from models.reflection.tdr.record import Traces
from models.reflection.tdr.smoothing import Smoothed, following_widths, smooth
from models.reflection.tdr.travel_time import Timing, width_in_points
from models.relation import Array

OPEN_LEAST, SHORT_MOST = 0.5, -0.3
"""Late levels of an open and of a shorted line, which settle near +1 and -1: those of 100 m of thin
cable are 0.56 and -0.31 when a trace ends."""
SETTLED_LEAST = 0.7
"""The first of them at the end of a long record."""
LENGTHS = (0.5, 2.0)
"""Shares of the rods' own length between which air and water may put their effective one."""
APART, APART_SHARE = 2e-9, 0.02
"""s, and of the time of arrival: by how much the first reflection of a trace may be elsewhere than
that of its calibration: it may come from either end of the head, within 1.5 ns; triggers wander by
less than 0.2 ns, and cables warm by less than 0.5 %."""
LEVELS_APART = 0.15
"""How far the level before the first reflection may be from that of the calibration."""
HIGHEST_BEFORE = 0.6
"""The same level, of any line: a cable of 200 ohm on an instrument of 50."""
IN_VOLTS = "these are volts: then send level, with level_matched and level_open"
LEVEL_LEAST = 0.35
"""Share of a trace that is level, at least: simulated traces that stop after the end reflection are
by 0.42 and more, what swings or wanders by 0.1 to 0.45."""
SLOPING = 3.0
"""Times its noise, from which a slope is one."""


@dataclass(frozen=True, slots=True)
class Begin:
    """How the calibration traces begin: what every trace through the same line repeats."""

    time: float
    """s, of the first reflection by its steepest slope."""
    level: float
    """Before it."""
    upwards: bool | None
    """None: not known, as where the head is nearly matched and the medium decides."""


def late_end(settled: Traces) -> float:
    """Mean level over the last tenth of traces."""
    return level_after(settled, settled.end)[0]


def refuse_levels(air: Traces | None, short: Traces | None, *, long: bool = False) -> None:
    """Raise ParameterError where an open line does not end near +1 or a short near -1.

    long: whether the air is a long record.
    """
    least = SETTLED_LEAST if long else OPEN_LEAST
    complaints = []
    for name, settled in (("air", air), ("short", short)):
        if settled is None:
            continue
        level = late_end(settled)
        found = f"the {name} trace ends at a level of {level:+.3g}: "
        scaled = f", or {IN_VOLTS}" if SHORT_MOST < level < least else ""
        if name == "air" and level < least:
            detail = found + "rods in air are an open line, which ends near +1"
            detail += "; this is a short" if level < SHORT_MOST else "; something conducts here"
            detail += scaled
        elif name == "short" and level > SHORT_MOST:
            what = "an open end" if level > OPEN_LEAST else "no short"
            detail = found + f"this is {what}; shorted rods end near -1{scaled}"
        else:
            continue
        complaints.append(Complaint(name, detail, ("calibration", name)))
    if complaints:
        raise ParameterError("calibration", complaints)


def refuse_lengths(timing: Timing, length: float) -> None:
    """Raise ParameterError where water is no slower than air, or the rods of another length.

    length: of the rods, m.
    """
    found = timing.effective_length
    if all(LENGTHS[0] * length <= one <= LENGTHS[1] * length for one in found):
        return
    mean = 0.5 * (found[0] + found[1])
    detail = f"air and water give the rods an effective length of {mean:.3g} m, where "
    detail += f"probe_length says {length:.3g} m: "
    detail += "the end comes no later in the water trace than in that of air" if mean <= 0 else (
        f"expected {LENGTHS[0]:g} to {LENGTHS[1]:g} times that length"
    )  # fmt: skip
    detail += "; this is no trace of the same rods in water, or probe_length is another"
    raise ParameterError("calibration", [Complaint("water", detail, ("calibration", "water"))])


def begin_of(air: Traces | None, water: Traces | None, short: Traces | None) -> Begin | None:
    """How calibration traces begin, from the first there is; None where none shows it."""
    edges = {name: first_edge(given) for name, given in
             (("air", air), ("water", water), ("short", short)) if given is not None}  # fmt: skip
    seen = {name: edge for name, edge in edges.items() if np.isfinite(edge.steepest).all()}
    if not seen:
        return None
    first = next(iter(seen.values()))
    upwards = None
    if "air" in seen and "water" in seen:
        ways = np.concatenate([seen[name].signal for name in ("air", "water")]) > 0
        upwards = bool(ways[0]) if (ways == ways[0]).all() else None
    return Begin(float(np.mean(first.steepest)), float(np.mean(first.level)), upwards)


def first_edge(given: Traces) -> Edge:
    """First reflection of each trace, with the narrowest of their smoothings."""
    width = float(np.min(following_widths(given))) * given.step
    return first_rise(given, smooth(given, width_in_points(width, given)))


@dataclass(frozen=True, slots=True, eq=False)
class Begins:
    """How traces begin, shape (traces,)."""

    time: Array
    """s, of the first reflection; NaN where there is none."""
    level: Array
    """Before it."""
    strange: NDArray[np.bool_]
    """None of this line, or no traces at all."""
    stepless: NDArray[np.bool_]
    """No steps between levels: what swings, climbs, wanders, rests, or begins amid a reflection."""


def begins_of(given: Traces, begin: Begin | None) -> Begins:
    """How traces begin, and which show no first reflection, or not that of their calibration.

    Other cables, axes in one-way time or with another velocity factor, traces upside down, and
    what is no trace: all of them begin otherwise.
    """
    widths = following_widths(given)
    time, level, signal = (np.full(given.count, np.nan) for _ in range(3))
    stepless = np.zeros(given.count, dtype=np.bool_)
    for width in np.unique(widths):
        rows = np.flatnonzero(widths == width)
        part = given if rows.size == given.count else given.rows(rows)
        smoothed = smooth(part, width_in_points(float(width) * given.step, given))
        found = first_rise(part, smoothed)
        time[rows], level[rows], signal[rows] = found.steepest, found.level, found.signal
        early = found.steepest < part.start + 0.5 * smoothed.width
        nowhere = np.isnan(found.steepest)
        stepless[rows] = nowhere | early | (_level_share(smoothed) < LEVEL_LEAST)
    strange = (np.abs(level) > HIGHEST_BEFORE) | stepless
    if begin is not None:
        apart = np.abs(time - begin.time) > max(APART, APART_SHARE * abs(begin.time))
        if begin.upwards is not None:
            strange |= (signal > 0) != begin.upwards
        strange |= apart | (np.abs(level - begin.level) > LEVELS_APART)
    return Begins(time, level, strange, stepless)


def _level_share(smoothed: Smoothed) -> Array:
    """Share of each trace whose slope is that of no reflection."""
    size = np.abs(smoothed.slope)
    least = np.maximum(FIRST_SHARE * size.max(axis=-1), SLOPING * smoothed.slope_noise)
    return np.asarray((size < least[:, None]).mean(axis=-1))
