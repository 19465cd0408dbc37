"""Kept raw records as columns, by the code that reads those of a request for estimates.

A record that cannot be read takes nothing from the others: the reason is told for it alone.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import lru_cache
from typing import Any

import numpy as np
import orjson

from models.conversion import from_si
from models.errors import ModelError, ParameterError
from models.flags import Flags
from models.relation import Array
from service.errors import Unprocessable
from service.faults import Fault, pointer
from service.formats.raw_records import RAW_RECORDS, RawColumns
from service.spectra.reading import TAKEN as OF_SPECTRA
from service.stations.raw_settings import about_settings, in_own_unit
from service.stations.times import rfc3339
from service.store.append import unpacked
from service.sweeps.reading import TAKEN as OF_SWEEPS
from service.waveforms.measuring import WHOLE
from service.waveforms.reading import TAKEN as OF_WAVEFORMS

TAKEN: Mapping[str, Sequence[str]] = {
    "waveform": OF_WAVEFORMS, "reflection": OF_SWEEPS, "scattering": OF_SWEEPS,
    "spectrum": OF_SPECTRA,
}  # fmt: skip
"""Columns that a kind of raw record gives."""
TOGETHER = 200
"""Records that are read at a time, where the kind allows it."""
EFFORT = 5000
"""Of one answer: so many traces, or fewer records of a kind that takes longer."""
SPECTRUM, SEARCHED, WHOLE_TRACE, SWEPT = 100, 100, 20, 10
"""Effort of records that are fitted or searched for their roots, beside that of a trace."""
_SAID = ("advisories", "remarks")
_LACKING = {
    "waveform": "give the probe its probe_length, or raw_records.waveform with the probe and its "
    "calibration, as POST /v1/estimates takes it",
    "reflection": "give the probe raw_records.reflection with at_frequency and its standards",
    "scattering": "give the probe raw_records.scattering with at_frequency and its line",
}


@dataclass(slots=True)
class ReadRecords:
    """What raw records say, one row a record."""

    numbers: dict[str, Array]
    """In the unit of the API, NaN where there is none."""
    flags: Flags
    shared: dict[str, Array] = field(default_factory=dict)
    """By quantity, SI: the part of its uncertainty that records of one probe share."""
    failed: dict[int, str] = field(default_factory=dict)
    """Why records could not be read, by their place."""
    echoes: list[tuple[int, Mapping[str, Any]]] = field(default_factory=list)
    """What was said on the way, each with the place of the first record it is about."""

    def told(self, times: Sequence[int]) -> dict[str, Any]:
        """What was said, once: settings as used, advisories, and remarks with how often.

        times: of the records, in microseconds.
        """
        told: dict[str, Any] = {}
        advisories: dict[str, Any] = {}
        remarks: dict[bytes, dict[str, Any]] = {}
        for start, echo in self.echoes:
            rest = {name: said for name, said in echo.items() if name not in _SAID}
            told = rest | told
            for said in echo.get("advisories", ()):
                advisories.setdefault(said["text"], said)
            for remark in echo.get("remarks", ()):
                about = {name: said for name, said in remark.items() if name != "row"}
                first = rfc3339(times[start + remark["row"]])
                entry = {**about, "count": 0, "first": first}
                remarks.setdefault(orjson.dumps(about), entry)["count"] += 1
        return {
            **told,
            "remarks": list(remarks.values()),
            "advisories": list(advisories.values()),
        }


def effort_of(kind: str, settings: Any) -> int:
    """How much longer a record takes than a trace whose end is looked for."""
    stated = settings if isinstance(settings, dict) else {}
    if kind == "waveform":
        return WHOLE_TRACE if stated.get("method") == WHOLE else 1
    if kind == "spectrum":
        return SPECTRUM
    return SEARCHED if stated.get("kind") == "cell" else SWEPT


def read_records(kind: str, kept: Sequence[bytes], settings: Any) -> ReadRecords:
    """Kept records of one kind and one probe as columns.

    settings: of the probe, as a request for estimates holds them; None where it has none.
    """
    numbers = {name: np.full(len(kept), np.nan) for name in TAKEN.get(kind, ())}
    found = ReadRecords(numbers, np.zeros(len(kept), np.uint64))
    if kind not in RAW_RECORDS:
        found.failed = dict.fromkeys(range(len(kept)), f"no raw record is called {kind[:40]}")
    elif effort_of(kind, settings) > SWEPT:
        stated = orjson.dumps(settings, option=orjson.OPT_SORT_KEYS)
        for place, record in enumerate(kept):
            _put(found, place, _alone(kind, record, stated))
    else:
        for start in range(0, len(kept), TOGETHER):
            records = [unpacked(record)[kind] for record in kept[start : start + TOGETHER]]
            _read(found, kind, start, records, settings)
    return found


@lru_cache(maxsize=2000)
def _alone(kind: str, record: bytes, settings: bytes) -> RawColumns | str:
    """What a record says that takes long, or why it says nothing; the same record, the same."""
    return _columns(kind, [unpacked(record)[kind]], orjson.loads(settings))[0]


def _read(found: ReadRecords, kind: str, start: int, records: list[Any], settings: Any) -> None:
    """Read records together; where one is refused, halves of them, until it stands alone."""
    columns, shared = _columns(kind, records, settings)
    if isinstance(columns, RawColumns):
        _put(found, start, columns)
    elif shared or len(records) == 1:
        found.failed |= dict.fromkeys(range(start, start + len(records)), columns)
    else:
        half = len(records) // 2
        _read(found, kind, start, records[:half], settings)
        _read(found, kind, start + half, records[half:], settings)


def _columns(kind: str, records: list[Any], settings: Any) -> tuple[RawColumns | str, bool]:
    """The columns of records, or why there are none, and whether that holds for every record."""
    where = {place: ("readings", place, kind) for place in range(len(records))}
    try:
        read = RAW_RECORDS[kind](dict(enumerate(records)), len(records), where, settings, {})
    except (ModelError, Unprocessable) as error:
        return _reason(kind, error, settings)
    return read, False


def _reason(kind: str, error: ModelError | Unprocessable, settings: Any) -> tuple[str, bool]:
    faults: Sequence[Fault] = ()
    if isinstance(error, Unprocessable):
        faults = error.errors
    elif isinstance(error, ParameterError):
        faults = [Fault(c.detail, pointer(c.place)) for c in error.complaints]
    if settings is None and kind in _LACKING:
        return _LACKING[kind], True
    told = [f"{_place(fault)}{fault.detail}" for fault in faults[:3]]
    return in_own_unit("; ".join(told) or str(error)), bool(faults) and all(
        map(about_settings, faults)
    )


def _place(fault: Fault) -> str:
    """Where in the record, or in the settings of the probe."""
    steps = fault.pointer.removeprefix("#/").split("/")
    steps = steps if about_settings(fault) else steps[3:]
    return f"{'.'.join(steps)}: " if any(steps) else ""


def _put(found: ReadRecords, start: int, columns: RawColumns | str) -> None:
    if isinstance(columns, str):
        found.failed[start] = columns
        return
    rows = slice(start, start + len(columns.flags))
    found.flags[rows] = columns.flags
    for name, values in columns.numbers.items():
        found.numbers[name][rows] = from_si(name, values, {})
    for name, values in columns.shared.items():
        found.shared.setdefault(name, np.full(len(found.flags), np.nan))[rows] = values
    found.echoes.append((start, columns.echo))
