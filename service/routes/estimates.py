"""POST /v1/estimates: readings in, water content with its band out."""

import tempfile
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from typing import Any

import anyio.to_thread
import orjson
from fastapi import APIRouter, FastAPI, Request
from fastapi.responses import Response

from models.estimate import Remarks, estimate, explain
from models.readings import read
from service.batch import IN_MEMORY, Conversion, SpooledResponse, convert_stream
from service.batch_estimates import APPENDED, TableEstimates
from service.errors import Malformed, Unavailable, Unprocessable, UnsupportedMediaType
from service.faults import Fault
from service.formats import FORMATS, MEDIA_TYPES, Format, format_of
from service.formats.json_estimates import encode, laid_out, tabulate
from service.formats.json_readings import decode
from service.negotiate import VARY, choose
from service.routes.estimates_description import DESCRIPTION
from service.schemas.batch_query import ASIDE, document_of
from service.schemas.echo import echo_of, explanation_echo, units_of_answer
from service.schemas.query import basis_of, settings_of

router = APIRouter(tags=["estimates"])

JSON = "application/json"
INLINE = 10_000
"""Readings up to which the answer is worked out at once; more of them go to a thread."""


@router.post("/v1/estimates", summary="Water content with its band", openapi_extra=DESCRIPTION)
async def post_estimates(request: Request) -> Response:
    """Water content of each reading, with its standard uncertainty, interval and flags."""
    media_type = request.headers.get("content-type", "")
    table = format_of(media_type)
    if table is not None:
        return await _table(request, table)
    if media_type.partition(";")[0].strip().lower() != JSON:
        accepted = ", ".join((JSON, *MEDIA_TYPES.values()))
        raise UnsupportedMediaType(
            f"expected a Content-Type of {accepted}, found {media_type[:80] or 'none'}",
            headers={"Accept": accepted},
        )
    offered = {"json": JSON, **MEDIA_TYPES}
    answered = choose(request.headers.get("accept"), request.query_params.get("format"), offered)
    _refuse_query(request)
    document = _parsed(await request.body())
    most = request.app.state.settings.json_readings
    if _count(document["readings"]) <= INLINE:
        return _answer(document, answered, most)
    return await anyio.to_thread.run_sync(_answer, document, answered, most)


def _count(readings: Any) -> int:
    """How many readings there are, as far as can be told at a glance."""
    if isinstance(readings, dict):
        readings = next(iter(readings.values()), ())
    return len(readings) if isinstance(readings, list) else 0


def _refuse_query(request: Request) -> None:
    stray = [name for name in request.query_params if name not in ASIDE]
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


def _answer(document: dict[str, Any], answered: str, most: int) -> Response:
    sent = decode(document.pop("readings"), most=most)
    settings = settings_of(document)
    basis = basis_of(settings, (*sent.numbers, *sent.texts))
    readings = read(sent.numbers, settings.units, {}, sent.absent)
    result = estimate(readings, basis)
    answer = laid_out(result, sent, settings.units)
    if answered != JSON:
        return Response(tabulate(answer, answered), media_type=answered, headers=VARY)
    units = {**units_of_answer(answer.names, settings.units), **settings.units}
    remarks = Remarks()
    remarks.note(sent.numbers, settings.units, result.flags)
    rest = {"units": units, **echo_of(basis, settings, remarks.advice(settings.units))}
    if settings.explain:
        rest |= explanation_echo(explain(readings, basis))
    return Response(encode(answer, sent.shape, rest), media_type=JSON, headers=VARY)


async def _table(request: Request, sent: Format) -> Response:
    """Stream a table in, spool its answer, send it after the last byte."""
    limits = request.app.state.settings
    preferred = {sent.key: sent.media_type, **MEDIA_TYPES}
    asked = request.query_params.get("format")
    answered = choose(request.headers.get("accept"), asked, preferred)
    table = TableEstimates(settings_of(document_of(request.query_params.multi_items())))
    target = next(f for f in FORMATS.values() if f.media_type == answered)
    conversion = Conversion(
        sent.decoder(APPENDED, block_bytes=limits.block_bytes, line_bytes=limits.line_bytes),
        target.encoder(),
        table,
        strict=_is_true(request.query_params.get("strict")),
    )
    with _place_for(request.app):
        return await _converted(request, conversion, table, answered)


@contextmanager
def _place_for(app: FastAPI) -> Iterator[None]:
    """One of the tables this process takes on at a time. Raises Unavailable when it has enough."""
    most = app.state.settings.queued_batches
    if app.state.tables >= most:
        detail = f"{most} tables are being worked on, which is as many as are taken on at a time"
        raise Unavailable(detail, retry_after=5)
    app.state.tables += 1
    try:
        yield
    finally:
        app.state.tables -= 1


async def _converted(
    request: Request, conversion: Conversion, table: TableEstimates, answered: str
) -> Response:
    spool = tempfile.SpooledTemporaryFile(IN_MEMORY)  # noqa: SIM115 - the response closes it
    try:
        counts = await convert_stream(request.stream(), conversion, spool)
        headers: Mapping[str, str] = {
            **VARY,
            **table.headers(),
            "Row-Count": str(counts.rows),
            "Flagged-Count": str(counts.flagged),
        }
        return SpooledResponse(spool, answered, headers)
    except BaseException:
        spool.close()
        raise


def _is_true(text: str | None) -> bool:
    if text is None or text == "false":
        return False
    if text == "true":
        return True
    raise Unprocessable("strict is true or false", [Fault("strict is true or false", "?strict")])
