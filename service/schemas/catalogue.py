"""A declaration as a catalogue shows it: its fields, with quantities in the units of the API."""

from collections.abc import Mapping, Sequence
from dataclasses import fields, is_dataclass
from functools import singledispatch
from math import isfinite
from typing import Any

from models.conductivity.family import TemperatureCompensation
from models.decisions.crops import TABLE_4, TABLE_22, Crop
from models.decisions.terms import TERMS
from models.estimate.own.discrepancy import growth
from models.mixing.family import MixingModel
from models.quantity import QUANTITIES, Quantity
from models.relation import Parameter, Range, Relation
from models.salinity.family import PoreWaterModel
from models.units import UNITS, Unit
from models.water.family import WaterModel

NAMES: Mapping[str, str] = {
    "key": "name",
    "source": "citation",
    "published_error": "published_standard_error",
    "discrepancy": "default_model_uncertainty",
}
"""Fields that the API calls otherwise."""


def entry_of(declaration: Any) -> dict[str, Any]:
    """A member of a registry as JSON.

    A relation also tells its ``inputs``: what it computes from, and the parameters it cannot do
    without. ``units`` has the unit of every member of the entry that is a quantity.
    """
    entry: dict[str, Any] = shown(declaration)
    if isinstance(declaration, Relation):
        needed = [p.name for p in declaration.parameters if _must_be_given(p)]
        entry["inputs"] = [*measured(declaration), *needed]
    if isinstance(declaration, MixingModel):
        entry["default_model_uncertainty"]["grows"] = list(growth(declaration))
    if isinstance(declaration, PoreWaterModel):
        entry["default_model_uncertainty"]["floor_unit"] = "S/m"
    units = {name: unit.code for name in entry if (unit := unit_of(name))}
    return {**entry, "units": units} if units else entry


@singledispatch
def measured(declaration: Any) -> tuple[str, ...]:
    """The quantities a relation of this family computes from."""
    raise TypeError(f"the inputs of {type(declaration).__name__} are not known")


@measured.register
def _(declaration: MixingModel) -> tuple[str, ...]:
    return (f"{declaration.permittivity}_permittivity",)


@measured.register
def _(declaration: PoreWaterModel) -> tuple[str, ...]:
    supplied = (parameter.name for parameter in declaration.parameters if parameter.supplied)
    return ("bulk_conductivity", *supplied)


@measured.register
def _(declaration: WaterModel) -> tuple[str, ...]:  # noqa: ARG001
    return ("frequency", "temperature")


@measured.register
def _(declaration: TemperatureCompensation) -> tuple[str, ...]:  # noqa: ARG001
    return ("bulk_conductivity", "temperature")


@singledispatch
def shown(value: Any) -> Any:
    """``value`` as JSON; functions have no place in it."""
    if not is_dataclass(value):
        return None if value == "" else value
    members = {field.name: getattr(value, field.name) for field in fields(value)}
    return {
        NAMES.get(name, name): converted(member, name)
        for name, member in members.items()
        if not callable(member)
    }


@shown.register
def _(value: Quantity) -> dict[str, Any]:
    return {
        "name": value.name,
        "symbol": value.symbol or None,
        "unit": value.unit or None,
        "meaning": value.meaning,
        "gate": value.gate and {"low": value.gate.low, "high": value.gate.high},
        "units_taken": [unit.code for unit in value.units],
    }


@shown.register
def _(value: Parameter) -> dict[str, Any]:
    unit = unit_of(value.name)
    return {
        "name": value.name,
        "meaning": value.meaning,
        "unit": unit.code if unit else None,
        "range": converted(value.range, value.name),
        "choices": list(value.choices),
        "default": converted(value.default, value.name),
        "default_u": converted(value.default_u, f"{value.name}_u"),
        "supplied": value.supplied,
        "optional": value.optional,
    }


@shown.register
def _(value: Crop) -> dict[str, Any]:
    numbers = {
        "depletion_fraction": value.readily_available,
        "salt_threshold": value.threshold,
        "salt_slope": value.slope,
    }
    told: dict[str, Any] = {"name": value.key, "title": value.title, "root_depth": None}
    if value.root_depth is not None:
        low, high = value.root_depth
        told["root_depth"] = {"low": low, "high": high, "unit": "m"}
    for name, known in numbers.items():
        unit = UNITS[TERMS[name].unit]
        pair = (None, None) if known is None else tuple(float(f"{unit.width_from_si(part):.12g}")
                                                        for part in known)  # fmt: skip
        told |= {name: pair[0], f"{name}_u": pair[1], f"{name}_unit": unit.code}
    return {
        **told,
        "from_memory": [name.replace("slope_percent", "salt_slope") for name in value.from_memory],
        "note": value.note or None,
        "citations": {
            "water": value.root_depth and shown(TABLE_22),
            "salt": value.threshold and shown(TABLE_4),
        },
    }


def converted(value: Any, name: str) -> Any:
    """``value`` as JSON, from SI to the API's unit where ``name`` is a quantity's or its ``_u``."""
    if isinstance(value, Range):
        unit = unit_of(name)
        ends = {"low": converted(value.low, name), "high": converted(value.high, name)}
        return {**ends, "unit": unit.code} if unit else ends
    if isinstance(value, Mapping):
        return {key: converted(member, key) for key, member in value.items()}
    if isinstance(value, Sequence) and not isinstance(value, str):
        return [converted(member, name) for member in value]
    if not isinstance(value, float):
        return shown(value)
    unit, width = unit_of(name), unit_of(name.removesuffix("_u"))
    if unit:
        value = float(unit.from_si(value))
    elif width:
        value = float(width.width_from_si(value))
    return float(f"{value:.12g}") if isfinite(value) else None


def unit_of(name: str) -> Unit | None:
    """The API's unit of a quantity of the vocabulary; None for any other name."""
    quantity = QUANTITIES.get(name)
    return UNITS[quantity.unit] if quantity and quantity.unit else None


def _must_be_given(parameter: Parameter) -> bool:
    return parameter.default is None and not (parameter.optional or parameter.supplied)
