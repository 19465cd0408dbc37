"""POST /v1/estimates: readings in, water content with its band out."""

from functools import lru_cache
from typing import Any

import anyio.to_thread
from fastapi import APIRouter, Request
from fastapi.responses import Response
from starlette.requests import ClientDisconnect

from service.answers import answer_document
from service.answers.few import COSTLY, few_readings
from service.errors import Unprocessable, UnsupportedMediaType
from service.faults import Fault, nearest, shown
from service.formats import MEDIA_TYPES, format_of
from service.negotiate import choose
from service.routes.estimates_description import DESCRIPTION
from service.routes.json_object import object_of
from service.routes.tables import answer_table, described

router = APIRouter(tags=["estimates"])

PATH = "/v1/estimates"
JSON = "application/json"
EXAMPLE = '{"readings": [{"apparent_permittivity": 17.2, "temperature": 14.1}]}'
INLINE = 1_000
"""Readings up to which the answer is worked out at once; more of them go to a thread."""


@router.post(PATH, summary="Water content with its band", openapi_extra=DESCRIPTION)
async def post_estimates(request: Request) -> Response:
    """Water content of each reading, with its standard uncertainty, interval and flags."""
    media_type = request.headers.get("content-type", "")
    table = format_of(media_type)
    if table is not None:
        return await answer_table(request, table)
    if media_type.partition(";")[0].strip().lower() != JSON:
        accepted = ", ".join((JSON, *MEDIA_TYPES.values()))
        raise UnsupportedMediaType(
            f"expected a Content-Type of {accepted}, found {media_type[:80] or 'none'}"
            f"{_instead(media_type)}",
            headers={"Accept": accepted},
        )
    if request.scope["query_string"]:
        _refuse_query(request)
    answered = _answered(request.headers.get("accept"), request.query_params.get("format"))
    document = await described(request, _parsed(await _body(request)))
    limits = request.app.state.settings
    few = few_readings(document, limits.json_readings) if answered == JSON else None
    if few is not None:
        return await request.app.state.together.ask(*few)
    if _count(document["readings"]) <= INLINE and not COSTLY & document.keys():
        return answer_document(document, answered, limits)
    return await anyio.to_thread.run_sync(answer_document, document, answered, limits)


@lru_cache(64)
def _answered(accept: str | None, format_name: str | None) -> str:
    return choose(accept, format_name, {"json": JSON, **MEDIA_TYPES})


async def _body(request: Request) -> bytes:
    """All of the body; most come in one piece."""
    pieces: list[bytes] = []
    more = True
    while more:
        message = await request.receive()
        if message["type"] != "http.request":
            raise ClientDisconnect
        pieces.append(message.get("body", b""))
        more = message.get("more_body", False)
    return b"".join(pieces)


def _count(readings: Any) -> int:
    """How many readings there are, as far as can be told at a glance."""
    if isinstance(readings, dict):
        readings = next(iter(readings.values()), ())
    return len(readings) if isinstance(readings, list) else 0


def _instead(media_type: str) -> str:
    """What to do about some media types that are not read."""
    if media_type.startswith("application/x-www-form-urlencoded"):
        return "; with curl: -H 'Content-Type: application/json'"
    if media_type.startswith("application/vnd.apache.arrow.file"):
        return "; write the table as an Arrow stream"
    return ""


def _refuse_query(request: Request) -> None:
    stray = [name for name in request.query_params if name != "format"]
    if stray:
        detail = "a JSON request says everything in its body; the query holds only format"
        raise Unprocessable(detail, [Fault(detail, f"?{name[:80]}") for name in stray])


def _parsed(body: bytes) -> dict[str, Any]:
    document = object_of(body, EXAMPLE, tables=True)
    if "readings" not in document:
        meant = nearest("readings", document)
        hint = f"is {shown(meant)} meant?" if meant else f"expected an object such as {EXAMPLE}"
        detail = f"readings is missing: {hint}"
        raise Unprocessable(detail, [Fault(detail, "#/readings")])
    return document
