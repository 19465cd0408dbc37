"""The query of a batch, in the flat words of the vocabulary, as the body of a JSON request."""

import re
from collections.abc import Callable, Iterable, Mapping
from types import MappingProxyType
from typing import Any

from models.mixing import MIXING_MODELS
from models.quantity import NOISE, PROBE, READING, SOIL
from models.registry import Registry
from models.salinity import PORE_WATER_MODELS
from service.errors import Unprocessable
from service.faults import Fault, nearest, shown
from service.schemas.words import described

_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?")
_FAMILIES: Mapping[str, Registry[Any]] = MappingProxyType(
    {"mixing_model": MIXING_MODELS, "pore_water_model": PORE_WATER_MODELS}
)
Place = tuple[str, str, Callable[[str, str], Any]]
ASIDE = ("format", "strict", "columns")
"""Parameters of the answer rather than of the estimate."""


def document_of(pairs: Iterable[tuple[str, str]]) -> dict[str, Any]:
    """A JSON request without readings, from the parameters of a query.

    Raises Unprocessable with every parameter that is unknown, repeated, or not a number.
    """
    faults: list[Fault] = []
    given: dict[str, str] = {}
    for name, text in pairs:
        if name in given:
            faults.append(Fault(f"{name} is given twice", f"?{name}"))
        given[name] = text
    places = {**PLACES, **_model_places(given)}
    faults += _described_twice(given, places)
    document: dict[str, Any] = {}
    for name, text in [] if faults else given.items():
        if name not in ASIDE:
            faults += _put(document, places, name, text)
    if faults:
        raise Unprocessable("the query holds what cannot be used", faults)
    for section in _FAMILIES:
        own = document.pop(f"{section}.own", None)
        if own is not None:
            document[section] = {"name": given.get(section), **own}
    return document


def _described_twice(given: Mapping[str, str], places: Mapping[str, Place]) -> list[Fault]:
    """Words about a soil or probe that is named."""
    return [
        Fault(f"{kind} names a stored one, which {name} would describe again", f"?{name}")
        for kind in NAMED & given.keys()
        for name in given
        if name != kind and name in places and places[name][0] == kind
    ]


def _put(
    document: dict[str, Any], places: Mapping[str, Place], name: str, text: str
) -> list[Fault]:
    """Put one parameter where it stands in a JSON request, or say what is wrong with it."""
    if name not in places:
        return [_stranger(name, [*places, *ASIDE])]
    section, key, reader = places[name]
    try:
        value = reader(name, text)
    except ValueError as error:
        return [Fault(str(error), f"?{name}")]
    (document.setdefault(section, {}) if section else document)[key] = value
    return []


def _model_places(given: Mapping[str, str]) -> dict[str, Place]:
    """Parameters that are the named models' own and nothing else's."""
    words: dict[str, Place] = {}
    for section, registry in _FAMILIES.items():
        name = given.get(section)
        if name is None or name not in registry:
            continue
        own = f"{section}.own"
        for parameter in registry[name].parameters:
            if parameter.name not in PLACES:
                reader = _text if parameter.choices else _number
                words[parameter.name] = (own, parameter.name, reader)
                words[f"{parameter.name}_u"] = (own, f"{parameter.name}_u", _number)
    return words


def _text(_: str, text: str) -> str:
    return text


def _with_u(names: Iterable[str], spread: Iterable[str]) -> list[str]:
    return [*names, *(f"{name}_u" for name in spread)]


def _number(name: str, text: str) -> float:
    if not _NUMBER.fullmatch(text.strip()):
        comma = " with a point, not a comma" if "," in text else ""
        raise ValueError(f"{name}: expected a number{comma}, found {shown(text)}")
    return float(text)


def _whole(name: str, text: str) -> int:
    if not text.strip().isdecimal():
        raise ValueError(f"{name}: expected a whole number, found {shown(text)}")
    return int(text)


def _units(_: str, text: str) -> Mapping[str, str]:
    units: dict[str, str] = {}
    for pair in text.split(","):
        name, colon, code = pair.partition(":")
        if not colon:
            raise ValueError(
                f"units: expected quantity:unit pairs such as bulk_conductivity:mS/m, "
                f"found {shown(pair)}"
            )
        if name.strip() in units:
            raise ValueError(f"units: {name.strip()} is given twice, as {units[name.strip()]} and "
                             f"{code.strip()}: give it once")  # fmt: skip
        units[name.strip()] = code.strip()
    return units


