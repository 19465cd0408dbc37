"""Whether calibration traces are of what they are said to be, and traces of the same line."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.errors import Complaint, ParameterError
from models.reflection.tdr.late_level import level_after
from models.reflection.tdr.markers import Edge, first_rise
from models.reflection.tdr.record import Traces
from models.reflection.tdr.smoothing import following_widths, smooth
from models.reflection.tdr.travel_time import Timing, width_in_points
from models.relation import Array

OPEN_LEAST, SHORT_MOST = 0.3, -0.3
"""Late levels of an open and of a shorted line, which settle near +1 and -1: at the latter the
cable has 27 ohm, as much as 60 m of a thin one have when a trace ends."""
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


def refuse_levels(air: Traces | None, short: Traces | None) -> None:
    """Raise ParameterError where an open line does not end near +1 or a short near -1."""
    complaints = []
    for name, settled in (("air", air), ("short", short)):
        if settled is None:
            continue
        level = late_end(settled)
        found = f"the {name} trace ends at a level of {level:+.3g}: "
        if name == "air" and level < OPEN_LEAST:
            detail = found + "rods in air are an open line, which ends near +1"
            detail += "; this is a short" if level < SHORT_MOST else "; something conducts here"
        elif name == "short" and level > SHORT_MOST:
            what = "an open end" if level > OPEN_LEAST else "no short"
            detail = found + f"this is {what}; shorted rods end near -1"
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


def unlike(given: Traces, begin: Begin | None) -> tuple[NDArray[np.bool_], Array]:
    """Which traces show no first reflection, or not that of their calibration; and where it is, s.

    Other cables, axes in one-way time or with another velocity factor, traces upside down, and
    what is no trace: all of them begin otherwise.
    """
    widths = following_widths(given)
    time, level, signal = (np.full(given.count, np.nan) for _ in range(3))
    for width in np.unique(widths):
        rows = np.flatnonzero(widths == width)
        part = given if rows.size == given.count else given.rows(rows)
        found = first_rise(part, smooth(part, width_in_points(float(width) * given.step, given)))
        time[rows], level[rows], signal[rows] = found.steepest, found.level, found.signal
    strange = np.isnan(time) | (np.abs(level) > HIGHEST_BEFORE)
    if begin is not None:
        apart = np.abs(time - begin.time) > max(APART, APART_SHARE * abs(begin.time))
        if begin.upwards is not None:
            strange |= (signal > 0) != begin.upwards
        strange |= apart | (np.abs(level - begin.level) > LEVELS_APART)
    return strange, time
