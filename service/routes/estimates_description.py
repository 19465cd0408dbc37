"""How OpenAPI describes POST /v1/estimates: bodies, parameters, examples, answers."""

from typing import Any

from models.mixing import MIXING_MODELS
from models.salinity import PORE_WATER_MODELS
from service.formats import MEDIA_TYPES
from service.schemas.batch_query import ASIDE, PLACES, TEXTS, meaning
from service.schemas.estimates_described import answer_schema, request_schema


def _parameter(name: str) -> dict[str, Any]:
    kind = {"type": "string" if name in TEXTS else "number"}
    return {"name": name, "in": "query", "required": False, "description": meaning(name),
            "schema": kind}  # fmt: skip


_TEXT, _BYTES = {"schema": {"type": "string"}}, {"schema": {"type": "string", "format": "binary"}}
_TABLES: dict[str, Any] = {
    media_type: _TEXT if key in {"csv", "ndjson"} else _BYTES
    for key, media_type in MEDIA_TYPES.items()
}


def _own_parameters() -> list[dict[str, Any]]:
    """Parameters of single models, which the query takes where such a model is named."""
    takers: dict[str, list[str]] = {}
    told: dict[str, dict[str, Any]] = {}
    for registry in (MIXING_MODELS, PORE_WATER_MODELS):
        for model in registry.values():
            for parameter in model.parameters:
                if parameter.name in PLACES or parameter.name in ASIDE or parameter.supplied:
                    continue
                takers.setdefault(parameter.name, []).append(model.key)
                kind: dict[str, Any] = {"type": "number"}
                if parameter.choices:
                    kind = {"type": "string", "enum": list(parameter.choices)}
                told.setdefault(parameter.name, {"schema": kind, "meaning": parameter.meaning})
    return [
        {"name": name, "in": "query", "required": False, "schema": about["schema"],
         "description": f"of {', '.join(dict.fromkeys(takers[name]))}: {about['meaning']}; "
         f"its standard uncertainty is {name}_u"}
        for name, about in told.items()
    ]  # fmt: skip


DESCRIPTION: dict[str, Any] = {
    "parameters": [*map(_parameter, (*PLACES, *ASIDE)), *_own_parameters()],
    "requestBody": {
        "required": True,
        "description": "JSON says everything in its body. A table (CSV, NDJSON, Arrow, "
        "Parquet) holds readings only, everything else stands in the query; its other columns pass "
        "through. Columns `soil` and `probe` name what is stored, row by row: an empty cell stands "
        "for what the query describes, a name that is not stored gives its row the flag "
        "not-estimated, and all tables with such a column get the same columns. "
        "NDJSON: keys on lines that begin in the first 64 KiB decide what is read. "
        "`columns` names what a table is to get.",
        "content": {
            "application/json": {"schema": request_schema()},
            **_TABLES,
        },
    },
    "responses": {
        "200": {
            "description": "One answer per reading, in order, in the shape of the readings.",
            "headers": {
                "Row-Count": {"schema": {"type": "integer"}, "description": "rows of a table"},
                "Flagged-Count": {"schema": {"type": "integer"}, "description": "with a flag"},
                "Columns-Read": {
                    "schema": {"type": "string"},
                    "description": "columns of a table that were read; others passed through",
                },
                "Advisories": {
                    "schema": {"type": "string"},
                    "description": "codes of what a table must be read with; /v1/flags has texts",
                },
                "Remarks": {
                    "schema": {"type": "string"},
                    "description": "in words, of a table: columns that were not read and perhaps "
                    "meant, rows and values that cannot be used, units that are suspected",
                },
                "Not-Estimated": {
                    "schema": {"type": "string"},
                    "description": "soils and probes that rows name and that cannot be used, each "
                    "with its first line",
                },
            },
            "content": {
                "application/json": {"schema": answer_schema()},
                **_TABLES,
            },
        }
    },
}