def _stranger(name: str, known: Iterable[str]) -> Fault:
    if name == "temperature":
        detail = "temperature is a column of the table; for rows without one, assume_temperature"
        return Fault(detail, f"?{name}")
    if name in READING or name.removesuffix("_u") in READING:
        return Fault(f"{name} is a column of the table, one value for each reading", f"?{name}")
    if name in JSON_ONLY:
        detail = f"{name} is answered in JSON alone: send the readings as application/json"
        return Fault(detail, f"?{name}")
    meant = nearest(name, known)
    hint = f"did you mean {meant}?" if meant else "the description at /docs lists what is known"
    return Fault(f"unknown parameter {shown(name)}; {hint}", f"?{name[:80]}")


JSON_ONLY = frozenset({"budget", "validate", "explain"})
"""What a table has no room for."""
NAMED = frozenset({"soil", "probe"})
"""Parameters that name what is stored, in place of the words that describe it."""

PLACES: Mapping[str, Place] = MappingProxyType(
    {name: ("soil", name, _number) for name in _with_u(SOIL, SOIL)}
    | {name: ("probe", name, _number) for name in _with_u(PROBE, (*PROBE, *NOISE))}
    | {
        "texture": ("soil", "texture", _text),
        "soil": ("", "soil", _text),
        "probe": ("", "probe", _text),
        "mixing_model": ("", "mixing_model", _text),
        "pore_water_model": ("", "pore_water_model", _text),
        "temperature_compensation": ("", "temperature_compensation", _text),
        "standard_error": ("mixing_model.own", "standard_error", _number),
        "pore_water_standard_error": ("pore_water_model.own", "standard_error", _number),
        "coverage_probability": ("", "coverage_probability", _number),
        "propagation": ("propagation", "method", _text),
        "draws": ("propagation", "draws", _whole),
        "seed": ("propagation", "seed", _whole),
        "assume_temperature": ("assume", "temperature", _number),
        "assume_temperature_u": ("assume", "temperature_u", _number),
        "units": ("", "units", _units),
    }
)
"""Where each parameter stands in a JSON request: section, key, and how its text is read."""

TEXTS = frozenset(n for n, (_, _, reader) in PLACES.items() if reader not in (_number, _whole)) | {
    *ASIDE
}
"""Parameters that are no numbers."""

_MEANINGS: Mapping[str, str] = MappingProxyType(
    {
        "mixing_model": "name of a mixing model; left out, the service chooses and says why",
        "pore_water_model": "name of a pore-water model; left out, one is chosen where there is "
        "bulk_conductivity",
        "temperature_compensation": "brings conductivities to 25 Cel",
        "pore_water_standard_error": "replaces the pore-water model's own uncertainty [1]",
        "soil": "name of a stored soil, in place of its description",
        "probe": "name of a stored probe, in place of its description",
        "texture": "USDA texture class of the soil, or peat",
        "standard_error": "replaces the model's own uncertainty [m3/m3]",
        "coverage_probability": "of the interval; 0.95 unless given",
        "propagation": "first-order or monte-carlo",
        "draws": "of a Monte Carlo propagation; 10000 unless given",
        "seed": "of the draws; 1 unless given",
        "assume_temperature": "temperature where a row has none [Cel]",
        "assume_temperature_u": "standard uncertainty of it [K]; 7 unless given",
        "units": "quantity:unit pairs, comma-separated: bulk_conductivity:mS/m",
        "format": "json, csv, ndjson, arrow or parquet; beats Accept",
        "columns": "comma-separated names of the columns a table is to get, of those it would get "
        "anyway; flags always come",
        "strict": "true: the first cell that cannot be read ends the batch with 422",
    }
)


def meaning(name: str) -> str:
    """What a parameter says, in a line."""
    if name in _MEANINGS:
        return _MEANINGS[name]
    about = name.removesuffix("_u")
    return described(name) if about == name else f"standard uncertainty of {about}"
