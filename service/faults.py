"""What is wrong with a request, item by item: where, what was expected, what was found."""

import difflib
import re
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import asdict, dataclass
from typing import Any

from pydantic import TypeAdapter, ValidationError

LONGEST = 80
"""Characters of a value that an answer repeats."""

Location = tuple[int | str, ...]


@dataclass(frozen=True, slots=True)
class Fault:
    """One item that is wrong, and the JSON pointer of its place in the request."""

    detail: str
    pointer: str

    def as_json(self) -> dict[str, str]:
        """As an answer shows it."""
        return asdict(self)


def problems_of(
    error: ValidationError, document: Any = None, adapter: TypeAdapter[Any] | None = None
) -> list[Fault]:
    """Every complaint of ``error``, each saying how to mend it.

    ``document`` is what was validated: with it, pointers hold nothing but places of the request
    (pydantic adds the names of union members). ``adapter`` is what it was validated against: with
    it, an unknown key is answered with the nearest known one.
    """
    return faults_of(error.errors(include_url=False), document, adapter)


def faults_of(
    items: Iterable[Mapping[str, Any]],
    document: Any = None,
    adapter: TypeAdapter[Any] | None = None,
) -> list[Fault]:
    """As problems_of, from pydantic's own list of complaints."""
    schema = adapter.json_schema() if adapter else {}
    found: dict[Location, Mapping[str, Any]] = {}
    for item in items:
        place = _place(item, document)
        if place not in found or _wrong_kind(found[place]):
            found[place] = item
    parents = {place[:depth] for place in found for depth in range(len(place))}
    return [
        Fault(_detail(place, item, schema), pointer(place))
        for place, item in found.items()
        if not (_wrong_kind(item) and place in parents)
    ]


def pointer(place: Iterable[int | str]) -> str:
    """RFC 6901 pointer of a place, as a URI fragment: #/soil/clay."""
    steps = (str(step).replace("~", "~0").replace("/", "~1") for step in place)
    return shortened("#" + "".join(f"/{step}" for step in steps))


def shortened(text: str) -> str:
    """At most LONGEST characters, fit for UTF-8 whatever the request held."""
    text = text if len(text) <= LONGEST else text[: LONGEST - 1] + "…"
    return text.encode("utf-8", "replace").decode("utf-8")


def nearest(name: str, known: Iterable[str]) -> str | None:
    """The known name that was most likely meant."""
    names, written = list(known), name[:LONGEST]
    close = difflib.get_close_matches(written, names, n=4, cutoff=0.6)
    alike = [other for other in close if other.endswith("_u") == written.endswith("_u")]
    begins = written.casefold()
    begun = [other for other in names if len(begins) > 3 and other.startswith(begins)]
    return next(iter(alike or close or begun), None)


def hint(name: str, known: Iterable[str]) -> str:
    """The end of a sentence about an unknown name."""
    meant = nearest(name, known)
    return f"; did you mean {meant}?" if meant else ""


def shown(value: Any) -> str:
    """A value as a sentence can hold it; of a whole list or object only what it is."""
    if isinstance(value, str):
        return f'"{shortened(value)}"'
    if isinstance(value, Mapping):
        return "an object"
    if isinstance(value, Sequence):
        return "a list"
    if isinstance(value, int) and value.bit_length() > 4 * LONGEST:
        return "a number of too many digits"
    return _JSON_WORDS.get(str(value), shortened(str(value)))


_JSON_WORDS: Mapping[str, str] = {
    "True": "true", "False": "false", "None": "null",
    "nan": "NaN", "inf": "Infinity", "-inf": "-Infinity",
}  # fmt: skip


def _wrong_kind(item: Mapping[str, Any]) -> bool:
    """Whether a union member complains that it was not the one meant."""
    return str(item["type"]).endswith("_type")


def _place(item: Mapping[str, Any], document: Any) -> Location:
    """The steps to an item that lead through ``document``, without union members' names."""
    location: Location = item["loc"]
    if document is None:
        return location
    place: list[int | str] = []
    for step in location:
        if _leads_on(document, step):
            document = document[step]
        elif not (item["type"] == "missing" and step is location[-1]):
            continue
        place.append(step)
    return tuple(place)


