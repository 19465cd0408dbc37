"""A table as the body of POST /v1/estimates: streamed in, spooled, sent after its last byte."""

from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from typing import Any

import anyio.to_thread
from fastapi import FastAPI, Request
from fastapi.responses import Response

from models.errors import ModelError
from service.answers.by_name import Grounds
from service.answers.columns import APPENDED, wanted_columns
from service.batch import Conversion, Spool, SpooledResponse, Stages, convert_stream, deadline
from service.batch_estimates import TableEstimates
from service.errors import Problem, Stalled, TooLarge, Unavailable, Unprocessable, as_problem
from service.faults import Fault
from service.formats import FORMATS, MEDIA_TYPES, Format
from service.metrics import SPOOLED, TABLES
from service.negotiate import VARY, choose
from service.schemas.batch_query import document_of
from service.schemas.query import settings_of
from service.schemas.wording import QUERY, worded
from service.settings import Settings
from service.stations.documents import Shelf
from service.stations.named import names_something, with_stored


async def answer_table(request: Request, sent: Format) -> Response:
    """The rows of the body with their estimates, in the format the client accepts."""
    try:
        return await _answered(request, sent)
    except (ModelError, Unprocessable) as error:
        problem = as_problem(error)
        if not isinstance(problem, Unprocessable):
            raise
        raise worded(problem, QUERY) from None


async def _answered(request: Request, sent: Format) -> Response:
    """The rows of the body with their estimates, in the format the client accepts."""
    limits: Settings = request.app.state.settings
    query = request.query_params
    preferred = {sent.key: sent.media_type, **MEDIA_TYPES}
    answered = choose(request.headers.get("accept"), query.get("format"), preferred)
    document = await described(request, document_of(query.multi_items()))
    shelf: Shelf = request.app.state.shelf

    def grounds(columns: tuple[str, ...]) -> Grounds:
        return Grounds(document, shelf.fresh()[1], columns)

    wanted = wanted_columns(query.get("columns"))
    table = TableEstimates(settings_of(document), limits.drawn_values, grounds, wanted)
    target = next(f for f in FORMATS.values() if f.media_type == answered)
    conversion = Conversion(
        sent.decoder(APPENDED, block_bytes=limits.block_bytes, line_bytes=limits.line_bytes),
        target.encoder(),
        table,
        strict=_is_true(query.get("strict")),
        columns=wanted,
    )
    with _place_for(request.app):
        return await _converted(request, conversion, table, answered)


async def described(request: Request, document: dict[str, Any]) -> dict[str, Any]:
    """The request with stored soils and probes in place of their names."""
    if not names_something(document):
        return document
    _, documents = await anyio.to_thread.run_sync(request.app.state.shelf.fresh)
    return with_stored(document, documents)


@contextmanager
def _place_for(app: FastAPI) -> Iterator[None]:
    """One of the tables this process takes on at a time. Raises Unavailable when it has enough."""
    most = app.state.settings.queued_batches
    if app.state.tables >= most:
        detail = f"{most} tables are being worked on, which is as many as are taken on at a time"
        raise Unavailable(detail, retry_after=5)
    app.state.tables += 1
    TABLES.inc()
    try:
        yield
    finally:
        app.state.tables -= 1
        TABLES.dec()


async def _converted(
    request: Request, conversion: Conversion, table: TableEstimates, answered: str
) -> Response:
    limits: Settings = request.app.state.settings
    spool = Spool(limits.answer_bytes)

    def late() -> Problem:
        return Stalled(
            f"the table was not answered within {limits.request_seconds:g} s "
            f"({conversion.counts.rows} rows were): send it in parts",
            headers={"Connection": "close"},
        )

    within_time = deadline(limits.request_seconds, late)

    def check() -> None:
        within_time()
        SPOOLED.set(Spool.waiting)
        if conversion.counts.rows > limits.batch_rows:
            raise TooLarge(f"the table has more than {limits.batch_rows} rows; send it in parts")

    try:
        counts = await convert_stream(request.stream(), conversion, spool, check)
        check()
        headers: Mapping[str, str] = {
            **VARY,
            **table.headers(),
            "Row-Count": str(counts.rows),
            "Flagged-Count": str(counts.flagged),
            "Server-Timing": _timing(conversion.stages),
        }
        return SpooledResponse(spool, answered, headers)
    except BaseException:
        spool.close()
        raise


def _timing(stages: Stages) -> str:
    """Milliseconds of each stage; estimates are made beside the other two."""
    spent = {"decode": stages.decode, "estimate": stages.estimate, "encode": stages.encode}
    return ", ".join(f"{name};dur={1e3 * seconds:.1f}" for name, seconds in spent.items())


def _is_true(text: str | None) -> bool:
    if text is None or text == "false":
        return False
    if text == "true":
        return True
    raise Unprocessable("strict is true or false", [Fault("strict is true or false", "?strict")])
