"""Words of an estimate in the query of a question: refused where no stored reading can heed them.

What is wrong with a word by itself is refused whatever is stored. What some of the soils and
probes of a station cannot be estimated with is told by the rows it is about; only where that holds
for all of them it is the question that is refused, with the sentence POST /v1/estimates has for it.
"""

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from models.conversion import to_si
from models.errors import ModelError, ParameterError
from models.mixing import MIXING_MODELS
from models.quantity import QUANTITIES
from models.registry import Registry
from models.salinity import PORE_WATER_MODELS
from service.errors import Unprocessable
from service.faults import Fault, hint, pointer, shown
from service.schemas.batch_query import PLACES
from service.schemas.estimates import ALL, EstimatesSettings, model_name
from service.schemas.query import refuse_unknown_names, settings_of, soil_of
from service.stations.documents import Documents
from service.stations.settings import basis_for
from service.store.interface import RAW, Channel

Words = Mapping[str, Any]
_NAMES: Mapping[tuple[str, ...], str] = {
    (section.removesuffix(".own"), key) if section else (key,): name
    for name, (section, key, _) in PLACES.items()
}
"""Parameters of a query by their place in a JSON request."""
_ONE = "one mixing model at a time; all of them side by side are at POST /v1/estimates"


def refuse_words(
    asked: Words, documents: Documents, channels: Iterable[Channel] = (), upto: int | None = None
) -> None:
    """Refuse words that cannot be used by themselves, or with none of the series.

    asked: what of a request for estimates the question states, in the unit of the API.
    upto: the revision whose columns a series is taken to hold.
    Raises Unprocessable, each place as the query has it.
    """
    if not asked:
        return
    try:
        _refuse_alone(asked, documents)
        first = None
        for soil, probe, columns in _parts(channels, documents, asked, upto):
            try:
                basis_for(soil, probe, asked, columns)
            except (ModelError, Unprocessable) as error:
                first = first or error
            else:
                return
        if first is not None:
            raise first
    except ModelError as error:
        complaints = error.complaints if isinstance(error, ParameterError) else ()
        faults = [Fault(c.detail, pointer(c.place)) for c in complaints]
        raise Unprocessable(str(error), in_query(faults, asked)) from None
    except Unprocessable as error:
        raise Unprocessable(error.detail, in_query(error.errors, asked)) from None


def in_query(faults: Iterable[Fault], asked: Words) -> list[Fault]:
    """Faults of a JSON request with the places of the query it came from."""
    return [Fault(fault.detail, _place(fault.pointer, asked)) for fault in faults]


def named_soil(asked: Words) -> str | None:
    """The stored soil that stands in place of the installed ones; None where none does."""
    soil = asked.get("soil")
    return soil if isinstance(soil, str) else None


def _refuse_alone(asked: Words, documents: Documents) -> None:
    """What is wrong whatever the readings, soils and probes are."""
    name = named_soil(asked)
    if name is not None and documents.find("soil", name) is None:
        detail = f"there is no stored soil {shown(name)}{hint(name, documents.by_kind['soil'])}"
        raise Unprocessable(detail, [Fault(detail, "?soil")])
    settings = settings_of(_with_models(asked))
    refuse_unknown_names(settings)
    if model_name(settings) == ALL:
        raise Unprocessable(_ONE, [Fault(_ONE, "?mixing_model")])
    _refuse_values(settings)


def _with_models(asked: Words) -> dict[str, Any]:
    """The words; one that replaces a part of a stored model, named there, is given any name."""
    found = dict(asked)
    if named_soil(asked) is not None:
        del found["soil"]
    for section, registry in _FAMILIES.items():
        own = found.get(section)
        if isinstance(own, Mapping) and own.get("name") is None:
            found[section] = {**own, "name": next(iter(registry))}
    return found


def _refuse_values(settings: EstimatesSettings) -> None:
    for section in ("probe", "assume"):
        body = getattr(settings, section).model_dump(exclude_none=True)
        stated = {name: v for name, v in body.items() if isinstance(v, int | float)}
        to_si(section, stated, {})
    soil: Any = settings.soil
    stated = soil.model_dump(exclude_none=True)
    if all(name.removesuffix("_u") in stated for name in stated.keys() & _WIDTHS):
        soil_of(soil, {})  # an uncertainty alone is of what a stored soil says


_FAMILIES: Mapping[str, Registry[Any]] = {
    "mixing_model": MIXING_MODELS, "pore_water_model": PORE_WATER_MODELS,
}  # fmt: skip
_WIDTHS = frozenset(f"{name}_u" for name in QUANTITIES)


def _parts(
    channels: Iterable[Channel], documents: Documents, asked: Words, upto: int | None
) -> Iterator[tuple[Words, Words, frozenset[str]]]:
    """Soil, probe and columns of whatever was installed where there are readings.

    A series with raw records is not judged: what they tell is not known before they are read.
    """
    seen = set()
    for channel in channels:
        held = channel.held_at(upto)
        station = documents.station(channel.station)
        if station is None or not held or RAW in held:
            continue
        for item in station.installed(channel):
            part = (named_soil(asked) or item.soil, item.probe, held - {"depth"})
            soil, probe = documents.find("soil", part[0]), documents.find("probe", part[1])
            if part not in seen and soil is not None and probe is not None:
                seen.add(part)
                yield soil.body or {}, probe.body or {}, part[2]


def _place(place: str, asked: Words) -> str:
    """?bulk_density of #/soil/bulk_density; a parameter of a model is a word of its own."""
    if place.startswith("?"):
        return place
    section, *rest = place.removeprefix("#/").split("/")
    own = asked.get(section)
    if rest and isinstance(own, Mapping) and rest[0] in own and rest[0] != "name":
        return f"?{_NAMES.get((section, rest[0]), rest[0])}"
    found = _NAMES.get((section, *rest[:1])) or _NAMES.get((section,))
    if section == "propagation" and found is None:
        found = "propagation"
    return f"?{found or section}"
