"""POST /v1/reflections and POST /v1/scattering: sweeps in, permittivity over frequency out."""

from collections.abc import Callable, Mapping
from typing import Any

import anyio.to_thread
import orjson
from fastapi import APIRouter, Request
from fastapi.responses import Response
from pydantic import TypeAdapter

from models.reflection.line.estimate import estimate_line
from models.reflection.tip.estimate import estimate_permittivity
from service.errors import UnsupportedMediaType
from service.negotiate import VARY, choose
from service.routes.json_object import object_of
from service.sweeps.answer import line_answer, tip_answer
from service.sweeps.bodies import REFLECTIONS, ReflectionsBody, request_schema
from service.sweeps.question import body_of, line_question
from service.sweeps.tip import tip_question

router = APIRouter(tags=["records"])

JSON = "application/json"
EXAMPLE = (
    '{"kind": "tip", "sample": {"touchstone": "..."}, "standards": [{"name": "short", '
    '"touchstone": "..."}, ...]}'
)
OFFERED: Mapping[str, str] = {"json": JSON}


def description_of(adapter: TypeAdapter[Any], sent: str, answered: str) -> dict[str, Any]:
    """How OpenAPI describes a route that takes and answers JSON."""
    return {
        "requestBody": {
            "required": True,
            "description": sent,
            "content": {JSON: {"schema": request_schema(adapter)}},
        },
        "responses": {
            "200": {"description": answered, "content": {JSON: {"schema": {"type": "object"}}}}
        },
    }


DESCRIPTION = description_of(
    REFLECTIONS,
    "Sweeps of one port as complex numbers or Touchstone text, all at the same frequencies. "
    "Sweeps of the other time convention are conjugated once, with an advisory that says so.",
    "The spectrum with standard uncertainties: `_u` all of it, `_u_shared` what repeating the "
    "sweep does not lessen (standards, lengths, the aperture where three standards leave it open); "
    "flags of each frequency; every check of practice "
    "with its number and limit. `departure` of a standard: how far it reads from what it is "
    "taken for when the others are taken at their word. `sensing_depth` of the aperture [m]: what "
    "lies further away changes the reading by less than 1 %.",
)


@router.post("/v1/reflections", summary="Permittivity from reflections of one port",
             openapi_extra=DESCRIPTION)  # fmt: skip
async def post_reflections(request: Request) -> Response:
    """Permittivity spectrum of a sample before a coaxial tip, in a filled line or in a cell."""
    return await answered(request, _answer, EXAMPLE)


async def answered(
    request: Request, answer: Callable[[dict[str, Any]], dict[str, Any]], example: str
) -> Response:
    """Answer a JSON request with JSON, worked out beside the event loop."""
    media_type = request.headers.get("content-type", "").partition(";")[0].strip().lower()
    if media_type != JSON:
        raise UnsupportedMediaType(
            f"expected a Content-Type of {JSON}, found {media_type[:80] or 'none'}; Touchstone "
            "text stands in the JSON, as touchstone",
            headers={"Accept": JSON},
        )
    choose(request.headers.get("accept"), request.query_params.get("format"), OFFERED)
    document = object_of(await request.body(), example)
    told = await anyio.to_thread.run_sync(answer, document)
    body = orjson.dumps(told, option=orjson.OPT_SERIALIZE_NUMPY)
    return Response(body, media_type=JSON, headers=VARY)


def _answer(document: dict[str, Any]) -> dict[str, Any]:
    body: ReflectionsBody = body_of(document, REFLECTIONS)
    if body.kind == "tip":
        of_tip, said = tip_question(body)
        return tip_answer(body, estimate_permittivity(of_tip), said)
    of_line, said = line_question(body)
    return line_answer(body, estimate_line(of_line), said)
