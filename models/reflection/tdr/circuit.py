"""What stands between a late level and the conductivity: probe constant, cable, open level."""

from functools import lru_cache

import numpy as np

from models.reflection.tdr.agreement import first_edge
from models.reflection.tdr.bench import USUAL_SKIN, USUAL_SPEED, Bench, Record, cable_of
from models.reflection.tdr.late_level import Circuit, Known, level_after, resistance
from models.reflection.tdr.probe import Rods
from models.reflection.tdr.whole.identification import Identified

SERIES_SHARE_U = 0.5
"""Relative standard uncertainty of a series resistance that was not measured with a short."""
SHORT_U = 0.1
"""Relative standard uncertainty of one that was: at late times current still sinks into the
conductors, and not in the same way before a short as before a soil."""
EARLY = 2e-7
"""s after the first reflection: before, most of what a short shows is this sinking in."""
EARLY_SHORT_U = 0.6
"""The same as SHORT_U before that: a rectangle from nothing to twice the value."""
EARLY_SKIN_U = 0.6
"""Of the resistance that the usual cable has at such a time beyond that to direct current: the same
rectangle, where the resistance is not from a short."""
SHORTEST_CABLE = 1.0
"""m, where the axis begins at the probe and does not show it."""
UNKNOWN_SERIES = Known(0.3, 0.3)
"""ohm, of a cable nobody says anything of: some metres, and its contacts."""
OPEN_U = 2e-3
"""Of the level of an open line, where no trace in air says it."""
CONSTANTS_APART, CERTAIN = 0.1, 3.0
"""Share of a probe constant, and standard uncertainties, by which a stated one may differ from that
of the calibration traces."""
EARLY_LEVEL_U = 5e-3
"""Of a level read before EARLY: simulated lines in air are so far from the level that they settle
at, after their reflections have died away."""


def circuit(
    bench: Bench, from_time: float, known: Identified | None, arrival: float | None = None
) -> Circuit | None:
    """What stands between a late level, read from a two-way time on, and the conductivity.

    arrival: s, of the first reflection, where the level was read from the trace itself; None: from
    a long record. None where nothing says the probe constant.
    """
    probe, calibration = bench.probe, bench.calibration
    constant = stated_constant(bench)
    if constant is None and known is not None:
        constant = _identified_constant(known)
    if constant is None:
        return None
    shown = contradicting_constant(bench, known)
    if shown is not None:
        apart = abs(constant.value - shown.value)
        constant = Known(constant.value, float(np.hypot(constant.standard_uncertainty, apart)))
    open_level = Known(1.0, OPEN_U)
    if calibration.air is not None:
        level, level_u = level_after(calibration.air.settled, from_time)
        early = EARLY_LEVEL_U if _is_early(calibration.air) else 0.0
        open_level = Known(level, float(np.hypot(level_u, early)))
    series = _series(bench, from_time, open_level, arrival)
    return Circuit(constant, series, open_level, probe.instrument_impedance)


def stated_constant(bench: Bench) -> Known | None:
    """The probe constant as described, or by the impedance of the rods; None: neither."""
    probe = bench.probe
    if probe.constant is not None or probe.impedance is None:
        return probe.constant
    value = Rods(bench.length, probe.impedance).constant
    return Known(value, value * probe.length_u / bench.length)


def contradicting_constant(bench: Bench, known: Identified | None) -> Known | None:
    """The probe constant that traces in air and in water tell, where it is not the stated one.

    None: nothing is stated, or known, or both agree. What lies between them is then not known.
    """
    stated = stated_constant(bench)
    air, water = bench.calibration.air, bench.calibration.water
    if stated is None or known is None or air is None or water is None:
        return None
    shown = _identified_constant(known)
    u = float(np.hypot(stated.standard_uncertainty, shown.standard_uncertainty))
    agree = abs(stated.value - shown.value) <= max(CONSTANTS_APART * shown.value, CERTAIN * u)
    return None if agree else shown


def early_level_u(from_time: float, arrival: float) -> float:
    """Standard uncertainty of a level read from so early a time on, whatever its noise."""
    return EARLY_LEVEL_U if from_time - arrival < EARLY else 0.0


@lru_cache(maxsize=8)
def _is_early(record: Record) -> bool:
    """Whether a record ends before its cable has settled; kept, for every level of a bench asks."""
    settled = record.settled
    arrival = float(np.nan_to_num(np.mean(first_edge(record.trace).steepest)))
    return settled.end - arrival < EARLY


def _series(bench: Bench, from_time: float, open_level: Known, arrival: float | None) -> Known:
    """Series resistance: stated, from a short at the same time, or usual for the cable."""
    probe, short = bench.probe, bench.calibration.short
    if probe.series_resistance is None and short is not None:
        settled = short.settled if arrival is None else short.trace
        level, level_u = level_after(settled, from_time)
        value = resistance(level, open_level.value, probe.instrument_impedance)
        noise = 0.5 * probe.instrument_impedance * level_u
        early = arrival is not None and from_time - arrival < EARLY
        relative = EARLY_SHORT_U if early or _is_early(short) else SHORT_U
        return Known(value, float(np.hypot(noise, relative * value)))
    found = UNKNOWN_SERIES
    if probe.series_resistance is not None:
        found = probe.series_resistance
    elif probe.cable_length is not None:
        cable = cable_of(probe, 0.0)
        found = Known(cable.resistance, SERIES_SHARE_U * cable.resistance)
    if arrival is None or from_time - arrival >= EARLY:
        return found
    u = np.hypot(found.standard_uncertainty, _skin_u(bench, from_time, arrival))
    return Known(found.value, float(u))


def _skin_u(bench: Bench, from_time: float, arrival: float) -> float:
    """Of the resistance so soon after the first reflection, ohm: it falls as 1 / sqrt(pi t)."""
    length = bench.probe.cable_length or max(0.5 * arrival * USUAL_SPEED, SHORTEST_CABLE)
    skin = cable_of(bench.probe, length / USUAL_SPEED).skin_resistance or USUAL_SKIN * length
    since = max(from_time - arrival, 1e-9)
    return EARLY_SKIN_U * skin / float(np.sqrt(np.pi * since))


def _identified_constant(known: Identified) -> Known:
    value = known.system.rods.constant
    spread = known.covariance[-2:, -2:]
    relative = float(np.sqrt(max(spread[0, 0] + spread[1, 1] - 2 * spread[0, 1], 0.0)))
    return Known(value, value * relative)
