"""POST and GET /v1/stations/{name}/readings: what loggers send, and what is kept of it."""

from collections.abc import Coroutine, Mapping
from typing import Any

import anyio.to_thread
import orjson
from fastapi import APIRouter, Request, Response

from models.conversion import refuse_units
from service.errors import Unprocessable, UnsupportedMediaType
from service.faults import Fault
from service.formats import FORMATS, Format, format_of
from service.negotiate import VARY, choose
from service.routes.json_object import loaded
from service.routes.stored.documents import Name, absent
from service.routes.stored.estimates import RANGE, described
from service.routes.stored.paging import answered
from service.schemas.batch_query import document_of
from service.stations.ask.asked import asked_of, now
from service.stations.ask.questions import readings_page
from service.stations.documents import Documents, Shelf
from service.stations.ingest.arrival import Arrival, Rules
from service.stations.ingest.json_rows import check_rows, taken_apart
from service.stations.ingest.keeping import Tally, keep
from service.stations.ingest.senml import MEDIA_TYPE as SENML
from service.stations.ingest.senml import resolved
from service.stations.ingest.streaming import keep_stream
from service.stations.ingest.tables import TableReader

JSON = "application/json"
OFFERED: Mapping[str, str] = {"json": JSON}
AT_ONCE = 200
"""Readings of a JSON body up to which they are checked without a thread."""
SMALL = 32_768
"""Bytes of a JSON body up to which it is read without a thread."""

PATH = "/v1/stations/{name}/readings"

router = APIRouter(tags=["stations"])

_SENT: dict[str, Any] = {
    "requestBody": {
        "required": True,
        "content": {
            JSON: {"schema": {
                "type": "object",
                "required": ["readings"],
                "properties": {
                    "readings": {"description": "a list of objects or one object of arrays; each "
                                 "with time, probe or depth, numbers or a raw record", "oneOf": [
                                     {"type": "array", "items": {"type": "object"}},
                                     {"type": "object"}]},
                    "units": {"type": "object", "additionalProperties": {"type": "string"}},
                    "probe": {"type": "string", "description": "of all readings"},
                    "depth": {"type": "number", "description": "of all readings [m]"},
                },
                "additionalProperties": False,
            }},
            SENML: {"schema": {"type": "array", "items": {"type": "object"}}},
            **{f.media_type: {"schema": {"type": "string"}} for f in FORMATS.values()},
        },
    },
    "parameters": [
        {"name": name, "in": "query", "required": False, "description": f"tables: {told}",
         "schema": {"type": "string"}}
        for name, told in (("units", "quantity:unit pairs, comma-separated"),
                           ("probe", "of rows that name none"), ("depth", "of rows without [m]"))
    ],
}  # fmt: skip


@router.post(
    PATH, summary="Keep readings of a logger", openapi_extra=_SENT, response_class=Response
)
async def post_readings(request: Request, name: Name) -> Response:
    """What is acknowledged is durable, and resending is harmless.

    The key of a reading is station, probe or depth, and time. What a kept reading lacks completes
    it, and as of an earlier revision it is as it was; the same key with other values is a conflict:
    kept beside, never over the first. A value that is physically impossible counts as lacking: a
    possible one completes it, and the first is shown among the conflicts from then on. Numbers that
    differ by no more than a change of unit leaves behind are the same. Rows that cannot be kept are
    told one by one; the others are kept. A reading may carry a raw record (waveform, reflection,
    scattering, spectrum) instead of a permittivity; the probe says with `raw_records` how it is
    read. Names that are not known, values that another unit would explain, and readings where
    nothing is installed are told in `advisories`.
    """
    choose(request.headers.get("accept"), request.query_params.get("format"), OFFERED)
    sent = request.headers.get("content-type", "")
    media_type = sent.partition(";")[0].strip().lower()
    table = format_of(media_type)
    if table is None and media_type not in {JSON, SENML}:
        accepted = ", ".join((JSON, SENML, *(f.media_type for f in FORMATS.values())))
        raise UnsupportedMediaType(
            f"expected a Content-Type of {accepted}, found {media_type[:80] or 'none'}",
            headers={"Accept": accepted},
        )
    shelf = request.app.state.shelf
    documents = await _documents_with(shelf, name, seen=table is None)
    tally = Tally()
    if table is not None:
        await _keep_table(request, name, table, documents, tally)
    else:
        await _keep_json(request, name, media_type, documents, tally)
    return Response(orjson.dumps(tally.document()), 200, VARY, JSON)


