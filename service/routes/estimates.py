"""POST /v1/estimates: readings in, water content with its band out."""

from typing import Any

import anyio.to_thread
import orjson
from fastapi import APIRouter, Request
from fastapi.responses import Response

from service.answers import answer_document
from service.errors import Malformed, Unprocessable, UnsupportedMediaType
from service.faults import Fault
from service.formats import MEDIA_TYPES, format_of
from service.negotiate import choose
from service.routes.estimates_description import DESCRIPTION
from service.routes.tables import answer_table, described

router = APIRouter(tags=["estimates"])

JSON = "application/json"
INLINE = 10_000
"""Readings up to which the answer is worked out at once; more of them go to a thread."""
COSTLY = frozenset({"raw_records", "propagation", "budget", "validate", "explain"})
"""Keys that may make few readings costly."""


@router.post("/v1/estimates", summary="Water content with its band", openapi_extra=DESCRIPTION)
async def post_estimates(request: Request) -> Response:
    """Water content of each reading, with its standard uncertainty, interval and flags."""
    media_type = request.headers.get("content-type", "")
    table = format_of(media_type)
    if table is not None:
        return await answer_table(request, table)
    if media_type.partition(";")[0].strip().lower() != JSON:
        accepted = ", ".join((JSON, *MEDIA_TYPES.values()))
        raise UnsupportedMediaType(
            f"expected a Content-Type of {accepted}, found {media_type[:80] or 'none'}",
            headers={"Accept": accepted},
        )
    offered = {"json": JSON, **MEDIA_TYPES}
    answered = choose(request.headers.get("accept"), request.query_params.get("format"), offered)
    _refuse_query(request)
    document = await described(request, _parsed(await request.body()))
    limits = request.app.state.settings
    if _count(document["readings"]) <= INLINE and not COSTLY & document.keys():
        return answer_document(document, answered, limits)
    return await anyio.to_thread.run_sync(answer_document, document, answered, limits)


def _count(readings: Any) -> int:
    """How many readings there are, as far as can be told at a glance."""
    if isinstance(readings, dict):
        readings = next(iter(readings.values()), ())
    return len(readings) if isinstance(readings, list) else 0


def _refuse_query(request: Request) -> None:
    stray = [name for name in request.query_params if name != "format"]
    if stray:
        detail = "a JSON request says everything in its body; the query holds only format"
        raise Unprocessable(detail, [Fault(detail, f"?{name[:80]}") for name in stray])


def _parsed(body: bytes) -> dict[str, Any]:
    try:
        document = orjson.loads(body)
    except orjson.JSONDecodeError as error:
        hint = ""
        if any(word in body[max(0, error.pos - 2) : error.pos + 10] for word in (b"NaN", b"Inf")):
            hint = "; JSON has no NaN and no Infinity: send null where there is no number"
        raise Malformed(f"the body is not JSON: {error}{hint}") from None
    if not isinstance(document, dict):
        raise Unprocessable("expected an object", [Fault("expected an object", "#")])
    if "readings" not in document:
        raise Unprocessable("readings is missing", [Fault("readings is missing", "#/readings")])
    return document
