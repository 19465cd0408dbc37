"""What an answer echoes: every constant that was used, in the caller's own units."""

from collections.abc import Iterable, Mapping
from typing import Any

from models.advisories import Advice
from models.conversion import Units, from_si
from models.estimate import Basis, Query
from models.estimate.explanation import Explanation
from models.quantity import QUANTITIES
from models.readings import quantity_of
from models.soil.description import Soil
from service.schemas.estimates import EstimatesSettings


def echo_of(basis: Basis, settings: EstimatesSettings, remarks: Iterable[Advice]) -> dict[str, Any]:
    """Every constant that was used, so that the answer can be had again from itself.

    remarks: advisories that the readings themselves gave rise to.
    """
    query, units = basis.query, settings.units
    return {
        "mixing_model": _model_echo(basis, units),
        **_salinity_echo(basis, units),
        "soil": _soil_echo(query.soil, units),
        "probe": _in_units(query.probe, units),
        "assume": _assumed(query, units),
        "coverage_probability": query.probability,
        "propagation": {"method": "first-order", "interval": "shortest"},
        "advisories": [
            {"code": said.code, "text": said.text} for said in (*basis.advice, *remarks)
        ],
    }


def explanation_echo(found: Explanation) -> dict[str, Any]:
    """Effects of temperature, one list entry per reading, null where one cannot be told."""
    effects = {
        name: [value if value == value else None for value in sizes.tolist()]  # noqa: PLR0124
        for name, sizes in found.effects.items()
    }
    return {
        "explanation": {
            "reference_temperature": {"value": 20.0, "unit": "Cel"},
            "unit": "m3/m3",
            "effects": effects,
            "dominant": list(found.dominant),
        }
    }


def units_of_answer(names: Iterable[str], units: Units) -> dict[str, str]:
    """The unit of every quantity among the columns."""
    answered: dict[str, str] = {}
    for name in names:
        stem = name
        for suffix in ("_u_shared", "_u", "_lower", "_upper"):
            if stem not in QUANTITIES:
                stem = stem.removesuffix(suffix)
        if QUANTITIES[stem].unit:
            answered[stem] = units.get(stem, QUANTITIES[stem].unit)
    return answered


def _assumed(query: Query, units: Units) -> dict[str, Any]:
    if query.assumed_temperature is None:
        return {}
    values = {"temperature": query.assumed_temperature}
    return _parameters(values, {"temperature": query.assumed_temperature_u}, units)


def _model_echo(basis: Basis, units: Units) -> dict[str, Any]:
    model, query = basis.model, basis.query
    echo: dict[str, Any] = {"name": model.key, "revision": model.revision}
    echo |= _parameters(basis.values, basis.uncertainties, units)
    if query.standard_error is not None:
        echo["standard_error"] = query.standard_error
    else:
        echo["model_uncertainty"] = {
            "standard_uncertainty": model.discrepancy.standard_uncertainty,
            "reason": model.discrepancy.reason,
        }
    if basis.water is not None:
        echo["water_model"] = basis.water.key
    return echo | {"sources": dict(basis.origins)}


def _salinity_echo(basis: Basis, units: Units) -> dict[str, Any]:
    """The pore-water model as it was used; nothing where none was."""
    salinity = basis.salinity
    if salinity is None:
        return {}
    model, bound = salinity.model, salinity.bound
    echo: dict[str, Any] = {"name": model.key, "revision": model.revision}
    echo |= _parameters(bound.values, bound.uncertainties, units)
    sources = dict(bound.origins)
    if salinity.query.standard_error is not None:
        echo["standard_error"] = salinity.query.standard_error
    else:
        own = model.discrepancy.relative_uncertainty(clay=salinity.clay, fitted=salinity.fitted)
        echo["model_uncertainty"] = {
            "relative_standard_uncertainty": float(own), "reason": model.discrepancy.reason,
        }  # fmt: skip
    if salinity.paste is not None:
        paste = salinity.paste
        values = {"saturation_percentage": paste.value}
        echo |= _parameters(values, {"saturation_percentage": paste.standard_uncertainty}, units)
        sources["saturation_percentage"] = paste.origin
    return {
        "pore_water_model": echo | {"sources": sources},
        "temperature_compensation": salinity.compensation.key,
    }


def _parameters(
    values: Mapping[str, Any], uncertainties: Mapping[str, float], units: Units
) -> dict[str, Any]:
    """Parameters in the caller's units, each with its standard uncertainty."""
    told: dict[str, Any] = {}
    for name, value in values.items():
        told |= _in_units({name: value}, units)
        if name in uncertainties:
            told |= _in_units({f"{name}_u": uncertainties[name]}, units)
    return told


def _soil_echo(soil: Soil, units: Units) -> dict[str, Any]:
    echo: dict[str, Any] = {} if soil.texture is None else {"texture": soil.texture}
    for name, value in soil.values.items():
        echo |= _in_units({name: value, f"{name}_u": soil.uncertainties[name]}, units)
    return echo | {"sources": dict(soil.origins)}


def _in_units(values: Mapping[str, Any], units: Units) -> dict[str, Any]:
    """SI values in the caller's units; what is no quantity stays as it is."""
    return {
        name: float(from_si(name, value, units)) if quantity_of(name)[0] in QUANTITIES else value
        for name, value in values.items()
    }
