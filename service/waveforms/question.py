"""From the words of a request to traces and a bench in SI, with everything that is wrong."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any, TypeVar

import numpy as np
from pydantic import TypeAdapter, ValidationError
from scipy.constants import speed_of_light

from models.conversion import Units, to_si, unit_of
from models.errors import Complaint, ParameterError
from models.reflection.tdr.bench import Bench, Calibration, Description, Record, prepare
from models.reflection.tdr.doubts.axis import as_nanoseconds
from models.reflection.tdr.late_level import Known
from models.reflection.tdr.probe import (
    Cable,
    Head,
    three_rod_impedance,
    two_rod_impedance,
)
from models.reflection.tdr.record import Traces
from service.errors import Unprocessable
from service.faults import pointer, problems_of
from service.waveforms.bodies import (
    CalibrationBody,
    WaveformBody,
    WaveformProbeBody,
    WaveformSettings,
)
from service.waveforms.likely import refuse_unlikely
from service.waveforms.traces import Place, record_of

METRE = "m"
IN_NANOSECONDS = '; in ns the traces show the rods: send "axis_unit": "ns"'
Settings = TypeVar("Settings", bound=WaveformSettings)


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
    in_metres: bool
    """Whether their axis came in m."""


def groups_of(bodies: Mapping[int, WaveformBody], where: Mapping[int, Place]) -> list[Group]:
    """Waveforms sorted by axis, each group as one set of columns.

    bodies: by place in the request. where: the steps to each place in it.
    Raises ParameterError with the place of the first complaint.
    """
    sorted_out: dict[tuple[Any, ...], list[tuple[int, Record]]] = {}
    for place, body in bodies.items():
        record = record_of(body, where[place])
        late = None if record.late is None else _axis(record.late)
        key = (_axis(record.trace), late, body.axis_unit == METRE)
        sorted_out.setdefault(key, []).append((place, record))
    return [
        Group([place for place, _ in members], _stacked([record for _, record in members]), key[-1])
        for key, members in sorted_out.items()
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


def bench_of(settings: WaveformSettings, units: Units, place: Place = ()) -> Bench:
    """The probe and its calibration traces, ready to measure.

    Raises ParameterError with the place of what is wrong.
    """
    refuse_unlikely(settings, place)
    calibration, where = settings.calibration, (*place, "calibration")
    water = calibration.water
    warmth: dict[str, float] = {}
    if water is not None:
        given = {"temperature": water.temperature, "temperature_u": water.temperature_u}
        warmth = _warmth(given, units, (*where, "water"))
    found = Calibration(
        air=None if calibration.air is None else record_of(calibration.air, (*where, "air")),
        water=None if water is None else record_of(water, (*where, "water")),
        short=None if calibration.short is None else record_of(calibration.short,
                                                               (*where, "short")),
        water_temperature=warmth.get("temperature", np.nan),
        water_temperature_u=warmth.get("temperature_u", 0.0),
    )  # fmt: skip
    described = description_of(settings.probe, units)
    try:
        return prepare(described, found)
    except ParameterError as error:
        complaints = list(error.complaints)
        if _in_nanoseconds(described, found, calibration):
            complaints = [replace(c, detail=c.detail + IN_NANOSECONDS) for c in complaints]
        placed = [replace(c, place=(*map(str, place), *c.place)) for c in complaints]
        raise ParameterError("calibration", placed) from None


def _in_nanoseconds(probe: Description, found: Calibration, sent: CalibrationBody) -> bool:
    """Whether calibration traces that came on axes in m show the rods if these are in ns."""
    bodies = [one for one in (sent.air, sent.water, sent.short) if one is not None]
    if any(body.axis_unit != METRE for body in bodies):
        return False
    air, water, short = (None if one is None else as_nanoseconds(one)
                         for one in (found.air, found.water, found.short))  # fmt: skip
    try:
        prepare(probe, replace(found, air=air, water=water, short=short))
    except ParameterError:
        return False
    return True


def _warmth(given: Mapping[str, float], units: Units, place: Place) -> dict[str, float]:
    """Temperature of the water, Cel, and its uncertainty."""
    try:
        return to_si("water", given, units)
    except ParameterError as error:
        complaints = [replace(c, place=(*map(str, place), c.name)) for c in error.complaints]
        raise ParameterError("calibration", complaints) from None


def in_hertz(settings: Settings, units: Units) -> Settings:
    """The settings with their frequency in Hz."""
    if settings.frequency is None:
        return settings
    hertz = float(unit_of("frequency", units).to_si(settings.frequency))
    return settings.model_copy(update={"frequency": hertz})


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
