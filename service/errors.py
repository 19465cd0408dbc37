"""Everything HTTP can refuse, one table from exceptions to it, one body for all (RFC 9457).

Problem
    Malformed  Unauthenticated  Forbidden  NotFound  MethodNotAllowed  NotAcceptable  Stalled
    TooLarge  UnsupportedMediaType  Unprocessable  HeadersTooLarge  InternalError  Unavailable
    Conflicted  PreconditionFailed  PreconditionRequired  TooManyRequests
"""

import json
from collections.abc import Callable, Mapping
from types import MappingProxyType
from typing import Any

from fastapi import FastAPI, Request
from fastapi.exceptions import RequestValidationError
from fastapi.responses import Response
from starlette.exceptions import HTTPException
from starlette.requests import ClientDisconnect
from starlette.routing import compile_path
from starlette.types import Scope

from models.errors import ModelError, ParameterError
from service.faults import Fault, faults_of, nearest, pointer, shortened
from service.formats.errors import (
    AnswerTooLong,
    CellError,
    FormatError,
    HeaderError,
    RecordTooLong,
    SpoolFull,
)
from service.schemas.problem import Problem as Problem  # noqa: PLC0414 - for all who raise one
from service.stations.problems import Conflicted
from service.store.errors import InUse, StoreError

MEDIA_TYPE = "application/problem+json"


class Malformed(Problem, status=400, slug="malformed"):
    """The request cannot be read.

    Its media type or encoding promises something else. Nothing of the request was used.
    """


class Unauthenticated(Problem, status=401, slug="key-needed"):
    """A key is needed.

    Send `Authorization: Bearer <key>` with a key made by `gleyline key add`. Keys are never taken
    from the query.
    """


class Forbidden(Problem, status=403, slug="scope-needed"):
    """The key does not reach that far.

    The key is known, but lacks the scope that the detail names.
    """


class NotFound(Problem, status=404, slug="not-found"):
    """There is nothing at this address.

    Addresses have no trailing slash; `/openapi.json` lists them all.
    """


class MethodNotAllowed(Problem, status=405, slug="method-not-allowed"):
    """The address does not take that method.

    The `Allow` header lists the methods it takes.
    """


class NotAcceptable(Problem, status=406, slug="not-acceptable"):
    """None of the accepted media types is offered.

    Name one of the offered types in `Accept`, or with `?format=`.
    """


class Stalled(Problem, status=408, slug="body-stalled"):
    """The body did not arrive in time.

    The connection was idle, or the whole transfer took too long; `/v1/limits` shows both times.
    """


class TooLarge(Problem, status=413, slug="too-large"):
    """The body is larger than this service takes.

    `/v1/limits` shows how much, after decompression. Send a long table as CSV or NDJSON.
    """


class UnsupportedMediaType(Problem, status=415, slug="unsupported-media-type"):
    """The body has a media type or an encoding that is not read here.

    The `Accept` or `Accept-Encoding` header of the answer lists what is.
    """


class Unprocessable(Problem, status=422, slug="unprocessable"):
    """The request can be read, but not computed as asked.

    Each item of `errors` names a place in the request and says what to change there.
    """


class HeadersTooLarge(Problem, status=431, slug="headers-too-large"):
    """The headers are larger than this service takes."""


class InternalError(Problem, status=500, slug="internal-error"):
    """The service failed.

    The cause is in the log of the service, under the `request_id`.
    """


class Unavailable(Problem, status=503, slug="unavailable"):
    """The service cannot take this request now.

    It is stopping, or has as much to do as it takes on. Ask again after `Retry-After` seconds.
    """

    def __init__(self, detail: str, retry_after: int = 1) -> None:
        super().__init__(detail, headers={"Retry-After": str(retry_after)})


PROBLEMS: Mapping[str, type[Problem]] = MappingProxyType(
    {kind.slug: kind for kind in Problem.__subclasses__()}
)
"""Every kind of problem by its slug."""

_BY_STATUS = MappingProxyType({kind.status: kind for kind in PROBLEMS.values()})


def _of_http(error: HTTPException) -> Problem:
    """What routing itself refuses."""
    headers = dict(error.headers or {})
    if error.status_code == NotFound.status:
        return NotFound("no operation has this address", headers=headers)
    if error.status_code == MethodNotAllowed.status:
        methods = headers.get("Allow", "").split(", ")
        every = {*methods, "HEAD"} if "GET" in methods else set(methods)
        headers["Allow"] = ", ".join(sorted(every))
        return MethodNotAllowed(f"this address takes {headers['Allow']}", headers=headers)
    return _BY_STATUS.get(error.status_code, InternalError)(str(error.detail), headers=headers)


