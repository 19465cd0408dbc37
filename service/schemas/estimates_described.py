"""What POST /v1/estimates takes and answers, as JSON schema."""

from collections.abc import Mapping
from typing import Any

from models.quantity import NOISE, QUANTITIES, READING, band_names
from service.schemas.estimates import ESTIMATED, RAW, SETTINGS
from service.schemas.words import described


def reading_schema() -> Mapping[str, Any]:
    """JSON schema of the readings: a list of objects, or one object of arrays."""
    number = {"type": ["number", "null"]}
    text = {"type": ["string", "null"]}
    cells: dict[str, Any] = {}
    for name in READING:
        kind = number if QUANTITIES[name].unit else text
        cells[name] = {**kind, "description": described(name)}
        if name in NOISE:
            cells[f"{name}_u"] = {**number, "description": f"standard uncertainty of {name}"}
    for name, where in RAW.items():
        told = f"raw record in place of a permittivity: an item of {where}"
        cells[name] = {"type": ["object", "null"], "description": told}
    row = {"type": "object", "properties": cells, "additionalProperties": False}
    columns = {
        "type": "object",
        "properties": {
            name: {"type": "array", "items": {"type": cell["type"]}} for name, cell in cells.items()
        },
        "additionalProperties": False,
    }
    return {"oneOf": [{"type": "array", "items": row, "minItems": 1}, columns]}


def request_schema() -> dict[str, Any]:
    """JSON schema of the whole JSON body."""
    schema = SETTINGS.json_schema(ref_template="#/components/schemas/{model}")
    schema.pop("$defs", None)
    schema["properties"] = {**schema["properties"], "readings": reading_schema()}
    told = (
        "what the raw records of a kind have in common, as their own path takes it beside them; "
        "`units` names the units of their lengths too, as sample_length"
    )
    schema["properties"]["raw_records"] = {
        "type": "object",
        "description": told,
        "properties": {name: {"type": "object"} for name in RAW},
    }
    for kind in ("soil", "probe"):
        inline = schema["properties"][kind]
        stored = {"type": "string", "description": f"name of a stored {kind}"}
        about = {key: inline.pop(key) for key in ("description", "default") if key in inline}
        schema["properties"][kind] = {"anyOf": [inline, stored], **about}
    schema["required"] = ["readings"]
    return schema


def answer_schema() -> dict[str, Any]:
    """JSON schema of the JSON answer."""
    row = {
        "type": "object",
        "properties": {
            **{
                name: {"type": ["number", "null"]}
                for quantity in ESTIMATED
                for name in band_names(quantity)
            },
            "flags": {"type": "array", "items": {"type": "string"}},
        },
    }
    advisory = {
        "type": "object",
        "properties": {"code": {"type": "string"}, "text": {"type": "string"}},
    }
    return {
        "type": "object",
        "required": ["estimates", "units", "mixing_model", "soil", "advisories"],
        "properties": {
            "estimates": {
                "description": "rows, or columns of equal length: as the readings came",
                "oneOf": [{"type": "array", "items": row}, {"type": "object"}],
            },
            "units": {"type": "object", "additionalProperties": {"type": "string"}},
            "mixing_model": {"type": "object"},
            "soil": {"type": "object"},
            "probe": {"type": "object"},
            "assume": {"type": "object"},
            "coverage_probability": {"type": "number"},
            "propagation": {"type": "object"},
            "advisories": {"type": "array", "items": advisory},
        },
    }
