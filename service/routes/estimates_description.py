"""How OpenAPI describes POST /v1/estimates: bodies, parameters, examples, answers."""

from typing import Any

from service.formats import MEDIA_TYPES
from service.schemas.batch_query import ASIDE, PLACES, TEXTS, meaning
from service.schemas.estimates import answer_schema, request_schema


def _parameter(name: str) -> dict[str, Any]:
    kind = {"type": "string" if name in TEXTS else "number"}
    return {"name": name, "in": "query", "required": False, "description": meaning(name),
            "schema": kind}  # fmt: skip


_TABLE = {"schema": {"type": "string"}}

DESCRIPTION: dict[str, Any] = {
    "parameters": [_parameter(name) for name in (*PLACES, *ASIDE)],
    "requestBody": {
        "required": True,
        "description": "JSON says everything in its body. A table (CSV, NDJSON) holds readings "
        "only, everything else stands in the query; its other columns pass through.",
        "content": {
            "application/json": {"schema": request_schema()},
            **dict.fromkeys(MEDIA_TYPES.values(), _TABLE),
        },
    },
    "responses": {
        "200": {
            "description": "One answer per reading, in order, in the shape of the readings.",
            "headers": {
                "Row-Count": {"schema": {"type": "integer"}, "description": "rows of a table"},
                "Flagged-Count": {"schema": {"type": "integer"}, "description": "with a flag"},
            },
            "content": {
                "application/json": {"schema": answer_schema()},
                **dict.fromkeys(MEDIA_TYPES.values(), _TABLE),
            },
        }
    },
}
