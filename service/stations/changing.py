"""Changing a soil, a probe or a station: checks, preconditions, and a try again when it must be."""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from pydantic import ValidationError

from models.conversion import refuse_units
from models.errors import ModelError, ParameterError
from models.quantity import READING
from models.readings import quantity_of
from models.soil.contradictions import contradictions, is_inverted
from service.errors import NotFound, Unprocessable
from service.faults import Fault, hint, pointer, problems_of
from service.formats.raw_records import SETTINGS
from service.schemas.query import basis_of, settings_of, soil_of
from service.stations.bodies import BODIES
from service.stations.documents import Documents, Shelf
from service.stations.ingest.arrival import converter
from service.stations.problems import Conflicted, PreconditionFailed, PreconditionRequired
from service.stations.raw_settings import check_settings
from service.stations.settings import settings_document
from service.stations.station import faults_of_station, station_of
from service.store.errors import Changed, Stale
from service.store.interface import Document, Kind

PATIENCE = 5
_TAG = re.compile(r'"(\d{1,18})"')


@dataclass(frozen=True, slots=True)
class Wish:
    """What is to be changed, by whom, and on which condition."""

    kind: Kind
    name: str
    author: str | None
    if_match: str | None
    if_none_match: str | None
    body: Mapping[str, Any] | None
    """None: delete it."""


@dataclass(frozen=True, slots=True)
class Change:
    """What came of it."""

    document: Document
    created: bool = False


def checked(kind: Kind, given: Mapping[str, Any]) -> Mapping[str, Any]:
    """A body of the right form, as it is kept: what was not said is not in it.

    Raises Unprocessable with a pointer to every fault.
    """
    adapter = BODIES[kind]
    given = _in_own_units(given) if kind != "station" and "units" in given else given
    try:
        body = adapter.validate_python(given)
    except ValidationError as error:
        faults = problems_of(error, given, adapter)
        raise Unprocessable(f"the {kind} holds what cannot be used", faults) from None
    kept: Mapping[str, Any] = body.model_dump(mode="json", exclude_unset=True, by_alias=True)
    if kind == "station":
        return kept
    probe, soil = (kept, {}) if kind == "probe" else ({}, kept)
    check_settings(probe)
    _check_science(kind, settings_document(soil, probe, {}))
    return kept


def _in_own_units(given: Mapping[str, Any]) -> Mapping[str, Any]:
    """A soil or a probe whose quantities are in other units, in the unit of the API."""
    units = given["units"]
    if not isinstance(units, dict) or not all(isinstance(code, str) for code in units.values()):
        raise Unprocessable("expected UCUM codes", [Fault("expected an object", "#/units")])
    refuse_units(units)
    if given.get(SETTINGS):
        detail = f"units do not reach into {SETTINGS}: send both in the unit of the API"
        raise Unprocessable(detail, [Fault(f"{detail}, and leave out units", "#/units")])
    found: dict[str, Any] = {}
    for name, value in given.items():
        about, is_width = quantity_of(name)
        if name != "units" and about in units and type(value) in {int, float}:
            value = float(converter(about, units[about], is_width=is_width)(value))  # noqa: PLW2901
        if name != "units":
            found[name] = value
    return found


def _check_science(kind: Kind, document: Mapping[str, Any]) -> None:
    """Gates, names and parameters, as a request for estimates would meet them."""
    everything = (*READING, *(f"{name}_u" for name in READING))
    if kind == "probe":
        document = {**document, "mixing_model": "topp-1980"}  # any that asks nothing of a probe
    try:
        settings = settings_of(document)
        if is_inverted(soil_of(settings.soil, {})):
            detail = "field_capacity must be above wilting_point: are they exchanged?"
            raise Unprocessable(detail, [Fault(detail, "#/field_capacity")])
        basis_of(settings, everything)
    except ParameterError as error:
        faults = [
            Fault(c.detail, pointer(c.place[1:] if c.place[:1] == (kind,) else c.place))
            for c in error.complaints
        ]
        raise Unprocessable(str(error), faults) from None
    except ModelError as error:
        raise Unprocessable(str(error), [Fault(str(error), "#")]) from None


def advisories_of(kind: Kind, body: Mapping[str, Any]) -> list[dict[str, str]]:
    """What a kept document should be read with: parts of a soil that contradict each other."""
    if kind != "soil":
        return []
    told = contradictions(soil_of(settings_of(settings_document(body, {}, {})).soil, {}))
    return [{"code": "soil-contradicts-itself", "text": text} for text in told]


def apply(shelf: Shelf, wish: Wish) -> Change:
    """Make the change. Blocks.

    Raises NotFound, Unprocessable, Conflicted, PreconditionFailed, PreconditionRequired.
    """
    for _ in range(PATIENCE):
        _, documents = shelf.fresh()
        current = documents.find(wish.kind, wish.name)
        _check_condition(wish, current, documents)
        if current is not None and wish.body is not None and current.body == wish.body:
            return Change(current)
        if current is not None and wish.body is not None and wish.if_match is None:
            raise PreconditionRequired(
                f"there is a {wish.kind} {wish.name} with other content at revision "
                f'{current.revision}: send If-Match: "{current.revision}" to replace it',
                headers={"ETag": f'"{current.revision}"'},
            )
        _check_references(wish, documents)
        new = Document(wish.kind, wish.name, 0, 0, wish.author, wish.body)
        try:
            kept = shelf.store.put(new, documents.revision, current.revision if current else 0)
        except (Stale, Changed):
            continue
        shelf.fresh()  # readings that come next are checked against it
        return Change(kept, created=current is None)
    raise Conflicted("soils, probes and stations keep changing: try again")


def _check_condition(wish: Wish, current: Document | None, documents: Documents) -> None:
    if current is None and wish.body is None:
        near = hint(wish.name, documents.by_kind[wish.kind])
        raise NotFound(f"there is no {wish.kind} {wish.name}{near}")
    if wish.if_none_match is not None and current is not None and wish.body is not None:
        raise PreconditionFailed(f"there is a {wish.kind} {wish.name} already")
    if wish.if_match is None:
        return
    if current is None:
        raise PreconditionFailed(f"there is no {wish.kind} {wish.name} to be replaced")
    asked = wish.if_match.strip()
    if asked != "*" and str(current.revision) not in _TAG.findall(asked):
        found = f"is at revision {current.revision}, not {asked[:80]}"
        if asked.isdecimal():
            found = f"is at revision {current.revision}; send the tag with its quotes: "
            found += f'If-Match: "{asked[:18]}"'
        raise PreconditionFailed(
            f"the {wish.kind} {wish.name} {found}",
            headers={"ETag": f'"{current.revision}"'},
        )


def _check_references(wish: Wish, documents: Documents) -> None:
    """Names that a station gives must be there, and what stations name must stay."""
    if wish.kind == "station" and wish.body is not None:
        station = station_of(Document("station", wish.name, 0, 0, None, wish.body))
        soils, probes = documents.by_kind["soil"], documents.by_kind["probe"]
        faults = faults_of_station(station, soils, probes, wish.body.get("sentinels"))
        if faults:
            raise Unprocessable("the station holds what cannot be used", faults)
    elif wish.kind != "station" and wish.body is None:
        for name in documents.by_kind["station"]:
            known = documents.station(name)
            if known and any(getattr(i, wish.kind) == wish.name for i in known.installations):
                raise Conflicted(
                    f"the station {name} has an installation with the {wish.kind} {wish.name}, and "
                    "readings of that time are estimated with it: what is over keeps its "
                    f"installation and ends it with until (PUT /v1/stations/{name}); one that "
                    "never was is left out of the station first"
                )
