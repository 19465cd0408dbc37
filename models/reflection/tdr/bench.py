"""What is known of a probe before it measures: by description, by calibration traces, or both."""

from dataclasses import dataclass, field, replace

import numpy as np

from models.errors import Complaint, ParameterError
from models.reflection.tdr.agreement import Begin, begin_of, refuse_lengths, refuse_levels
from models.reflection.tdr.calibration import USUAL_OFFSET, calibrate, rise_of
from models.reflection.tdr.late_level import Known, late_level
from models.reflection.tdr.probe import RISE_OVER_SPREAD, Cable, Head, Rods, System
from models.reflection.tdr.record import Traces
from models.reflection.tdr.smoothing import noise_of
from models.reflection.tdr.travel_time import Timing, plain_timing
from models.reflection.tdr.whole.experiment import Experiment
from models.reflection.tdr.whole.identification import Identified, identify
from models.reflection.tdr.whole.line import OPEN, SHORT
from models.reflection.tdr.whole.response import grid

USUAL_HEAD_IMPEDANCE, USUAL_ROD_IMPEDANCE = 100.0, 180.0
"""ohm, where a search begins that nobody said better."""
USUAL_RESISTANCE, USUAL_SKIN, USUAL_SPEED = 0.05, 1e-4, 2e8
"""ohm/m, ohm s^0.5/m and m/s of thin coaxial cable, there and back."""
DESCRIBED_U = 0.005
"""Relative standard uncertainty of the numbers of a description."""
SHARPEST = 0.6
"""Of the spread a trace shows: how sharp a step the grid of the whole trace must carry."""


@dataclass(frozen=True, slots=True, eq=False)
class Record:
    """A trace, and where there is one the long record of the same medium."""

    trace: Traces
    late: Traces | None = None

    @property
    def settled(self) -> Traces:
        """Where the late level is read."""
        return self.trace if self.late is None else self.late


@dataclass(frozen=True, slots=True, kw_only=True)
class Description:
    """What a caller says of a probe; SI, None: not said."""

    length: float | None = None
    length_u: float = 0.0
    impedance: float | None = None
    """ohm, of the rods in air"""
    constant: Known | None = None
    offset: float | None = None
    """s, two-way, from the first rise to the rods"""
    offset_u: float = 0.0
    series_resistance: Known | None = None
    head: Head | None = None
    cable: Cable = field(default_factory=Cable)
    cable_length: float | None = None
    """m"""
    instrument_impedance: float = 50.0
    rise_time: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Calibration:
    """Traces of the same probe, cable and instrument in known media."""

    air: Record | None = None
    water: Record | None = None
    short: Record | None = None
    water_temperature: float = np.nan
    water_temperature_u: float = 0.0


@dataclass(frozen=True, slots=True, eq=False)
class Bench:
    """A probe, ready to measure."""

    probe: Description
    calibration: Calibration
    timing: Timing | None
    """None: each trace must show by itself where the rods begin."""
    begin: Begin | None = None
    """How traces of this line begin, where calibration shows it."""

    @property
    def length(self) -> float:
        """Of the rods, m; by default the mean effective length of the calibration."""
        if self.probe.length is None:
            raise ParameterError("probe", [_lacking("probe_length")])
        return self.probe.length


def prepare(probe: Description, calibration: Calibration) -> Bench:
    """Find what calibration traces tell about times.

    Raises ParameterError when neither they nor the description say how times become permittivity,
    or when a calibration trace shows no end reflection or contradicts the others.
    """
    if probe.length is None:
        raise ParameterError("probe", [_lacking("probe_length")])
    offset = probe.offset
    if offset is None and probe.head is not None:
        offset = 2.0 * probe.head.delay
    air, water, short = calibration.air, calibration.water, calibration.short
    refuse_levels(None if air is None else air.settled, None if short is None else short.settled,
                  long=air is not None and air.late is not None)  # fmt: skip
    timing: Timing | None = None
    if air is not None and water is not None:
        found = calibrate(
            air.trace,
            water.trace,
            length=probe.length,
            temperature=calibration.water_temperature,
            temperature_u=calibration.water_temperature_u,
            offset=offset,
        )
        refuse_lengths(found, probe.length)
        timing = found
    elif offset is not None:
        timing = plain_timing(probe.length, probe.length_u, offset, probe.offset_u)
    begin = begin_of(*(None if one is None else one.trace for one in (air, water, short)))
    return Bench(probe, calibration, timing, begin)


def cable_of(probe: Description, delay: float) -> Cable:
    """The described cable, with what is usual where it says nothing of its resistance."""
    length = probe.cable_length if probe.cable_length is not None else delay * USUAL_SPEED
    cable = replace(probe.cable, delay=delay)
    if not cable.resistance:
        cable = replace(cable, resistance=USUAL_RESISTANCE * length)
    if not cable.skin_resistance:
        cable = replace(cable, skin_resistance=USUAL_SKIN * length)
    return cable


def guess(bench: Bench, arrival: float, rise: float) -> System:
    """A system to start from. arrival: s, two-way, of the first rise. rise: s, 10 to 90 %."""
    probe = bench.probe
    head = probe.head
    if head is None:
        offset = USUAL_OFFSET if bench.timing is None else bench.timing.offset[1]
        offset = min(max(offset, 0.1e-9), 1.5e-9)
        head = Head(USUAL_HEAD_IMPEDANCE, 0.5 * offset)
    return System(
        Rods(bench.length, probe.impedance or USUAL_ROD_IMPEDANCE),
        head,
        cable_of(probe, 0.5 * arrival),
        probe.instrument_impedance,
        (probe.rise_time or 0.9 * rise) / RISE_OVER_SPREAD,
    )


def experiment(record: Record, row: int, spread: float, end: float = OPEN) -> Experiment:
    """One trace as the line model takes it. spread: s, of the step's slope."""
    trace = record.trace
    late = None
    if record.late is not None:
        level = late_level(record.late)
        middle = 0.5 * (float(level.from_time[row]) + record.late.end)
        late = (float(level.value[row]), float(level.standard_uncertainty[row]), middle)
    return Experiment(
        trace.rho[row],
        float(noise_of(trace)[row]),
        grid(trace.start, trace.step, trace.points, SHARPEST * spread),
        late,
        end,
    )


def identified(bench: Bench) -> Identified:
    """The system from calibration traces.

    Raises ParameterError when there are none in air and water, or no first reflection is in them.
    """
    air, water, short = bench.calibration.air, bench.calibration.water, bench.calibration.short
    if air is None or water is None:
        raise ParameterError("calibration", [_lacking("air", "calibration"),
                                             _lacking("water", "calibration")])  # fmt: skip
    arrival, rise = rise_of((air.trace, water.trace))
    if np.isnan(arrival):
        detail = "neither the air nor the water trace shows a first reflection above its noise"
        raise ParameterError("calibration", [Complaint("air", detail, ("calibration", "air"))])
    system = guess(bench, arrival, rise)
    return identify(
        system,
        experiment(air, 0, system.spread),
        experiment(water, 0, system.spread),
        bench.calibration.water_temperature,
        None if short is None else experiment(short, 0, system.spread, SHORT),
    )


def _lacking(name: str, section: str = "probe") -> Complaint:
    return Complaint(name, f"{name} is missing", (section, name))
