"""The border between a caller's units and SI: conversion, gates, and the sentence that mends."""

from collections.abc import Mapping

from models.errors import Complaint, ParameterError
from models.quantity import QUANTITIES, Quantity
from models.readings import quantity_of
from models.relation import Array, column
from models.units import UNITS, Unit

Units = Mapping[str, str]
"""UCUM codes by quantity name, where they differ from the unit of the API."""


Words = Mapping[str, Quantity]
"""Quantities by name: the vocabulary, or what a part of the API adds to it."""


def unit_of(name: str, units: Units, words: Words = QUANTITIES) -> Unit:
    """The unit in which a caller writes a quantity, or its uncertainty."""
    about, _ = quantity_of(name)
    return UNITS[code_of(about, units, words)]


def code_of(name: str, units: Units, words: Words = QUANTITIES) -> str:
    """The code of the unit of a quantity: its own, that of the one it follows, or the API's."""
    quantity = words[name]
    return units.get(name) or units.get(quantity.follows, quantity.unit)


def refuse_units(units: Units, words: Words = QUANTITIES) -> None:
    """Refuse units of the wrong dimension and names that are no quantity.

    Raises ParameterError with every complaint.
    """
    complaints: list[Complaint] = []
    for name, code in units.items():
        quantity = words.get(name)
        known = [unit.code for unit in quantity.units] if quantity else []
        if not known:
            detail = f"{name} is no quantity with a unit; see /v1/quantities"
        elif code not in known:
            detail = f"{name} cannot be in {code!r}; it takes {', '.join(known)}"
        else:
            continue
        complaints.append(Complaint(name, detail, ("units", name)))
    if complaints:
        raise ParameterError("units", complaints)


def to_si(
    owner: str, given: Mapping[str, float], units: Units, words: Words = QUANTITIES
) -> dict[str, float]:
    """Values of a soil or probe in SI, each within its physical gate.

    given: by quantity name or name_u. owner: the part of the request they stand in.
    Raises ParameterError that says what was found, what was expected, and how to mend it.
    """
    complaints: list[Complaint] = []
    converted: dict[str, float] = {}
    for name, value in given.items():
        about, is_width = quantity_of(name)
        unit = unit_of(name, units, words)
        si = float(unit.width_to_si(value) if is_width else unit.to_si(value))
        detail = _fault(words[about], si, value, unit, is_width=is_width)
        if detail:
            complaints.append(Complaint(name, detail, (owner, name)))
        converted[name] = si
    if complaints:
        raise ParameterError(owner, complaints)
    return converted


def from_si(name: str, values: Array | float, units: Units, words: Words = QUANTITIES) -> Array:
    """A column of an answer in the caller's unit; suffixes _u are widths, _lower values."""
    stem = name
    is_width = name.endswith(("_u", "_u_shared"))
    for suffix in ("_u_shared", "_u", "_lower", "_upper"):
        if stem not in words:
            stem = stem.removesuffix(suffix)
    unit = UNITS[code_of(stem, units, words)]
    if unit.scale == 1.0 and unit.offset == 0.0:
        return column(values)
    return unit.width_from_si(values) if is_width else unit.from_si(values)


def _fault(
    quantity: Quantity, si: float, value: float, unit: Unit, *, is_width: bool
) -> str | None:
    gate = quantity.gate_si
    if is_width:
        if si < 0:
            return f"{quantity.name}_u must be at least 0, found {value:g}"
        if si > gate.high - gate.low:
            most = float(unit.width_from_si(gate.high - gate.low))
            said = f"{quantity.name}_u can be at most {most:g} {unit.code}, found {value:g}"
            return said + _width_mend(quantity, value, unit)
        return None
    if not gate.excludes(si):
        return None
    low, high = float(unit.from_si(gate.low)), float(unit.from_si(gate.high))
    said = f"expected {quantity.name} from {low:g} to {high:g} {unit.code}, found {value:g}"
    other = quantity.likely_unit(si, unit.code)
    if other is None or (other == "%" and value <= 1.0):  # 0.99 is meant as it stands
        return said + quantity.aside(si)
    meant = float(unit.from_si(UNITS[other].to_si(value)))
    return (
        f"{said}: that looks like {other}; send {meant:.6g}, "
        f'or name the unit: "units": {{"{quantity.name}": "{other}"}}'
    )


def _width_mend(quantity: Quantity, value: float, unit: Unit) -> str:
    """The end of a sentence about a width that another unit would make possible."""
    gate = quantity.gate_si
    for code in quantity.lookalikes:
        si = float(UNITS[code].width_to_si(value))
        if code != unit.code and si <= gate.high - gate.low:
            meant = float(unit.width_from_si(si))
            return (
                f": that looks like {code}; send {meant:.6g}, "
                f'or name the unit: "units": {{"{quantity.name}": "{code}"}}'
            )
    return ""
