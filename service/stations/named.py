"""Stored soils and probes in a request for estimates: a name in place of a description."""

from collections.abc import Mapping
from typing import Any

from models.conversion import Units
from models.quantity import QUANTITIES
from models.readings import quantity_of
from models.units import UNITS
from service.errors import Unprocessable
from service.faults import Fault, hint, shown
from service.formats.raw_records import SETTINGS
from service.stations.bodies import MODEL_WORDS
from service.stations.documents import Documents
from service.stations.raw_settings import carried, settings_for
from service.store.interface import Kind

KINDS: tuple[Kind, ...] = ("soil", "probe")


def names_something(document: Mapping[str, Any]) -> bool:
    """Whether a request names a stored soil or probe, so that the store must be asked."""
    return any(isinstance(document.get(kind), str) for kind in KINDS)


def with_stored(document: Mapping[str, Any], documents: Documents) -> dict[str, Any]:
    """The request with descriptions in place of names.

    A stored soil brings its models and what it assumes along, a stored probe what raw records are
    read with; what the request states beats them.
    Raises Unprocessable for a name that is not there.
    """
    found = dict(document)
    units = document.get("units", {})
    units = units if isinstance(units, dict) else {}
    for kind in KINDS:
        name = document.get(kind)
        if not isinstance(name, str):
            continue
        stored = documents.find(kind, name)
        if stored is None or stored.body is None:
            near = hint(name, documents.by_kind[kind])
            detail = f"there is no stored {kind} {shown(name)}{near}"
            raise Unprocessable(detail, [Fault(detail, f"#/{kind}")])
        body = {key: value for key, value in stored.body.items() if key not in {"title", SETTINGS}}
        for word in MODEL_WORDS:
            value = body.pop(word, None)
            if value is not None:
                own = _in_units(value, units) if isinstance(value, Mapping) else value
                found.setdefault(word, own)
        if kind == "probe":
            _add_settings(found, stored.body, units)
        found[kind] = _in_units(body, units)
    return found


def _add_settings(found: dict[str, Any], probe: Mapping[str, Any], units: Units) -> None:
    """What the raw records of the request are read with, where it does not say so itself."""
    stated = found.get(SETTINGS, {})
    kinds = carried(found.get("readings"))
    settings = {kind: own for kind in kinds if (own := settings_for(probe, kind)) is not None}
    if not settings or not isinstance(stated, dict) or not settings.keys() - stated.keys():
        return
    for name in _IN_SETTINGS & units.keys():
        detail = (
            "the stored probe says in the unit of the API how its raw records are read: send "
            f"{name} in it as well, or describe the probe in the request"
        )
        raise Unprocessable(detail, [Fault(detail, f"#/units/{name}")])
    found[SETTINGS] = {**settings, **stated}


_IN_SETTINGS = frozenset({"frequency", "temperature", "probe_length", "probe_constant"})
"""Quantities whose unit in a request is that of its raw records and their settings as well."""


def _in_units(body: Mapping[str, Any], units: Units) -> dict[str, Any]:
    """A stored description in the units of the request whose numbers it stands among."""
    found = dict(body)
    for name, value in body.items():
        about, is_width = quantity_of(name)
        quantity = QUANTITIES.get(about)
        if quantity is None or type(value) not in {int, float}:
            continue
        if units.get(about) not in {unit.code for unit in quantity.units}:
            continue  # refused with the other settings
        own, asked = UNITS[quantity.unit], UNITS[units[about]]
        if is_width:
            found[name] = float(asked.width_from_si(own.width_to_si(value)))
        else:
            found[name] = float(asked.from_si(own.to_si(value)))
    return found
