"""What an answer echoes: every constant that was used, in the caller's own units."""

import json
from collections.abc import Iterable, Mapping
from typing import Any

from models.advisories import Advice
from models.conversion import Units, code_of, from_si
from models.estimate import Basis, Query
from models.quantity import QUANTITIES
from models.readings import quantity_of
from models.soil.description import Soil
from service.schemas.estimates import EstimatesSettings


def echo_of(basis: Basis, settings: EstimatesSettings, remarks: Iterable[Advice]) -> dict[str, Any]:
    """Every constant that was used, so that the answer can be had again from itself.

    remarks: advisories that the readings themselves gave rise to.
    """
    return {
        "mixing_model": model_echo(basis, settings.units),
        **_salinity_echo(basis, settings.units),
        **surroundings_echo(basis.query, settings),
        "advisories": advice_echo((*basis.advice, *remarks)),
    }


def advice_echo(said: Iterable[Advice]) -> list[dict[str, str]]:
    """Advisories, each with its code and its text."""
    return [{"code": one.code, "text": one.text} for one in said]


def surroundings_echo(query: Query, settings: EstimatesSettings) -> dict[str, Any]:
    """Soil, probe and what was assumed: the same whichever model is used."""
    units = settings.units
    return {
        "soil": _soil_echo(query.soil, units),
        "probe": _in_units(query.probe, units),
        "assume": _assumed(query, units),
        "coverage_probability": query.probability,
        "propagation": settings.propagation.model_dump(),
    }


MOST_GROUNDS = 20
"""Soils and probes of a table that a header can tell."""
NOT_BRIEF = frozenset({"advisories", "mixing_models", "not_answering", "raw_records"})
"""Too long for a header, many of which end at 4 or 8 KiB on their way."""


def _briefly(value: Any) -> Any:
    """A part of an echo without the reasons in words, numbers to ten digits."""
    if isinstance(value, Mapping):
        return {n: _briefly(v) for n, v in value.items() if n not in {"reason", "sources"}}
    return float(f"{value:.10g}") if isinstance(value, float) else value


def headers_of(echo: Mapping[str, Any], units: Mapping[str, str]) -> dict[str, str]:
    """What a table cannot say in its cells: models, units, advisories, every constant used."""
    model, pore_water = echo["mixing_model"], echo.get("pore_water_model")
    constants = {name: _briefly(value) for name, value in echo.items() if name not in NOT_BRIEF}
    codes = dict.fromkeys(said["code"] for said in echo["advisories"])
    return {
        "Mixing-Model": model["name"] if isinstance(model, Mapping) else model,
        **({"Pore-Water-Model": pore_water["name"]} if pore_water else {}),
        "Units": ", ".join(f"{name}={unit}" for name, unit in units.items()),
        "Advisories": ", ".join(codes),
        "Estimate-Basis": json.dumps(constants, separators=(",", ":")),
    }


def headers_of_several(
    used: Iterable[tuple[Mapping[str, str], Mapping[str, int], Any]],
    codes: Iterable[str],
    units: Mapping[str, str],
) -> dict[str, str]:
    """What a table cannot say in its cells, where its rows name their soils and probes.

    used: names of soil and probe, their revisions, and the basis of the rows that name them.
    """
    models: dict[str, None] = {}
    grounds: list[dict[str, Any]] = []
    for named, revisions, basis in used:
        told: dict[str, Any] = {kind: name for kind, name in named.items() if name}
        told["revision"] = max(revisions.values(), default=None)
        model = getattr(basis, "model", None)
        told["mixing_model"] = model.key if model else "all"
        models[told["mixing_model"]] = None
        salinity = getattr(basis, "salinity", None)
        if salinity is not None:
            told["pore_water_model"] = salinity.model.key
        grounds.append(told)
    return {
        "Mixing-Model": ", ".join(models),
        "Units": ", ".join(f"{name}={unit}" for name, unit in units.items()),
        "Advisories": ", ".join(dict.fromkeys(codes)),
        "Estimate-Basis": json.dumps(grounds[:MOST_GROUNDS], separators=(",", ":")),
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
            answered[stem] = code_of(stem, units)
    return answered


def _assumed(query: Query, units: Units) -> dict[str, Any]:
    if query.assumed_temperature is None:
        return {}
    values = {"temperature": query.assumed_temperature}
    return _parameters(values, {"temperature": query.assumed_temperature_u}, units)


def model_echo(basis: Basis, units: Units) -> dict[str, Any]:
    """The mixing model as it was used."""
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
