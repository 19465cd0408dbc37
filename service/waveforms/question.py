"""From the words of a request to traces and a bench in SI, with everything that is wrong."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from pydantic import TypeAdapter, ValidationError
from scipy.constants import speed_of_light

from models.conversion import Units, to_si
from models.errors import Complaint, ParameterError
from models.reflection.tdr.bench import Bench, Calibration, Description, Record, prepare
from models.reflection.tdr.late_level import Known
from models.reflection.tdr.probe import (
    Cable,
    Head,
    three_rod_impedance,
    two_rod_impedance,
)
from models.reflection.tdr.record import Traces, even_axis, from_distance, traces, window_axis
from models.relation import column
from models.units import UNITS
from service.errors import Unprocessable
from service.faults import pointer, problems_of
from service.waveforms.bodies import (
    TraceBody,
    WaveformBody,
    WaveformProbeBody,
    WaveformSettings,
)

Place = tuple[int | str, ...]


def checked(adapter: TypeAdapter[Any], document: Any, place: Place = ()) -> Any:
    """A part of a request as its schema has it; place: the steps to it.

    Raises Unprocessable with every fault.
    """
    try:
        return adapter.validate_python(document)
    except ValidationError as error:
        faults = [replace(fault, pointer=pointer(place) + fault.pointer[1:])
                  for fault in problems_of(error, document, adapter)]  # fmt: skip
        raise Unprocessable("the request holds what cannot be used", faults) from None


@dataclass(frozen=True, slots=True, eq=False)
class Group:
    """Waveforms that share their axes, and where they stand in the request."""

    places: Sequence[int]
    record: Record


def groups_of(bodies: Mapping[int, WaveformBody], where: Mapping[int, Place]) -> list[Group]:
    """Waveforms sorted by axis, each group as one set of columns.

    bodies: by place in the request. where: the steps to each place in it.
    Raises ParameterError with the place of the first complaint.
    """
    sorted_out: dict[tuple[Any, ...], list[tuple[int, Record]]] = {}
    for place, body in bodies.items():
        record = record_of(body, where[place])
        key = (_axis(record.trace), None if record.late is None else _axis(record.late))
        sorted_out.setdefault(key, []).append((place, record))
    return [
        Group([place for place, _ in members], _stacked([record for _, record in members]))
        for members in sorted_out.values()
    ]


def _axis(trace: Traces) -> tuple[float, float, int]:
    return trace.start, trace.step, trace.points


def _stacked(records: Sequence[Record]) -> Record:
    late = [record.late for record in records if record.late is not None]
    return Record(_one([record.trace for record in records]), _one(late) if late else None)


def _one(parts: Sequence[Traces]) -> Traces:
    if len(parts) == 1:
        return parts[0]
    rho = np.concatenate([part.rho for part in parts])
    return replace(parts[0], rho=rho, noise=np.concatenate([part.stated_noise for part in parts]))


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
        return traces(start, step, rho, body.reflection_coefficient_u)
    except ParameterError as error:
        steps = [str(step) for step in place]
        complaints = [replace(c, place=(*steps, *c.place)) for c in error.complaints]
        raise ParameterError("waveform", complaints) from None


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


def bench_of(settings: WaveformSettings, units: Units, place: Place = ()) -> Bench:
    """The probe and its calibration traces, ready to measure.

    Raises ParameterError with the place of what is wrong.
    """
    calibration, where = settings.calibration, (*place, "calibration")
    water = calibration.water
    warmth: dict[str, float] = {}
    if water is not None:
        given = {"temperature": water.temperature, "temperature_u": water.temperature_u}
        warmth = to_si("calibration", given, units)
    found = Calibration(
        air=None if calibration.air is None else record_of(calibration.air, (*where, "air")),
        water=None if water is None else record_of(water, (*where, "water")),
        short=None if calibration.short is None else record_of(calibration.short,
                                                               (*where, "short")),
        water_temperature=warmth.get("temperature", np.nan),
        water_temperature_u=warmth.get("temperature_u", 0.0),
    )  # fmt: skip
    return prepare(description_of(settings.probe, units), found)


def description_of(probe: WaveformProbeBody, units: Units) -> Description:
    """The probe in SI."""
    stated = {name: value for name in ("probe_length", "probe_length_u", "probe_constant",
                                       "probe_constant_u")
              if (value := getattr(probe, name)) is not None}  # fmt: skip
    si = to_si("probe", stated, units)
    constant = None
    if "probe_constant" in si:
        constant = Known(si["probe_constant"], si["probe_constant_u"])
    resistance = None
    if probe.series_resistance is not None:
        resistance = Known(probe.series_resistance, probe.series_resistance_u)
    offset = None if probe.probe_offset is None else 2.0 * probe.probe_offset / speed_of_light
    cable, length = probe.cable, probe.cable.length or 0.0
    return Description(
        length=si["probe_length"],
        length_u=si["probe_length_u"],
        impedance=_impedance(probe),
        constant=constant,
        offset=offset,
        offset_u=2.0 * probe.probe_offset_u / speed_of_light,
        series_resistance=resistance,
        head=_head(probe),
        cable=Cable(cable.impedance, 0.0, (cable.resistance or 0.0) * length,
                    (cable.skin_resistance or 0.0) * length),
        cable_length=cable.length,
        instrument_impedance=probe.instrument_impedance,
        rise_time=None if probe.rise_time is None else 1e-9 * probe.rise_time,
    )  # fmt: skip


def _impedance(probe: WaveformProbeBody) -> float | None:
    """Of the rods in air, as given or from their geometry."""
    rods = probe.rods
    if probe.probe_impedance is not None or rods is None:
        return probe.probe_impedance
    if rods.spacing <= rods.diameter:
        detail = "spacing is from axis to axis: it must exceed the diameter"
        raise ParameterError("probe", [Complaint("spacing", detail, ("probe", "rods", "spacing"))])
    made = two_rod_impedance if rods.count == 2 else three_rod_impedance
    return made(rods.spacing, rods.diameter)


def _head(probe: WaveformProbeBody) -> Head | None:
    if probe.head is None:
        return None
    index = float(np.sqrt(probe.head.permittivity))
    return Head(probe.head.impedance / index, probe.head.length * index / speed_of_light)
