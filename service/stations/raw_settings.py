"""What the raw records of a stored probe are read with: its description and its calibration."""

import re
from collections.abc import Iterable, Mapping
from typing import Any

from models.errors import ModelError, ParameterError
from service.errors import Unprocessable
from service.faults import Fault, hint, pointer, shown
from service.formats.raw_records import RAW_RECORDS, SETTINGS
from service.waveforms.bodies import SETTINGS as WAVEFORM_SETTINGS
from service.waveforms.question import bench_of, checked

Body = Mapping[str, Any]
_UNITS_OFFERED = re.compile(r': send "units": \{[^}]*\}')
_RODS = ("probe_length", "probe_constant")
"""What a stored probe says of its rods beside its raw records."""


def settings_for(probe: Body, kind: str) -> Any | None:
    """The settings of a kind of raw record, as a request for estimates holds them; None: none.

    A waveform's probe has the length and the constant that the stored probe states.
    """
    kept = (probe.get(SETTINGS) or {}).get(kind)
    if kind != "waveform" or (kept is not None and not isinstance(kept.get("probe", {}), dict)):
        return kept
    described = dict((kept or {}).get("probe", {}))
    for name in _RODS:
        if name not in described and probe.get(name) is not None:
            described |= {n: probe[n] for n in (name, f"{name}_u") if probe.get(n) is not None}
    if kept is None and "probe_length" not in described:
        return None
    return {**(kept or {}), "probe": described}


def check_settings(probe: Body) -> None:
    """Raise Unprocessable, with the place of each fault, where a probe's settings cannot be used.

    Of a sweep, what follows from samples alone shows when one is read.
    """
    kept = probe.get(SETTINGS) or {}
    faults: list[Fault] = []
    for kind in kept:
        if kind not in RAW_RECORDS:
            detail = f"unknown key {shown(kind)}{hint(kind, RAW_RECORDS)}"
            known = ", ".join(RAW_RECORDS)
            faults.append(Fault(f"{detail}; known are {known}", pointer((SETTINGS, kind))))
        else:
            faults += _faults(kind, settings_for(probe, kind))
    if faults:
        faults = [Fault(in_own_unit(fault.detail), fault.pointer) for fault in faults]
        raise Unprocessable("the probe holds what its raw records cannot be read with", faults)


def _faults(kind: str, settings: Any) -> list[Fault]:
    """What is wrong with settings; a record that holds nothing shows it for most kinds."""
    place = (SETTINGS, kind)
    try:
        if kind == "waveform":
            bench_of(checked(WAVEFORM_SETTINGS, settings, place), {}, place)
        else:
            RAW_RECORDS[kind]({0: {}}, 1, {0: ("readings", 0, kind)}, settings, {})
    except Unprocessable as error:
        return [fault for fault in error.errors if about_settings(fault)]
    except ParameterError as error:
        complaints = [Fault(c.detail, pointer(c.place)) for c in error.complaints]
        return [fault if about_settings(fault) else Fault(fault.detail, pointer(place))
                for fault in complaints if kind == "waveform" or about_settings(fault)]  # fmt: skip
    except ModelError:
        return []  # of the record that holds nothing
    return []


def about_settings(fault: Fault) -> bool:
    """Whether a fault lies in what all records share, rather than in one of them."""
    return fault.pointer.startswith(f"#/{SETTINGS}")


def in_own_unit(detail: str) -> str:
    """A complaint that offers units, for what is kept in the unit of the API."""
    return _UNITS_OFFERED.sub(": send it in the unit of the API", detail)


def carried(readings: Any) -> Iterable[str]:
    """The kinds of raw records that the readings of a request carry."""
    rows = readings if isinstance(readings, list) else [readings]
    return [
        kind for kind in RAW_RECORDS if any(isinstance(row, dict) and kind in row for row in rows)
    ]
