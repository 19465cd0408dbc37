"""From checked waveforms to one measurement for all of them, in the order they came."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.flags import BIT, Flags
from models.reflection.tdr.agreement import Begins
from models.reflection.tdr.bench import Bench, Record
from models.reflection.tdr.doubts.axis import in_nanoseconds
from models.reflection.tdr.doubts.clipping import clipped
from models.reflection.tdr.invert_traces import FREQUENCY, by_whole_trace, system_behind
from models.reflection.tdr.measure import Known, Measured, by_travel_time
from models.reflection.tdr.whole.identification import Identified
from models.relation import Array
from service.errors import Unprocessable
from service.faults import Fault
from service.waveforms.bodies import MOST_INVERTED, MOST_WAVEFORMS, WaveformSettings
from service.waveforms.question import Group

WHOLE = "whole-trace"
DOUBTS = ("no-steps", "axis-unit-suspected", "waveform-clipped", "long-record-contradicted")
"""Advisories about single waveforms."""
MOST_DOUBTED = 20
"""Of the waveforms of one group without an end, so many are looked at on another axis."""
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
    begins: Begins
    """How the waveforms begin."""
    doubted: Mapping[str, NDArray[np.bool_]]
    """By the advisory that says why: which waveforms."""
    whole: bool
    """Whether whole traces were inverted."""


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
    flags = np.zeros(count, dtype=np.uint64)
    doubted = {code: np.zeros(count, dtype=np.bool_) for code in DOUBTS}
    begins = Begins(*(np.full(count, np.nan) for _ in range(2)),
                    *(np.zeros(count, dtype=np.bool_) for _ in range(2)))  # fmt: skip
    details: dict[int, Mapping[str, object]] = {}
    for group in groups:
        found = _group(group, settings, bench, asked)
        rows = np.asarray(group.places, dtype=np.intp)
        flags[rows] = found.flags
        for name in Begins.__slots__:
            getattr(begins, name)[rows] = getattr(found.begins, name)
        for code, which in _doubts(group, found, bench).items():
            doubted[code][rows[which]] = True
        for total, part in ((columns, found.columns), (figures, found.figures)):
            for name, values in part.items():
                total.setdefault(name, np.full(count, np.nan))[rows] = values
        told = zip(group.places, found.details, strict=False)
        details |= {place: detail for place, detail in told if detail}
    return Answered(columns, figures, flags, details, bench, kept[-1] if kept else None,
                    begins, doubted, settings.method == WHOLE)  # fmt: skip


def _doubts(group: Group, found: Measured, bench: Bench) -> Mapping[str, NDArray[np.intp]]:
    """Rows of a group by the advisory that they give rise to."""
    stepless = found.begins.stepless & (bench.begin is None)
    contradicted = found.contradicted
    return {
        "no-steps": np.flatnonzero(stepless),
        "axis-unit-suspected": _in_nanoseconds(group, found, bench),
        "waveform-clipped": np.flatnonzero(clipped(group.record.trace)),
        "long-record-contradicted": np.flatnonzero(False if contradicted is None else contradicted),
    }


def _in_nanoseconds(group: Group, found: Measured, bench: Bench) -> NDArray[np.intp]:
    """Rows of a group that show rods if their axis in m is one in ns; of the first without any."""
    calibrated = bench.calibration.air is not None and bench.calibration.water is not None
    nowhere = (found.flags & BIT["no-end-reflection"]) != 0
    lost = np.flatnonzero(nowhere & ~found.begins.stepless)[:MOST_DOUBTED]
    if calibrated or not group.in_metres or not lost.size:
        return lost[:0]
    lacking = Record(group.record.trace.rows(lost))
    return lost[in_nanoseconds(lacking, bench)]


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
