"""From a request's own words to a query in SI, with everything that is wrong with it."""

from collections.abc import Iterable, Mapping
from dataclasses import replace
from typing import Any

from pydantic import ValidationError

from models.conductivity import TEMPERATURE_COMPENSATIONS
from models.conversion import Units, refuse_units, to_si
from models.errors import Complaint, ParameterError
from models.estimate import Basis, Query, SalinityQuery, choose, prepare
from models.estimate.basis import ASSUMED_TEMPERATURE_U
from models.estimate.beside.ensemble import EveryModel, prepare_all
from models.mixing import MIXING_MODELS
from models.quantity import QUANTITIES
from models.readings import quantity_of
from models.registry import Registry
from models.relation import Relation
from models.salinity import PORE_WATER_MODELS
from models.soil import TEXTURES
from models.soil.description import Soil, describe
from models.soil.texture import texture_key
from models.uncertainty.draws import Draws
from service.errors import Unprocessable
from service.faults import hint, problems_of, shown
from service.schemas.estimates import (
    ALL,
    ECHOED,
    SETTINGS,
    EstimatesSettings,
    ModelChoice,
    PoreWaterChoice,
)


def settings_of(document: Mapping[str, Any]) -> EstimatesSettings:
    """The checked settings of a request without its readings.

    Raises Unprocessable with a pointer to every fault.
    """
    try:
        return SETTINGS.validate_python(document)
    except ValidationError as error:
        faults = problems_of(error, document, SETTINGS)
        raise Unprocessable("the request holds what cannot be used", faults) from None


def basis_of(settings: EstimatesSettings, columns: Iterable[str]) -> Basis | EveryModel:
    """Everything an estimate rests on beside its readings; for ALL that of every model.

    columns: names of the columns the readings have.
    Raises ModelError, with the place of each complaint, when it cannot be settled.
    """
    units = settings.units
    _refuse_units(units)
    soil = soil_of(settings.soil, units)
    probe = to_si("probe", _stated(settings.probe), units)
    assumed = to_si("assume", _stated(settings.assume), units)
    name, given, standard_error = model_of(
        "mixing_model", MIXING_MODELS, settings.mixing_model, units
    )
    salt = model_of("pore_water_model", PORE_WATER_MODELS, settings.pore_water_model, units)
    compensation = settings.temperature_compensation
    named_in(TEMPERATURE_COMPENSATIONS, compensation, ("temperature_compensation",))
    query = Query(
        model=name or "",
        given=given,
        standard_error=standard_error,
        soil=soil,
        probe=probe,
        assumed_temperature=assumed.get("temperature"),
        assumed_temperature_u=assumed.get("temperature_u", ASSUMED_TEMPERATURE_U),
        probability=settings.coverage_probability,
        draws=_draws(settings),
        columns=frozenset(columns),
        salinity=SalinityQuery(
            model=salt[0],
            given=salt[1],
            standard_error=salt[2],
            compensation=compensation,
        ),
    )
    _refuse_unreachable(query)
    if name == ALL:
        return prepare_all(query)
    return prepare(query) if name else choose(query)


def refuse_unknown_names(settings: EstimatesSettings) -> None:
    """Raise ParameterError for units and models that are none, whatever soil they are meant for."""
    _refuse_units(settings.units)
    model_of("mixing_model", MIXING_MODELS, settings.mixing_model, settings.units)
    model_of("pore_water_model", PORE_WATER_MODELS, settings.pore_water_model, settings.units)
    compensation = ("temperature_compensation",)
    named_in(TEMPERATURE_COMPENSATIONS, settings.temperature_compensation, compensation)


def _refuse_units(units: Units) -> None:
    """As refuse_units, with the quantity that is most likely meant by a name that is none."""
    known = [name for name, quantity in QUANTITIES.items() if quantity.unit]
    complaints = [
        Complaint(name, f"{shown(name)} is no quantity with a unit{meant}", ("units", name))
        for name in units
        if name not in known and (meant := hint(name, known))
    ]
    if complaints:
        raise ParameterError("units", complaints)
    refuse_units(units)


