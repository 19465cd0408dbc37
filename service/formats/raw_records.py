"""Raw records as readings: each kind becomes columns of the vocabulary before the estimate.

A reading may carry a raw record under its key (``waveform``); what all of them have in common,
the probe and its calibration, stands once under ``raw_records`` in the request.
"""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import NDArray

from models.advisories import Advice, advise
from models.conversion import Units, from_si
from models.estimate.permittivity import SHARED
from models.flags import BIT, Flags
from models.quantity import QUANTITIES
from models.readings import Readings, quantity_of
from models.reflection.sweep_flags import SWEEP_FLAGS
from models.relation import Array
from service.errors import Unprocessable
from service.faults import Fault, hint, pointer, shown
from service.schemas.lengths import in_metres
from service.spectra.reading import columns_of_spectra
from service.sweeps.bodies import LENGTHS as OF_SWEEPS
from service.sweeps.reading import columns_of_reflections, columns_of_scattering
from service.waveforms.bodies import LENGTHS as OF_TRACES
from service.waveforms.reading import columns_of_waveforms

Place = tuple[int | str, ...]
LENGTHS: Mapping[str, frozenset[str]] = MappingProxyType({
    "waveform": OF_TRACES, "reflection": OF_SWEEPS, "scattering": OF_SWEEPS,
})  # fmt: skip
"""Lengths, by kind of raw record, that ``units`` may name beside the quantities."""
PERMITTIVITY = ("apparent_permittivity", "real_permittivity", "travel_time")
"""What a reading with a raw record does not carry beside it."""
SETTINGS = "raw_records"


@dataclass(frozen=True, slots=True, eq=False)
class RawColumns:
    """What raw records say, one row per reading; NaN where there is none."""

    numbers: Mapping[str, Array]
    """SI and Cel, by quantity or name_u."""
    flags: Flags
    echo: Mapping[str, Any] = field(default_factory=dict)
    """The settings as they were used."""
    shared: Mapping[str, Array] = field(default_factory=dict)
    """By quantity, SI: the part of its uncertainty that readings of one probe share."""


Reader = Callable[[Mapping[int, Any], int, Mapping[int, Place], Any, Units], RawColumns]
"""Columns from records by row, the number of rows, the steps to each record, the settings of the
request for this kind, and the caller's units. Raises ModelError or Unprocessable."""


def _reader(read: Callable[..., tuple[Any, ...]]) -> Reader:
    """A kind's own reader, its answer as one thing."""

    def columns(
        records: Mapping[int, Any], count: int, where: Mapping[int, Place], settings: Any,
        units: Units,
    ) -> RawColumns:  # fmt: skip
        return RawColumns(*read(records, count, where, settings, units))

    return columns


RAW_RECORDS: Mapping[str, Reader] = MappingProxyType({
    "waveform": _reader(columns_of_waveforms),
    "reflection": _reader(columns_of_reflections),
    "scattering": _reader(columns_of_scattering),
    "spectrum": _reader(columns_of_spectra),
})  # fmt: skip
"""Every kind of raw record a reading may carry, by its key."""


@dataclass(frozen=True, slots=True, eq=False)
class TakenIn:
    """What became of the raw records of a request."""

    flags: Flags | None = None
    told: tuple[str, ...] = ()
    """Columns that an answer repeats: what the records were turned into."""
    echo: Mapping[str, Any] = field(default_factory=dict)
    shared: Mapping[str, Array] = field(default_factory=dict)
    """As of RawColumns."""
    advice: tuple[Advice, ...] = ()
    """What was said of the records, and their own flags, each with the readings it is about."""

    def with_shared(self, readings: Readings) -> Readings:
        """The readings, with what those of one probe share."""
        known = {f"{name}{SHARED}": values for name, values in self.shared.items()
                 if name in readings.columns}  # fmt: skip
        return replace(readings, columns={**readings.columns, **known}) if known else readings

    def mark(self, flags: Flags) -> None:
        """Add the flags of the records to those of their readings, in place."""
        if self.flags is None:
            return
        flags |= self.flags
        for reason, missing in _UNSAID.items():
            flags[(self.flags & BIT[reason]) != 0] &= ~missing


_OF_TRACE = BIT["missing:apparent_permittivity"] | BIT["missing:frequency"]
_OF_SWEEP = BIT["missing:real_permittivity"] | BIT["missing:imaginary_permittivity"]
_UNSAID: Mapping[str, np.uint64] = MappingProxyType({
    "no-end-reflection": _OF_TRACE,
    **dict.fromkeys(("out-of-gate:real_permittivity", "no-solution", "no-permittivity"), _OF_SWEEP),
})  # fmt: skip
"""What is not missing from a row whose record says why it gives no number."""
MOST_NAMED = 5
"""Readings that an advisory names, of those it is about."""


