"""Lengths that are no quantity of the vocabulary, in the unit a request names for them."""

from collections.abc import Mapping
from math import log
from typing import Any

from models.errors import Complaint, ParameterError
from models.quantity import QUANTITIES
from models.units import UNITS, units_of
from service.faults import hint

WIDTH = "_u"
USUAL = 1 / 50
"""Of the most that a length can be: where it lies within a factor of fifty either way."""
CODES = tuple(unit.code for unit in units_of("length"))


def too_long(value: float | None, most: float) -> str:
    """What is wrong with a length, m, beyond any apparatus, and what was meant; empty: nothing."""
    if value is None or value <= most:
        return ""
    meant = {"mm": value * 1e-3, "cm": value * 1e-2}
    code = min(meant, key=lambda unit: abs(log(meant[unit] / (USUAL * most))))
    return (
        f"expected at most {most:g} m, found {value:g}; in {code}? send {meant[code]:g}, or name "
        "the unit in units"
    )


def in_metres(document: Mapping[str, Any], names: frozenset[str]) -> dict[str, Any]:
    """The request with every length in m, whose unit ``units`` names; others are left alone.

    names: keys, wherever they stand, that are lengths. An uncertainty follows its length.
    Raises ParameterError for a unit that is none of a length, and a key that is no length.
    """
    asked = document.get("units")
    if not isinstance(asked, Mapping):
        return dict(document)
    lengths = {name: code for name, code in asked.items() if name not in QUANTITIES}
    _refuse(lengths, names)
    if not lengths:
        return dict(document)
    rest = {name: code for name, code in asked.items() if name not in lengths}
    scales = {name: UNITS[code].scale for name, code in lengths.items()}
    return {**_scaled({k: v for k, v in document.items() if k != "units"}, scales), "units": rest}


def _refuse(lengths: Mapping[str, Any], names: frozenset[str]) -> None:
    complaints = []
    for name, code in lengths.items():
        if name not in names:
            known = ", ".join(sorted(names))
            lengths_here = f", and no length of this request: {known}" if known else ""
            detail = f"{name} is no quantity with a unit, see /v1/quantities{lengths_here}"
            detail += hint(name, (*names, *QUANTITIES))
        elif code not in CODES:
            detail = f"{name} cannot be in {code!r}; it takes {', '.join(CODES)}"
        else:
            continue
        complaints.append(Complaint(name, detail, ("units", name)))
    if complaints:
        raise ParameterError("units", complaints)


def _scaled(part: Any, scales: Mapping[str, float]) -> Any:
    """The same with numbers under the named keys in m; long columns of numbers are not walked."""
    if isinstance(part, Mapping):
        return {
            key: value * scales[key.removesuffix(WIDTH)]
            if key.removesuffix(WIDTH) in scales and _is_number(value)
            else _scaled(value, scales)
            for key, value in part.items()
        }
    if isinstance(part, list) and part and isinstance(part[0], Mapping):
        return [_scaled(item, scales) for item in part]
    return part


def _is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)
