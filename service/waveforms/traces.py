"""Traces of a request in SI: their axes, and the unit that was probably meant instead."""

from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np
from scipy.constants import speed_of_light

from models.errors import Complaint, ParameterError
from models.reflection.tdr.bench import Record
from models.reflection.tdr.record import (
    COARSEST,
    FINEST,
    LATEST,
    Traces,
    even_axis,
    from_distance,
    traces,
    window_axis,
)
from models.relation import column
from models.units import UNITS
from service.waveforms.bodies import TraceBody, WaveformBody

Place = tuple[int | str, ...]
AXIS_UNITS = ("m", "cm", "mm", "ns", "ps", "us", "s")
USUAL = (1e-12, 5e-10)
"""s between points of a trace that shows rods."""
TYPICAL = 3e-11
"""The same, most often."""


def record_of(body: WaveformBody, place: Place) -> Record:
    """A trace and its long record; place: the steps to it in the request."""
    late = body.long_record
    return Record(
        trace_of(body, place),
        None if late is None else trace_of(late, (*place, "long_record")),
    )


def trace_of(body: TraceBody, place: Place) -> Traces:
    """One trace in SI. Raises ParameterError with the place of what is wrong."""
    try:
        rho, name = _samples(body)
        start, step = _axis_of(body, len(rho), name)
        if not FINEST <= step <= COARSEST or start + step * len(rho) > LATEST:
            raise _unlikely_axis(body, step, len(rho))
        return traces(start, step, rho, body.reflection_coefficient_u)
    except ParameterError as error:
        steps = [str(step) for step in place]
        complaints = [replace(c, place=(*steps, *c.place)) for c in error.complaints]
        raise ParameterError("waveform", complaints) from None


def _unlikely_axis(body: TraceBody, step: float, count: int) -> ParameterError:
    """The refusal of an axis that no instrument has, with the unit that was probably meant."""
    name = "window" if body.axis is None else "axis"
    span = body.window if body.axis is None else body.axis[-1] - body.axis[0]
    detail = (
        f"expected points {1e12 * FINEST:g} to {1e12 * COARSEST:g} ps of two-way time apart, found "
        f"{1e12 * step:.3g} ps: {count} points over {span:g} {body.axis_unit}, the last at most "
        f"{1e6 * LATEST:g} us after the step{_looks(body, step)}"
    )
    return _refuse(name, detail)


def _looks(body: TraceBody, step: float) -> str:
    """The axis unit that would bring points nearest to their usual distance, as a hint."""
    steps = {code: step / _pace(body.axis_unit) * _pace(code) for code in AXIS_UNITS}
    fits = [code for code, s in steps.items()
            if USUAL[0] <= s <= USUAL[1] and code != body.axis_unit]  # fmt: skip
    if not fits:
        return ""
    meant = min(fits, key=lambda code: abs(np.log(steps[code] / TYPICAL)))
    return f'; looks like {meant}: send "axis_unit": "{meant}"'


def _pace(code: str) -> float:
    """Two-way time, s, that one of an axis unit means."""
    unit = UNITS[code]
    return unit.scale if unit.dimension == "time" else 2.0 * unit.scale / speed_of_light


def refuse_coarse(
    bodies: Mapping[int, WaveformBody], where: Mapping[int, Place], length: float
) -> None:
    """Refuse traces too coarse, or too short, to show rods at all: their unit was another one.

    length: of the rods, m. Raises ParameterError with the first such trace.
    """
    in_air = 2.0 * length / speed_of_light
    for place, body in bodies.items():
        count = len(body.reflection_coefficient or body.level or ())
        _, step = _axis_of(body, count, "reflection_coefficient")
        span = step * (count - 1)
        if step <= in_air and span >= in_air:
            continue
        what = "apart" if step > in_air else "in all"
        found = step if step > in_air else span
        looks = _looks(body, step)
        detail = (
            f"the points are {1e9 * found:.3g} ns of two-way time {what}, and rods of {length:g} m "
            f"take {1e9 * in_air:.3g} ns even in air{looks}, or check probe_length"
        )
        name = "window" if body.axis is None else "axis"
        raise ParameterError("waveform", [Complaint(name, detail, (*map(str, where[place]), name))])


def _refuse(name: str, detail: str) -> ParameterError:
    return ParameterError("waveform", [Complaint(name, detail, (name,))])


def _samples(body: TraceBody) -> tuple[Sequence[float], str]:
    """Reflection coefficients, and the name they came by."""
    if (body.reflection_coefficient is None) == (body.level is None):
        found = "both" if body.level is not None else "neither"
        detail = f"a trace holds reflection_coefficient or level, found {found}"
        raise _refuse("reflection_coefficient", detail)
    if body.level is None:
        return body.reflection_coefficient or [], "reflection_coefficient"
    matched, opened = body.level_matched, body.level_open
    if matched is None or opened is None or matched == opened:
        name = "level_open" if matched is not None else "level_matched"
        raise _refuse(name, "level needs level_matched and level_open, and they must differ")
    rho: Sequence[float] = ((column(body.level) - matched) / (opened - matched)).tolist()
    return rho, "level"


def _axis_of(body: TraceBody, count: int, name: str) -> tuple[float, float]:
    """Start and step in two-way time, s."""
    if body.points is not None and body.points != count:
        raise _refuse("points", f"points says {body.points}, {name} has {count}")
    unit = UNITS[body.axis_unit]
    is_time = unit.dimension == "time"
    if body.axis is not None:
        if body.start is not None or body.window is not None:
            raise _refuse("axis", "a trace holds axis, or start and window, found both")
        if len(body.axis) != count:
            raise _refuse("axis", f"axis has {len(body.axis)} points, {name} has {count}")
        axis = unit.to_si(body.axis)
        if is_time:
            return even_axis(axis, "axis")
        return from_distance(axis, body.propagation_velocity_factor, "axis")
    if body.start is None or body.window is None:
        lacking = "start" if body.start is None else "window"
        raise _refuse(lacking, f"{lacking} is missing: a trace needs start and window, or axis")
    start, window = float(unit.to_si(body.start)), float(unit.to_si(body.window))
    if is_time:
        return start, window / max(count - 1, 1)
    return window_axis(start, window, max(count, 2), body.propagation_velocity_factor)
