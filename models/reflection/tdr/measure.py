"""Many traces by travel time: permittivity from the end reflection, conductivity from late levels."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

import numpy as np

from models.flags import BIT, Flags
from models.reflection.tdr.apparent import ApparentPermittivity, apparent_permittivity
from models.reflection.tdr.bench import Bench, Record, circuit
from models.reflection.tdr.identification import Identified
from models.reflection.tdr.late_level import LateLevel, bulk_conductivity, late_level
from models.reflection.tdr.markers import rod_start
from models.reflection.tdr.smoothing import following_widths, smooth
from models.reflection.tdr.travel_time import Arrivals, Timing, find, plain_timing
from models.relation import Array

CONDUCTIVE_GATE = 2.0
"""S/m: no soil conducts more."""
UNSEEN_OFFSET_U = 0.1
"""Of a rise: standard uncertainty of the beginning of the rods where the trace itself shows it."""


@dataclass(frozen=True, slots=True, eq=False)
class Measured:
    """One row per trace; SI, NaN where the flags say why there is no number."""

    columns: Mapping[str, Array]
    """Quantities of the vocabulary, each with ``_u`` and ``_u_shared`` where it has them."""
    figures: Mapping[str, Array]
    """Times, levels and quality figures: what the numbers were read from."""
    flags: Flags
    details: tuple[Mapping[str, object], ...] = field(default=())
    """Of a whole-trace inversion, trace by trace: parameters and covariance."""


Known = Callable[[], Identified | None]
"""Gives the system behind the probe, if calibration traces tell it; asked only where needed."""


def by_travel_time(record: Record, bench: Bench, known: Known) -> Measured:
    """Apparent permittivity, effective frequency and bulk conductivity of many traces at once."""
    found, apparent = _times(record, bench)
    flags = np.zeros(record.trace.count, dtype=np.uint64)
    flags[np.isnan(apparent.value)] |= BIT["no-end-reflection"]
    columns, figures = _of_times(found, apparent)
    more, level = conductivity(record, bench, known, flags)
    return Measured(columns | more, figures | level, flags)


def _times(record: Record, bench: Bench) -> tuple[Arrivals, ApparentPermittivity]:
    if bench.timing is not None:
        found = find(record.trace, bench.timing)
        return found, apparent_permittivity(found, bench.timing)
    arrivals, values = [], []
    for row in range(record.trace.count):
        one = record.trace.rows(np.array([row]))
        timing = _shown_by(one, bench)
        arrivals.append(find(one, timing))
        values.append(apparent_permittivity(arrivals[-1], timing))
    return _joined(arrivals), _joined_values(values)


def _shown_by(trace: "Record.trace", bench: Bench) -> Timing:
    raise AssertionError


def conductivity(
    record: Record, bench: Bench, known: Known, flags: Flags
) -> tuple[dict[str, Array], dict[str, Array]]:
    """Bulk conductivity and the late levels it was read from; flags are set in place."""
    level = late_level(record.settled)
    value, total, shared = (np.full(level.value.size, np.nan) for _ in range(3))
    for begin in np.unique(level.from_time):
        rows = np.flatnonzero(level.from_time == begin)
        between = circuit(bench, float(begin), None)
        if between is None:
            between = circuit(bench, float(begin), known())
        if between is None:
            continue
        found = bulk_conductivity(level.value[rows], level.standard_uncertainty[rows], between)
        value[rows], total[rows] = found.value, found.standard_uncertainty
        shared[rows] = found.shared
    impossible = value > CONDUCTIVE_GATE
    flags[impossible] |= BIT["out-of-gate:bulk_conductivity"]
    flags[~level.settled] |= BIT["record-too-short"]
    lost = np.where(impossible, np.nan, 0.0)
    columns = {
        "bulk_conductivity": value + lost,
        "bulk_conductivity_u": total + lost,
        "bulk_conductivity_u_shared": shared + lost,
    }
    return columns, _of_level(level)
