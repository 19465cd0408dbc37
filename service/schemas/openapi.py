"""The API's own description: what FastAPI finds out, with our problems in place of its own."""

from collections.abc import Iterator
from typing import Any

from fastapi import FastAPI
from fastapi.routing import APIRoute
from pydantic import TypeAdapter

from service.calibrations.bodies import CALIBRATIONS
from service.decisions.adapters import BODIES as DECISIONS
from service.errors import MEDIA_TYPE, PROBLEMS
from service.examples import examples, show
from service.schemas.estimates import SETTINGS
from service.spectra.bodies import SPECTRA
from service.stations.bodies import BODIES as STORED
from service.sweeps.bodies import REFLECTIONS, SCATTERING
from service.waveforms.bodies import WAVEFORMS

REFERENCE = "#/components/schemas/{model}"
BODIES: tuple[TypeAdapter[Any], ...] = (SETTINGS, SPECTRA, WAVEFORMS, REFLECTIONS, SCATTERING)
"""Bodies that routes describe themselves; their parts stand among the components."""

PROBLEM: dict[str, Any] = {
    "title": "Problem",
    "description": "RFC 9457 problem details",
    "type": "object",
    "required": ["type", "title", "status", "detail", "request_id"],
    "properties": {
        "type": {"type": "string", "format": "uri-reference",
                 "enum": [f"/problems/{slug}" for slug in PROBLEMS]},
        "title": {"type": "string", "description": "the same for all problems of a type"},
        "status": {"type": "integer"},
        "detail": {"type": "string", "description": "what is wrong, and what to change"},
        "request_id": {"type": "string", "description": "as in the X-Request-Id header"},
        "errors": {
            "type": "array",
            "maxItems": 20,
            "items": {
                "type": "object",
                "required": ["detail", "pointer"],
                "properties": {
                    "detail": {"type": "string"},
                    "pointer": {"type": "string",
                                "description": "JSON pointer of the place, as a URI fragment"},
                },
            },
        },
        "errors_not_shown": {"type": "integer", "description": "how many more there are"},
    },
    "example": {
        "type": "/problems/unprocessable",
        "title": "The request can be read, but not computed as asked",
        "status": 422,
        "detail": "#/soil/clay: expected a number, found true",
        "request_id": "3f0c9a52d7f44c5f8f5e4b7c7a4b2f10",
        "errors": [{"detail": "expected a number, found true", "pointer": "#/soil/clay"}],
    },
}  # fmt: skip

EVERYWHERE = ("key-needed", "scope-needed", "headers-too-large", "internal-error", "unavailable")
WITH_BODY = ("malformed", "body-stalled", "too-large", "unsupported-media-type", "unprocessable")
"""Problems by their slug: those of any operation, and those of operations that take a body."""


class Api(FastAPI):
    """FastAPI whose description tells the problems that are really answered."""

    def openapi(self) -> dict[str, Any]:
        """The OpenAPI document; made once."""
        if self.openapi_schema is None:
            document = super().openapi()
            schemas = document.setdefault("components", {}).setdefault("schemas", {})
            for unused in ("HTTPValidationError", "ValidationError"):
                schemas.pop(unused, None)
            schemas["Problem"] = PROBLEM
            for bodies in (*BODIES, CALIBRATIONS, *DECISIONS, *STORED.values()):
                schemas |= bodies.json_schema(ref_template=REFERENCE).get("$defs", {})
            document["components"]["securitySchemes"] = {
                "key": {"type": "http", "scheme": "bearer",
                        "description": "a key made by `gleyline key add`"},
            }  # fmt: skip
            for path, methods in document["paths"].items():
                for method, operation in methods.items():
                    _complete(path, method, operation)
            by_id = {operation["operationId"]: operation for _, operation in _operations(document)}
            for owner, name, example in examples():
                show(by_id[owner], name, example)
        return self.openapi_schema or {}


def operation_id(route: APIRoute) -> str:
    """The name of the route: that is how clients made from the description will call it."""
    return route.name


def _operations(document: dict[str, Any]) -> Iterator[tuple[str, dict[str, Any]]]:
    for path, methods in document["paths"].items():
        for operation in methods.values():
            yield path, operation


def _complete(path: str, method: str, operation: dict[str, Any]) -> None:
    """Add the problems an operation can answer with, and whether it asks for a key."""
    slugs = [*EVERYWHERE, *(WITH_BODY if "requestBody" in operation else ())]
    if "{" in path:
        slugs.append("not-found")
    if operation.get("parameters"):
        slugs += ["malformed", "unprocessable"]
    if method in {"put", "delete"}:
        slugs += ["conflict", "changed-meanwhile", "if-match-needed"]
    if "requestBody" in operation or path.startswith("/v1/"):
        slugs.append("not-acceptable")
    responses = operation["responses"]
    if "application/json" in responses.get("422", {}).get("content", ()):
        del responses["422"]  # FastAPI's own, which is never answered
    for kind in sorted({PROBLEMS[slug] for slug in slugs}, key=lambda kind: kind.status):
        content = {MEDIA_TYPE: {"schema": {"$ref": REFERENCE.format(model="Problem")}}}
        responses.setdefault(str(kind.status), {"description": kind.title(), "content": content})
    operation["security"] = [{}, {"key": []}] if path.startswith("/v1/") else []
