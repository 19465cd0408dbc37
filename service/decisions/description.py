"""How OpenAPI describes the requests and answers of decisions."""

from collections.abc import Iterable, Mapping
from typing import Any

from pydantic import TypeAdapter

from models.decisions.terms import WORDS
from service.decisions.fields import word
from service.decisions.told import ENDS

JSON = "application/json"
NUMBER = {"type": ["number", "null"]}
FLAGS = {
    "type": "array",
    "items": {"type": "string"},
    "description": "what is amiss with the row, as /v1/flags explains",
}


def row_schema(names: Iterable[str], more: Mapping[str, Any]) -> dict[str, Any]:
    """JSON schema of one row: numbers with bands, and what else it holds."""
    numbers: dict[str, Any] = {}
    for name in names:
        numbers |= {name + end: dict(NUMBER) for end in ENDS}
        numbers[name]["description"] = word(name)
        numbers[f"{name}_u"]["description"] = f"standard uncertainty [{WORDS[name].unit}]"
    rest = {
        "used": {
            "type": "object",
            "description": "every number the row rests on, with its _u; sources says where each "
            "came from",
        },
        "flags": FLAGS,
    }
    properties = {
        "name": {"type": "string"}, "time": {"type": "string"}, **numbers, **more, **rest,
    }  # fmt: skip
    return {"type": "object", "required": ["used", "flags"], "properties": properties}


def answer_schema(noun: str, row: Mapping[str, Any], more: Mapping[str, Any]) -> dict[str, Any]:
    """JSON schema of an answer; noun: key of its rows."""
    return {
        "type": "object",
        "required": [noun, "units", "coverage_probability", "advisories"],
        "properties": {
            noun: {"oneOf": [{"type": "array", "items": dict(row)}, dict(row)]},
            "units": {"type": "object", "additionalProperties": {"type": "string"}},
            **more,
            "coverage_probability": {"type": "number"},
            "advisories": {"type": "array", "items": {"type": "object"}},
        },
    }


def described(
    adapter: TypeAdapter[Any], about: str, answer: Mapping[str, Any], told: str
) -> dict[str, Any]:
    """What a route adds to its description; parts of the body stand among the components."""
    schema = adapter.json_schema(ref_template="#/components/schemas/{model}")
    schema.pop("$defs", None)
    return {
        "requestBody": {
            "required": True, "description": about, "content": {JSON: {"schema": schema}},
        },
        "responses": {
            "200": {"description": told, "content": {JSON: {"schema": dict(answer)}}},
        },
    }  # fmt: skip
