"""Many traces by travel time: permittivity from their ends, conductivity from late levels."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from models.flags import BIT, Flags
from models.reflection.tdr.agreement import Begins, begins_of
from models.reflection.tdr.apparent import apparent_permittivity
from models.reflection.tdr.bench import Bench, Record
from models.reflection.tdr.circuit import circuit, early_level_u
from models.reflection.tdr.late_level import DRIFT, LateLevel, bulk_conductivity, late_level
from models.reflection.tdr.markers import first_rise, rod_start
from models.reflection.tdr.record import Traces
from models.reflection.tdr.smoothing import following_widths, smooth, step_u
from models.reflection.tdr.travel_time import Timing, find, plain_timing
from models.reflection.tdr.unsettled import Ends, unsettled
from models.reflection.tdr.whole.identification import Identified
from models.relation import Array

CONDUCTIVE_GATE = 2.0
"""S/m: no soil conducts more."""
SHORTED = -0.95
"""Late level below which 1.3 ohm or less end the line: no soil, but a short."""
CONTRADICTS, CLEARLY = 5.0, 0.25
"""Standard uncertainties, and share of the larger, by which two conductivities contradict."""
TOGETHER = 1e-9
"""s, to which the first reflection is told where the age of a level depends on it."""
UNSEEN_OFFSET_U = 0.25
"""Of a rise: standard uncertainty of the beginning of the rods where the trace itself shows it."""


@dataclass(frozen=True, slots=True, eq=False)
class Measured:
    """One row per trace; SI, NaN where the flags say why there is no number."""

    columns: Mapping[str, Array]
    """Quantities of the vocabulary, each with ``_u`` and ``_u_shared`` where it has them."""
    figures: Mapping[str, Array]
    """Times, levels and quality figures: what the numbers were read from."""
    flags: Flags
    begins: Begins
    """How the traces begin."""
    details: tuple[Mapping[str, object], ...] = field(default=())
    """Of a whole-trace inversion, trace by trace: parameters and covariance; empty: none."""
    contradicted: NDArray[np.bool_] | None = None
    """Traces whose long record tells another conductivity; None: not looked at."""


Known = Callable[[], Identified | None]
"""Gives the system behind the probe, if calibration traces tell it."""


def by_travel_time(record: Record, bench: Bench, known: Known | None) -> Measured:
    """Apparent permittivity, effective frequency and bulk conductivity of many traces at once.

    known: None: the probe constant is taken as described.
    """
    columns, figures = times_of(record.trace, bench)
    flags = np.zeros(record.trace.count, dtype=np.uint64)
    flags[np.isnan(columns["apparent_permittivity"])] |= BIT["no-end-reflection"]
    ends = Ends(figures["end_by_steepest_slope"], columns["travel_time"],
                np.sqrt(columns["apparent_permittivity"]))  # fmt: skip
    begins = begins_of(record.trace, bench.begin)
    more, level = conductivity(record, bench, known, flags, begins, ends)
    lost = (flags & BIT["no-end-reflection"]) > 0
    for name in columns:
        columns[name] = np.where(lost, np.nan, columns[name])
    unlike = None
    if record.late is not None:
        alone, _ = conductivity(Record(record.trace), bench, known, flags.copy(), begins, ends)
        unlike = _apart(more, alone)
    return Measured(columns | more, figures | level, flags, begins, contradicted=unlike)


def _apart(one: Mapping[str, Array], other: Mapping[str, Array]) -> NDArray[np.bool_]:
    """Where two conductivities of a trace are certainly and clearly not the same."""
    values, widths = ([part[f"bulk_conductivity{end}"] for part in (one, other)]
                      for end in ("", "_u"))  # fmt: skip
    apart = np.abs(values[0] - values[1])
    return (apart > CONTRADICTS * np.hypot(*widths)) & (apart > CLEARLY * np.fmax(*values))


def times_of(trace: Traces, bench: Bench) -> tuple[dict[str, Array], dict[str, Array]]:
    """Columns that follow from times, and figures: what these were read from."""
    if bench.timing is not None:
        return _by_times(trace, bench.timing)
    rows = [trace.rows(np.array([row])) for row in range(trace.count)]
    told = [_by_times(row, _shown_by(row, bench)) for row in rows]
    columns, figures = (
        {name: np.concatenate([part[k][name] for part in told]) for name in told[0][k]}
        for k in (0, 1)
    )
    return columns, figures


def _shown_by(trace: Traces, bench: Bench) -> Timing:
    """Timing of rods whose beginning a trace shows itself: where the slope turns after the head."""
    smoothed = smooth(trace, int(following_widths(trace)[0]))
    start = first_rise(trace, smoothed)
    begin = rod_start(trace, smoothed, start)
    offset = float(begin.steepest[0] - start.steepest[0])
    u = float(np.hypot(begin.steepest_u[0], UNSEEN_OFFSET_U * start.rise[0]))
    return plain_timing(bench.length, bench.probe.length_u, offset, u, smoothed.width)


def _by_times(trace: Traces, timing: Timing) -> tuple[dict[str, Array], dict[str, Array]]:
    """Columns and figures of traces with one timing."""
    found = find(trace, timing)
    told = apparent_permittivity(found, timing)
    lost = np.where(told.refused, np.nan, 0.0)
    columns = {
        "apparent_permittivity": told.value,
        "apparent_permittivity_u": told.standard_uncertainty,
        "apparent_permittivity_u_shared": told.shared,
        "frequency": told.frequency,
        "frequency_u": told.frequency_u,
        "travel_time": told.travel_time,
    }
    figures = {
        "start_by_tangents": found.start.tangent,
        "start_by_steepest_slope": found.start.steepest,
        "end_by_tangents": found.end.tangent + lost,
        "end_by_steepest_slope": found.end.steepest + lost,
        "permittivity_by_tangents": told.by_tangents,
        "permittivity_by_steepest_slope": told.by_steepest,
        "rise_time": found.end.rise + lost,
        "expected_rise_time": told.expected_rise,
        "signal_to_noise": found.end.signal + lost,
        "smoothing": found.width,
        "noise": found.noise,
    }
    return columns, figures


def conductivity(
    record: Record, bench: Bench, known: Known | None, flags: Flags, begins: Begins,
    ends: Ends | None = None,
) -> tuple[dict[str, Array], dict[str, Array]]:  # fmt: skip
    """Bulk conductivity and the late levels it was read from; flags are set in place.

    begins: of the traces. ends: where the trace itself tells the level, what
    is still to come of its reflections.
    """
    level, system = _settled_level(record), known() if known is not None else None
    strange, arrivals = begins.strange, begins.time
    if bench.begin is not None:
        arrivals = np.full(arrivals.size, bench.begin.time)
    arrivals = np.nan_to_num(np.round(arrivals / TOGETHER) * TOGETHER)
    value, total, shared = (np.full(level.value.size, np.nan) for _ in range(3))
    coming = np.zeros(level.value.size)
    shorted = level.value < SHORTED
    for begin, arrival in np.unique(np.column_stack([level.from_time, arrivals]), axis=0).tolist():
        rows = np.flatnonzero((level.from_time == begin) & (arrivals == arrival))
        early = arrival if record.late is None else None
        between = circuit(bench, begin, system, early)
        if between is None:
            continue
        found = bulk_conductivity(level.value[rows], level.standard_uncertainty[rows], between)
        shorted[rows] |= np.isnan(found.value)
        if early is not None:
            if ends is not None:
                coming[rows] = unsettled(record.trace.rows(rows), ends.rows(rows), found.value,
                                         between, bench.length)  # fmt: skip
            more = np.hypot(early_level_u(begin, arrival), coming[rows])
            level_u = np.hypot(level.standard_uncertainty[rows], more)
            found = bulk_conductivity(level.value[rows], level_u, between)
        value[rows], total[rows], shared[rows] = (
            found.value, found.standard_uncertainty, found.shared)  # fmt: skip
    impossible = (value > CONDUCTIVE_GATE) | (shorted & np.isfinite(level.value))
    flags[impossible] |= BIT["out-of-gate:bulk_conductivity"]
    flags[~level.settled | (coming > DRIFT)] |= BIT["record-too-short"]
    flags[strange | shorted] |= BIT["no-end-reflection"]
    lost = np.where(impossible | strange, np.nan, 0.0)
    columns = {
        "bulk_conductivity": value + lost,
        "bulk_conductivity_u": total + lost,
        "bulk_conductivity_u_shared": shared + lost,
    }
    return columns, _of_level(level)


def _settled_level(record: Record) -> LateLevel:
    """Late levels; a long record that shows no step is written in those of its trace."""
    level = late_level(record.settled)
    if record.late is None:
        return level
    unseen = np.where(step_u(record.late) > 0.0, 0.0, step_u(record.trace))
    return replace(level, standard_uncertainty=np.hypot(level.standard_uncertainty, unseen))


def _of_level(level: LateLevel) -> dict[str, Array]:
    return {
        "late_level": level.value,
        "late_level_u": level.standard_uncertainty,
        "late_level_from": level.from_time,
    }
