"""From a request's own words to a query in SI, and back to what the answer echoes."""

from collections.abc import Iterable, Mapping
from typing import Any

from pydantic import ValidationError

from models.advisories import Advice
from models.conversion import Units, from_si, refuse_units, to_si
from models.errors import Complaint, ParameterError
from models.estimate import Basis, Query, choose, prepare
from models.mixing import MIXING_MODELS
from models.quantity import QUANTITIES
from models.readings import quantity_of
from models.soil.description import Soil, describe
from service.errors import Unprocessable
from service.faults import problems_of
from service.schemas.estimates import ECHOED, SETTINGS, EstimatesSettings, ModelChoice


def settings_of(document: Mapping[str, Any]) -> EstimatesSettings:
    """The checked settings of a request without its readings.

    Raises Unprocessable with a pointer to every fault.
    """
    try:
        return SETTINGS.validate_python(document)
    except ValidationError as error:
        faults = problems_of(error, document, SETTINGS)
        raise Unprocessable("the request holds what cannot be used", faults) from None


def basis_of(settings: EstimatesSettings, columns: Iterable[str]) -> Basis:
    """Everything an estimate rests on beside its readings.

    columns: names of the columns the readings have.
    Raises ModelError, with the place of each complaint, when it cannot be settled.
    """
    units = settings.units
    refuse_units(units)
    soil = _soil(settings, units)
    probe = to_si("probe", _stated(settings.probe), units)
    assumed = to_si("assume", _stated(settings.assume), units)
    name, given, standard_error = _model(settings.mixing_model, units)
    query = Query(
        model=name or "",
        given=given,
        standard_error=standard_error,
        soil=soil,
        probe=probe,
        assumed_temperature=assumed.get("temperature"),
        probability=settings.coverage_probability,
        columns=frozenset(columns),
    )
    _refuse_unreachable(query)
    return prepare(query) if name else choose(query)


def echo_of(basis: Basis, settings: EstimatesSettings, remarks: Iterable[Advice]) -> dict[str, Any]:
    """Every constant that was used, so that the answer can be had again from itself.

    remarks: advisories that the readings themselves gave rise to.
    """
    query, units = basis.query, settings.units
    return {
        "mixing_model": _model_echo(basis, units),
        "soil": _soil_echo(query.soil, units),
        "probe": _in_units(query.probe, units),
        "assume": _in_units(
            {} if query.assumed_temperature is None else {"temperature": query.assumed_temperature},
            units,
        ),
        "coverage_probability": query.probability,
        "propagation": {"method": "first-order", "interval": "shortest"},
        "advisories": [
            {"code": said.code, "text": said.text} for said in (*basis.advice, *remarks)
        ],
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


def _stated(body: Any) -> dict[str, float]:
    """The numbers a part of the request states; null counts as not stated."""
    return {
        name: value
        for name, value in body.model_dump(exclude_none=True).items()
        if isinstance(value, float | int)
    }


def _soil(settings: EstimatesSettings, units: Units) -> Soil:
    body: Any = settings.soil
    stated = to_si("soil", _stated(body), units)
    given = {name: value for name, value in stated.items() if name in QUANTITIES}
    spread = {n.removesuffix("_u"): u for n, u in stated.items() if n not in QUANTITIES}
    lonely = [name for name in spread if name not in given]
    if lonely:
        complaints = [
            Complaint(name, f"{name}_u stands without {name}", ("soil", f"{name}_u"))
            for name in lonely
        ]
        raise ParameterError("soil", complaints)
    return describe(body.texture, given, spread)


def _model(
    named: str | ModelChoice | None, units: Units
) -> tuple[str | None, dict[str, Any], float | None]:
    """Name, parameters in SI, and the caller's own standard error."""
    if named is None or isinstance(named, str):
        if named is not None:
            MIXING_MODELS[named]
        return named, {}, None
    model = MIXING_MODELS[named.name]
    own = {n: v for n, v in (named.model_extra or {}).items() if n not in ECHOED}
    _refuse_revision(named, model.revision)
    known = {parameter.name: parameter for parameter in model.parameters}
    given: dict[str, Any] = {}
    complaints: list[Complaint] = []
    for name, value in own.items():
        about, _ = quantity_of(name)
        parameter = known.get(about) or known.get(name.removesuffix("_u"))
        if parameter is not None and not parameter.choices and not _is_number(value):
            complaints.append(
                Complaint(name, f"expected a number, found {value!r}"[:120], ("mixing_model", name))
            )
        elif parameter is not None and about in QUANTITIES:
            given |= to_si("mixing_model", {name: value}, units)
        else:
            given[name] = value
    if complaints:
        raise ParameterError("mixing_model", complaints)
    return named.name, given, named.standard_error


def _is_number(value: Any) -> bool:
    return isinstance(value, float | int) and not isinstance(value, bool)


def _refuse_revision(named: ModelChoice, current: int) -> None:
    asked = (named.model_extra or {}).get("revision", current)
    if asked != current:
        detail = f"revision {asked} of {named.name} is not here; this service has {current}"
        raise ParameterError(
            "mixing_model", [Complaint("revision", detail, ("mixing_model", "revision"))]
        )


def _refuse_unreachable(query: Query) -> None:
    """A travel time is no permittivity without the length of the rods."""
    kinds = {"apparent_permittivity", "real_permittivity"} & query.columns
    if "travel_time" in query.columns and not kinds and "probe_length" not in query.probe:
        detail = "travel_time needs the length of the rods: give probe.probe_length in m"
        raise ParameterError("probe", [Complaint("probe_length", detail, ("probe",))])
    if not kinds and "travel_time" not in query.columns:
        detail = (
            "a reading carries one of apparent_permittivity, real_permittivity (with "
            "imaginary_permittivity), travel_time; found none of them"
        )
        raise ParameterError("readings", [Complaint("readings", detail, ("readings",))])


def _model_echo(basis: Basis, units: Units) -> dict[str, Any]:
    model, query = basis.model, basis.query
    echo: dict[str, Any] = {"name": model.key, "revision": model.revision}
    for name, value in basis.values.items():
        echo |= _in_units({name: value}, units)
        if name in basis.uncertainties:
            echo |= _in_units({f"{name}_u": basis.uncertainties[name]}, units)
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