def _leads_on(document: Any, step: int | str) -> bool:
    if isinstance(document, Mapping):
        return step in document
    return isinstance(document, list) and isinstance(step, int) and step < len(document)


EXPECTED: Mapping[str, str] = {
    "float_type": "a number",
    "float_parsing": "a number",
    "finite_number": "a finite number",
    "int_type": "a whole number",
    "int_parsing": "a whole number",
    "int_from_float": "a whole number",
    "bool_type": "true or false",
    "bool_parsing": "true or false",
    "string_type": "text",
    "list_type": "a list",
    "tuple_type": "a list",
    "dict_type": "an object",
    "model_type": "an object",
    "model_attributes_type": "an object",
    "dataclass_type": "an object",
    "greater_than": "a number greater than {gt}",
    "greater_than_equal": "a number of at least {ge}",
    "less_than": "a number less than {lt}",
    "less_than_equal": "a number of at most {le}",
    "literal_error": "{expected}",
    "enum": "{expected}",
    "too_short": "at least {min_length} items",
    "too_long": "at most {max_length} items",
    "string_too_short": "at least {min_length} characters",
    "string_too_long": "at most {max_length} characters",
    "string_pattern_mismatch": "text like {pattern}",
}
"""What pydantic's complaints mean, in words; the names in braces come with the complaint."""


def _detail(place: Location, item: Mapping[str, Any], schema: Mapping[str, Any]) -> str:
    kind, given, context = str(item["type"]), item["input"], item.get("ctx", {})
    if kind == "missing":
        return f"{place[-1] if place else 'a value'} is missing"
    if kind in {"extra_forbidden", "unexpected_keyword_argument"}:
        return _unknown(str(place[-1]), sorted(set(_keys(schema, schema, place[:-1]))))
    if kind in {"value_error", "assertion_error"}:
        return str(context.get("error", item["msg"]))
    if kind in {"too_short", "too_long"}:
        return f"expected {EXPECTED[kind].format_map(context)}, found {context['actual_length']}"
    if kind in EXPECTED:
        choices = re.findall("'([^']*)'", context.get("expected", ""))
        meant = hint(str(given), choices) if choices else ""
        expected = EXPECTED[kind].format_map(context) + _or_else(place, kind)
        return f"expected {expected}, found {shown(given)}{meant}{_percent(place, given)}"
    message = re.sub(r"^(Input|Value) should be ", "expected ", str(item["msg"]))
    return f"{message[:1].lower()}{message[1:]}, found {shown(given)}"


def _or_else(place: Location, kind: str) -> str:
    """What may stand in place of an object at some places."""
    name = place[-1] if place else None
    stored = name in {"soil", "probe"} and kind.endswith("_type")
    return f" or the name of a stored {name}" if stored else ""


def _percent(place: Location, given: Any) -> str:
    """What a share that is written in per cent should be."""
    shares = {"coverage_probability", "propagation_velocity_factor"}
    if place[-1:] == () or place[-1] not in shares or not isinstance(given, float | int):
        return ""
    return f"; for {given:g} % send {given / 100:g}" if 1 < given < 100 else ""


def _unknown(name: str, known: Sequence[str]) -> str:
    listed = f"; known are {', '.join(known)}" if known else ""
    return f"unknown key {shown(name)}{hint(name, known) or listed}"


def _keys(node: Any, root: Mapping[str, Any], place: Location) -> Iterator[str]:
    """Keys that a JSON schema knows at a place, over all its alternatives."""
    if not isinstance(node, Mapping):
        return
    if reference := node.get("$ref"):
        yield from _keys(root["$defs"][reference.rpartition("/")[2]], root, place)
    for branch in (*node.get("anyOf", ()), *node.get("oneOf", ()), *node.get("allOf", ())):
        yield from _keys(branch, root, place)
    if not place:
        yield from node.get("properties", ())
    elif isinstance(place[0], int):
        yield from _keys(node.get("items"), root, place[1:])
    else:
        inside = node.get("properties", {}).get(place[0], node.get("additionalProperties"))
        yield from _keys(inside, root, place[1:])