def take_in(document: dict[str, Any]) -> TakenIn:
    """Replace the raw records of a request's readings by columns, in place.

    Raises ModelError or Unprocessable with the place of what cannot be used.
    """
    _put_in_metres(document)
    settings = document.pop(SETTINGS, {})
    readings = document.get("readings")
    if not isinstance(settings, dict):
        _refuse(f"expected an object, found {shown(settings)}", (SETTINGS,))
    for kind in settings:
        if kind not in RAW_RECORDS:
            known = ", ".join(RAW_RECORDS)
            _refuse(f"unknown key {shown(kind)}{hint(kind, RAW_RECORDS)}; known are {known}",
                    (SETTINGS, kind))  # fmt: skip
    units = document.get("units", {})
    units = units if isinstance(units, dict) else {}
    flags: Flags | None = None
    told: dict[str, None] = {}
    echo: dict[str, Any] = {}
    shared: dict[str, Array] = {}
    advice: list[Advice] = []
    for kind, reader in RAW_RECORDS.items():
        records, where, count = _pulled(readings, kind)
        if not records:
            if kind in settings:
                _refuse(f"no reading carries a {kind}", (SETTINGS, kind))
            continue
        found = reader(records, count, where, settings.get(kind), units)
        told |= dict.fromkeys(_put(readings, kind, records, found.numbers, units))
        flags = found.flags if flags is None else flags | found.flags
        echo[kind] = found.echo
        advice += _advice_of(found.echo, where)
        for name, values in found.shared.items():
            shared[name] = np.fmax(shared.get(name, values), values)
    return TakenIn(flags, tuple(told), {SETTINGS: echo} if echo else {}, shared, tuple(advice))


def _put_in_metres(document: dict[str, Any]) -> None:
    """Lengths of raw records in m, in place, where the request's ``units`` names them."""
    parts = {name: document[name] for name in (SETTINGS, "readings", "units") if name in document}
    if not isinstance(parts.get(SETTINGS), dict) or not parts[SETTINGS]:
        return
    names = frozenset[str]().union(*(LENGTHS.get(kind, ()) for kind in parts[SETTINGS]))
    document |= in_metres(parts, names)


def _advice_of(echo: Mapping[str, Any], where: Mapping[int, Place]) -> Iterator[Advice]:
    """What was said when raw records were read, and what their sweeps are flagged by."""
    for said in echo.get("advisories", ()):
        if said["code"] not in SWEEP_FLAGS:
            yield Advice(said["code"], said["text"])
    by_flag: dict[str, list[int]] = {}
    for remark in echo.get("remarks", ()):
        for flag in remark["flags"]:
            if flag in SWEEP_FLAGS:
                by_flag.setdefault(flag, []).append(remark["row"])
    for flag, rows in by_flag.items():
        places = ", ".join(pointer(where[row]) for row in rows[:MOST_NAMED])
        more = f" and {len(rows) - MOST_NAMED} more" if len(rows) > MOST_NAMED else ""
        yield advise("raw-record-flags", count=len(rows), flag=flag, places=places + more,
                     meaning=SWEEP_FLAGS[flag].text)  # fmt: skip


def _refuse(detail: str, place: Place) -> None:
    raise Unprocessable(detail, [Fault(detail, pointer(place))])


def _pulled(readings: Any, kind: str) -> tuple[dict[int, Any], dict[int, Place], int]:
    """Records of one kind by row, taken out of the readings, and the steps to each."""
    if isinstance(readings, list):
        rows = {i: row.pop(kind) for i, row in enumerate(readings)
                if isinstance(row, dict) and kind in row}  # fmt: skip
        places: dict[int, Place] = {i: ("readings", i, kind) for i in rows}
        count = len(readings)
    elif isinstance(readings, dict) and isinstance(readings.get(kind), list):
        cells = readings.pop(kind)
        rows = dict(enumerate(cells))
        places = {i: ("readings", kind, i) for i in rows}
        count = len(cells)
    else:
        return {}, {}, 0
    return {i: record for i, record in rows.items() if record is not None}, places, count


def _put(
    readings: Any, kind: str, records: Mapping[int, Any], numbers: Mapping[str, Array], units: Units
) -> Sequence[str]:
    """Write columns into the readings, in the caller's units, where these say nothing themselves.

    Returns the names of the columns.
    """
    said = {name: from_si(name, values, _valid(name, units)) for name, values in numbers.items()}
    if isinstance(readings, dict):
        _refuse_both(readings, kind, ("readings",))
        for name, values in said.items():
            if quantity_of(name)[0] not in readings:
                readings[name] = _cells(values)
    else:
        cells = {name: _cells(values) for name, values in said.items()}
        for place in records:
            row = readings[place]
            _refuse_both(row, kind, ("readings", place))
            own = frozenset(row)
            row |= {name: values[place] for name, values in cells.items()
                    if quantity_of(name)[0] not in own}  # fmt: skip
    return list(said)


def _refuse_both(row: Mapping[str, Any], kind: str, place: Place) -> None:
    for name in PERMITTIVITY:
        if name in row:
            _refuse(f"a reading carries {kind} or {name}, found both", (*place, name))


def _valid(name: str, units: Units) -> Units:
    """The caller's unit of a quantity if it is one; others are refused with the settings."""
    about, _ = quantity_of(name)
    known = {unit.code for unit in QUANTITIES[about].units}
    return {about: units[about]} if units.get(about) in known else {}


def _cells(values: NDArray[np.float64]) -> list[float | None]:
    return [value if np.isfinite(value) else None for value in values.tolist()]