def named_in(registry: Registry[Any], name: str, place: tuple[str, ...]) -> Any:
    """The member of that name.

    Raises ParameterError with its place in the request and the nearest name there is.
    """
    if name in registry:
        return registry[name]
    known = [*registry, *([ALL] if registry is MIXING_MODELS else ())]
    meant = hint(name.lower(), known) or f"; choose one of {', '.join(known)}"
    detail = f"no {registry.family} is called {shown(name)}{meant}"
    raise ParameterError(place[0], [Complaint(name, detail, place)])


def _draws(settings: EstimatesSettings) -> Draws | None:
    asked = settings.propagation
    if asked.method == "first-order":
        return None
    return Draws(asked.draws, seed=asked.seed, kind="pseudo-random")


def _stated(body: Any) -> dict[str, float]:
    """The numbers a part of the request states; null counts as not stated."""
    return {
        name: value
        for name, value in body.model_dump(exclude_none=True).items()
        if isinstance(value, float | int)
    }


def soil_of(body: Any, units: Units) -> Soil:
    """A soil as a request describes it, completed; ``body`` is a ``SoilBody``.

    Raises ParameterError with the place of each complaint.
    """
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
    if body.texture is not None:
        named_in(TEXTURES, texture_key(body.texture), ("soil", "texture"))
    soil = describe(body.texture, given, spread)
    told = {name: text for name, text in (body.sources or {}).items() if name in given}
    return replace(soil, origins={**soil.origins, **told}) if told else soil


def model_of(
    section: str,
    registry: Registry[Any],
    named: str | ModelChoice | PoreWaterChoice | None,
    units: Units,
) -> tuple[str | None, dict[str, Any], float | None]:
    """Name, parameters in SI, and the caller's own standard error."""
    if named is None or isinstance(named, str):
        if named is not None and not _is_all(section, named):
            named_in(registry, named, (section,))
        return named, {}, None
    if _is_all(section, named.name):
        return named.name, _nothing_of_its_own(named), named.standard_error
    model: Relation = named_in(registry, named.name, (section, "name"))
    own = {n: v for n, v in (named.model_extra or {}).items() if n not in ECHOED}
    _refuse_revision(section, named, model.revision)
    known = {parameter.name: parameter for parameter in model.parameters}
    given: dict[str, Any] = {}
    complaints: list[Complaint] = []
    for name, value in own.items():
        about, _ = quantity_of(name)
        parameter = known.get(about) or known.get(name.removesuffix("_u"))
        if parameter is not None and not parameter.choices and not _is_number(value):
            detail = f"expected a number, found {shown(value)}"
            complaints.append(Complaint(name, detail, (section, name)))
        elif parameter is not None and about in QUANTITIES:
            given |= to_si(section, {name: value}, units)
        else:
            given[name] = value
    if complaints:
        raise ParameterError(section, complaints)
    return named.name, given, named.standard_error


def _is_all(section: str, name: str) -> bool:
    return section == "mixing_model" and name == ALL


def _nothing_of_its_own(named: ModelChoice | PoreWaterChoice) -> dict[str, Any]:
    """No parameters; whoever gives one means a model that is not named."""
    complaints = [
        Complaint(name, f"{name} belongs to one model; all takes none", ("mixing_model", name))
        for name in named.model_extra or {}
        if name not in ECHOED
    ]
    if complaints:
        raise ParameterError("mixing_model", complaints)
    return {}


def _is_number(value: Any) -> bool:
    return isinstance(value, float | int) and not isinstance(value, bool)


def _refuse_revision(section: str, named: ModelChoice | PoreWaterChoice, current: int) -> None:
    asked = (named.model_extra or {}).get("revision", current)
    if asked != current:
        detail = f"revision {shown(asked)} of {named.name} is not here; this service has {current}"
        place = (section, "revision")
        raise ParameterError(section, [Complaint("revision", detail, place)])


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
