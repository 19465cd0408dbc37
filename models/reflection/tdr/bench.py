"""What is known of a probe before it measures: by description, by calibration traces, or both."""

from dataclasses import dataclass, field, replace

import numpy as np

from models.errors import Complaint, ParameterError
from models.reflection.tdr.calibration import USUAL_OFFSET, calibrate, rise_of
from models.reflection.tdr.late_level import (
    Circuit,
    Known,
    late_level,
    level_after,
    resistance,
)
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
SERIES_SHARE_U = 0.5
"""Relative standard uncertainty of a series resistance that was not measured with a short."""
SHORT_U = 0.1
"""Relative standard uncertainty of one that was: at late times current still sinks into the
conductors, and not in the same way before a short as before a soil."""
UNKNOWN_SERIES = Known(0.3, 0.3)
"""ohm, of a cable nobody says anything of: some metres, and its contacts."""
OPEN_U = 2e-3
"""Of the level of an open line, where no trace in air says it."""
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

    @property
    def length(self) -> float:
        """Of the rods, m; by default the mean effective length of the calibration."""
        if self.probe.length is None:
            raise ParameterError("probe", [_lacking("probe_length")])
        return self.probe.length


def prepare(probe: Description, calibration: Calibration) -> Bench:
    """Find what calibration traces tell about times.

    Raises ParameterError when neither they nor the description say how times become permittivity,
    or when a calibration trace shows no end reflection.
    """
    if probe.length is None:
        raise ParameterError("probe", [_lacking("probe_length")])
    offset = probe.offset
    if offset is None and probe.head is not None:
        offset = 2.0 * probe.head.delay
    air, water = calibration.air, calibration.water
    if air is not None and water is not None:
        timing: Timing | None = calibrate(
            air.trace,
            water.trace,
            length=probe.length,
            temperature=calibration.water_temperature,
            temperature_u=calibration.water_temperature_u,
            offset=offset,
        )
    elif offset is not None:
        timing = plain_timing(probe.length, probe.length_u, offset, probe.offset_u)
    else:
        timing = None
    return Bench(probe, calibration, timing)


def circuit(bench: Bench, from_time: float, known: Identified | None) -> Circuit | None:
    """What stands between a late level, read from a two-way time on, and the conductivity.

    None where nothing says the probe constant.
    """
    probe, calibration = bench.probe, bench.calibration
    constant = probe.constant
    if constant is None and probe.impedance is not None:
        relative = probe.length_u / bench.length
        value = Rods(bench.length, probe.impedance).constant
        constant = Known(value, value * relative)
    if constant is None and known is not None:
        constant = _identified_constant(known)
    if constant is None:
        return None
    open_level = Known(1.0, OPEN_U)
    if calibration.air is not None:
        open_level = Known(*level_after(calibration.air.settled, from_time))
    return Circuit(
        constant, _series(bench, from_time, open_level), open_level, probe.instrument_impedance
    )


def _series(bench: Bench, from_time: float, open_level: Known) -> Known:
    """Series resistance: stated, from a short at the same late time, or usual for the cable."""
    probe, short = bench.probe, bench.calibration.short
    if probe.series_resistance is not None:
        return probe.series_resistance
    if short is not None:
        level, level_u = level_after(short.settled, from_time)
        value = resistance(level, open_level.value, probe.instrument_impedance)
        noise = 0.5 * probe.instrument_impedance * level_u
        return Known(value, float(np.hypot(noise, SHORT_U * value)))
    if probe.cable_length is None:
        return UNKNOWN_SERIES
    cable = _cable(probe, 0.0)
    return Known(cable.resistance, SERIES_SHARE_U * cable.resistance)


def _identified_constant(known: Identified) -> Known:
    value = known.system.rods.constant
    spread = known.covariance[-2:, -2:]
    relative = float(np.sqrt(max(spread[0, 0] + spread[1, 1] - 2 * spread[0, 1], 0.0)))
    return Known(value, value * relative)


def _cable(probe: Description, delay: float) -> Cable:
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
        _cable(probe, 0.5 * arrival),
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

    Raises ParameterError when there are none in air and water.
    """
    air, water, short = bench.calibration.air, bench.calibration.water, bench.calibration.short
    if air is None or water is None:
        raise ParameterError("calibration", [_lacking("air", "calibration"),
                                             _lacking("water", "calibration")])  # fmt: skip
    arrival, rise = rise_of((air.trace, water.trace))
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
