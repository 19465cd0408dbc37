"""From checked waveforms to one measurement for all of them, in the order they came."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.flags import Flags
from models.reflection.tdr.bench import Bench
from models.reflection.tdr.invert_traces import FREQUENCY, by_whole_trace, system_behind
from models.reflection.tdr.measure import Known, Measured, by_travel_time
from models.reflection.tdr.whole.identification import Identified
from models.relation import Array
from service.errors import Unprocessable
from service.faults import Fault
from service.waveforms.bodies import MOST_INVERTED, MOST_WAVEFORMS, WaveformSettings
from service.waveforms.question import Group

WHOLE = "whole-trace"
OF_WHOLE = ("frequency", "relaxations", "inserted_length")
"""Settings that mean something for a whole trace only."""


@dataclass(frozen=True, slots=True, eq=False)
class Answered:
    """One row per waveform, SI; and what was known of the probe."""

    columns: Mapping[str, Array]
    figures: Mapping[str, Array]
    flags: Flags
    details: Mapping[int, Mapping[str, object]]
    """Of a whole-trace inversion, by place."""
    bench: Bench
    system: Identified | None
    """The line behind the probe, where it was worked out."""
    strange: NDArray[np.bool_]
    """Waveforms that do not begin as the calibration traces do."""


def refuse_many(count: int, settings: WaveformSettings, place: str) -> None:
    """Refuse more waveforms than one request may hold, and settings of the other method."""
    most = MOST_INVERTED if settings.method == WHOLE else MOST_WAVEFORMS
    if not 0 < count <= most:
        detail = f"expected 1 to {most} waveforms by {settings.method}, found {count}"
        raise Unprocessable(detail, [Fault(detail, place)])
    stray = [name for name in OF_WHOLE if getattr(settings, name) is not None]
    stray += ["sections"] if settings.sections != 1 else []
    if stray and settings.method != WHOLE:
        faults = [Fault(f"{name} is for whole-trace: say method", f"#/{name}") for name in stray]
        raise Unprocessable("the request mixes two methods", faults)
    length, inserted = settings.probe.probe_length, settings.inserted_length
    if inserted is not None and inserted > length:
        detail = f"inserted_length is {inserted:g}, longer than the rods of {length:g} m"
        detail += f"; in mm? send {inserted / 1e3:g}" if inserted / 1e3 <= length else ""
        raise Unprocessable(detail, [Fault(detail, "#/inserted_length")])


def measured(
    groups: Sequence[Group], count: int, settings: WaveformSettings, bench: Bench
) -> Answered:
    """Every group measured, put back into the order of the request.

    Raises ModelError where the method lacks what it needs.
    """
    known = system_behind(bench)
    kept: list[Identified | None] = []

    def asked() -> Identified | None:
        kept.append(known())
        return kept[-1]

    columns: dict[str, Array] = {}
    figures: dict[str, Array] = {}
    flags, strange = np.zeros(count, dtype=np.uint64), np.zeros(count, dtype=np.bool_)
    details: dict[int, Mapping[str, object]] = {}
    for group in groups:
        found = _group(group, settings, bench, asked)
        rows = np.asarray(group.places, dtype=np.intp)
        flags[rows], strange[rows] = found.flags, found.strange
        for total, part in ((columns, found.columns), (figures, found.figures)):
            for name, values in part.items():
                total.setdefault(name, np.full(count, np.nan))[rows] = values
        told = zip(group.places, found.details, strict=False)
        details |= {place: detail for place, detail in told if detail}
    return Answered(columns, figures, flags, details, bench, kept[-1] if kept else None, strange)


def _group(group: Group, settings: WaveformSettings, bench: Bench, known: Known) -> Measured:
    if settings.method != WHOLE:
        return by_travel_time(group.record, bench, known)
    return by_whole_trace(
        group.record,
        bench,
        known,
        frequency=settings.frequency or FREQUENCY,
        terms=settings.relaxations,
        sections=settings.sections,
        inserted=settings.inserted_length,
    )