def _of_request(error: RequestValidationError) -> Problem:
    """What FastAPI refuses; a query parameter is shown as ?name."""
    items = error.errors()
    if any(item["type"] == "json_invalid" for item in items):
        return Malformed("the body is not JSON")
    faults = [
        Fault(fault.detail, fault.pointer.replace("#/body", "#").replace("#/query/", "?"))
        for fault in faults_of(items)
    ]
    return Unprocessable("the request holds values that cannot be used", faults)


def _of_parameters(error: ParameterError) -> Problem:
    return Unprocessable(str(error), [Fault(c.detail, pointer(c.place)) for c in error.complaints])


def _of_table(error: FormatError) -> Problem:
    """What a table holds that it should not; strict reading and headers are the caller's words."""
    place = f"row {error.row}" if error.line is None else f"line {error.line}"
    place = place if error.column is None else f"{place}, {error.column}"
    faults = [Fault(str(error), place)]
    if isinstance(error, HeaderError | CellError):
        return Unprocessable(str(error), faults)
    return Malformed(str(error), faults)


TRANSLATIONS: Mapping[type[Exception], Callable[[Any], Problem]] = MappingProxyType({
    HTTPException: _of_http,
    StoreError: lambda error: Unavailable(str(error), 5),
    InUse: Conflicted,
    RequestValidationError: _of_request,
    ClientDisconnect: Malformed,
    ParameterError: _of_parameters,
    ModelError: Unprocessable,
    FormatError: _of_table,
    RecordTooLong: TooLarge,
    SpoolFull: lambda error: Unavailable(f"{error}; ask later, or send the table in parts", 60),
    AnswerTooLong: lambda error: TooLarge(f"{error}; send the table in parts"),
})  # fmt: skip
"""What the layers below raise, as problems; the most derived class decides."""


def as_problem(error: Exception) -> Problem:
    """The problem that an exception is; what nobody expected is an internal error."""
    if isinstance(error, Problem):
        return error
    for kind in type(error).__mro__:
        if kind in TRANSLATIONS:
            return TRANSLATIONS[kind](error)
    return InternalError("the service failed; its log has the cause under this request_id")


def answer(scope: Scope, error: Exception) -> Response:
    """``error`` as application/problem+json."""
    problem = as_problem(error)
    body = problem.document(scope.get("state", {}).get("request_id", ""))
    headers = {**(problem.headers or {}), "Cache-Control": "no-store"}
    return Response(json.dumps(body), problem.status, headers, MEDIA_TYPE)


def _methods(request: Request, told: str) -> list[str]:
    """All methods that the address of a request takes; the router tells those of one route."""
    taken = {word for word in told.split(", ") if word}
    for template, operations in request.app.openapi()["paths"].items():
        if compile_path(template)[0].match(request.url.path):
            taken |= {word.upper() for word in operations}
    return sorted(taken)


def _no_address(request: Request) -> str:
    """That there is no such address, and the nearest that there is."""
    path, bare = request.url.path, request.url.path.rstrip("/")
    known = [template for template in request.app.openapi()["paths"] if "{" not in template]
    below = [template for template in known if bare and template.startswith(f"{bare}/")]
    if bare and path != bare and (bare in known or not below):
        return f"addresses have no trailing slash: ask for {shortened(bare)}"
    ends = [template for template in known if template.endswith(bare)]
    meant = ends[0] if len(ends) == 1 and bare else nearest(bare or path, known)
    hint = f"; did you mean {meant}?" if meant else "; /docs and /openapi.json list them all"
    hint = f", but {', '.join(below[:3])} and others below it{hint}" if below[1:] else hint
    return f"no operation has the address {shortened(path)}{hint}"


def add_error_handlers(api: FastAPI) -> None:
    """Let routes raise what the layers below raise."""

    async def handle(request: Request, error: Exception) -> Response:
        if type(error) is HTTPException and error.status_code == NotFound.status:
            error = NotFound(_no_address(request))
        if isinstance(error, HTTPException) and error.status_code == MethodNotAllowed.status:
            told = (error.headers or {}).get("Allow", "")
            error.headers = {"Allow": ", ".join(_methods(request, told))}
        return answer(request.scope, error)

    for kind in (*TRANSLATIONS, Exception):
        api.add_exception_handler(kind, handle)