@router.get(
    PATH,
    summary="Readings as they are kept",
    openapi_extra=described(RANGE),
    response_class=Response,
)
async def get_readings(request: Request, name: Name) -> Response:
    """In the unit of the API, ordered by series, then time, with the revision that brought each."""
    asked = asked_of(
        request.query_params.multi_items(),
        RANGE,
        request.app.state.settings.page_rows,
        estimates=False,
    )
    return await answered(request, name, asked, readings_page, "readings")


async def _documents_with(shelf: Shelf, name: str, *, seen: bool) -> Documents:
    """Documents that hold the station.

    seen: as last seen will do where they hold it, for the writer checks that.
    Raises NotFound.
    """
    documents = shelf.current
    if not seen or documents.find("station", name) is None:
        _, documents = await anyio.to_thread.run_sync(shelf.fresh)
    if documents.find("station", name) is None:
        raise absent("station", name, documents)
    return documents


async def _keep_json(
    request: Request, name: str, media_type: str, documents: Documents, tally: Tally
) -> None:
    for stray in request.query_params.keys() - {"format"}:
        detail = "a JSON request says everything in its body"
        raise Unprocessable(detail, [Fault(detail, f"?{stray[:80]}")])
    settings, state = request.app.state.settings, request.app.state
    body = await request.body()
    if len(body) <= SMALL:
        document = loaded(body)
    else:
        document = await anyio.to_thread.run_sync(loaded, body)
    if media_type == SENML:
        rules = _rules(name, documents, settings.future_seconds, {})
        rows, point = resolved(document, rules, now())
        rest: Mapping[str, Any] = {"units": {}, "shared": {}}
    else:
        rows, point, rest = taken_apart(document, settings.json_readings)

    async def arrived() -> Arrival:
        rules = _rules(name, documents, settings.future_seconds, rest["units"])
        if len(rows) <= AT_ONCE:
            return check_rows(rows, point, rest["shared"], rules)
        return await anyio.to_thread.run_sync(check_rows, rows, point, rest["shared"], rules)

    arrival = await arrived()
    if arrival.rejected_count:  # perhaps only by documents that are not the current ones
        latest = await _documents_with(state.shelf, name, seen=False)
        if latest.revision != documents.revision:
            documents = latest
            arrival = await arrived()
    await keep(state.writer, state.shelf, name, arrival, documents, tally)


async def _keep_table(
    request: Request, name: str, table: Format, documents: Documents, tally: Tally
) -> None:
    """Block by block, as the body arrives: each block is durable before the next is read."""
    state, settings = request.app.state, request.app.state.settings
    query = dict(request.query_params)
    query.pop("format", None)
    probe, depth = query.pop("probe", None), query.pop("depth", None)
    stated = document_of(query.items())
    for stray in stated.keys() - {"units"}:
        detail = f"readings take no {stray}: it belongs to the soil, or to a question"
        raise Unprocessable(detail, [Fault(detail, f"?{stray}")])
    units = stated.get("units", {})
    refuse_units(units)
    rules = _rules(name, documents, settings.future_seconds, units)
    if probe is not None and (fault := rules.probe_fault(probe)):
        raise Unprocessable(fault, [Fault(fault, "?probe")])
    reader = TableReader(rules, probe, _depth(depth))
    decoder = table.decoder((), block_bytes=settings.block_bytes, line_bytes=settings.line_bytes)

    def kept(arrival: Arrival) -> Coroutine[None, None, None]:
        return keep(state.writer, state.shelf, name, arrival, documents, tally)

    await keep_stream(request.stream(), decoder, reader, kept, settings.block_bytes)


def _rules(name: str, documents: Documents, allowance: float, units: Mapping[str, str]) -> Rules:
    station = documents.station(name)
    if station is None:
        raise absent("station", name, documents)
    return Rules.of(station, documents, allowance, units)


def _depth(text: str | None) -> float | None:
    if text is None:
        return None
    try:
        return float(text)
    except ValueError:
        detail = "depth: expected a number of metres"
        raise Unprocessable(detail, [Fault(detail, "?depth")]) from None
