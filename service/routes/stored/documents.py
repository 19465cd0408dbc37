"""PUT, GET and DELETE of soils, probes and stations; every change is a revision, all stay."""

from collections.abc import Callable, Mapping
from typing import Annotated, Any

import anyio.to_thread
import orjson
from fastapi import APIRouter, Path, Request, Response
from pydantic import AfterValidator

from service.errors import NotFound, Unprocessable, UnsupportedMediaType
from service.faults import Fault, hint, shortened
from service.negotiate import VARY, choose
from service.routes.etag import matches
from service.routes.json_object import loaded
from service.stations.bodies import BODIES, NAME, name_of
from service.stations.changing import Wish, advisories_of, apply, checked
from service.stations.documents import Documents, Shelf
from service.stations.times import rfc3339
from service.store.interface import Document, Kind

JSON = "application/json"
OFFERED: Mapping[str, str] = {"json": JSON}
ADDED = ("name", "revision", "changed", "changed_by")
"""What an answer adds to what was put; sent back, it is read past."""
ADVISORIES = "advisories"
"""What it says of parts that contradict each other, where they do; sent back, it is read past."""
Name = Annotated[
    str,
    Path(
        description="a letter, then letters, digits, . _ or -",
        json_schema_extra={"pattern": NAME},
    ),
    AfterValidator(name_of),
]

MANNERS = (
    "Every change is a new revision; the old ones stay, and `at_revision` shows them. `ETag` is "
    "the revision. Replacing something needs `If-Match` (428 without, 412 where it changed "
    "meanwhile); the same content again changes nothing."
)


def router_of(kind: Kind) -> APIRouter:
    """The operations of one kind of thing."""
    router = APIRouter(prefix=f"/v1/{kind}s", tags=["stations"])

    async def list_all(request: Request) -> Response:
        choose(request.headers.get("accept"), None, OFFERED)
        documents = await _documents(request)
        allowed = getattr(request.state, "key_stations", ()) if kind == "station" else ()
        listed = [
            told(document)
            for name, document in sorted(documents.by_kind[kind].items())
            if not allowed or name in allowed
        ]
        return _json({f"{kind}s": listed, "revision": documents.revision})

    async def show(request: Request, name: Name) -> Response:
        choose(request.headers.get("accept"), request.query_params.get("format"), OFFERED)
        documents = await _documents(request)
        document = documents.find(kind, name)
        if document is None:
            raise absent(kind, name, documents, request.query_params.get("at_revision"))
        tag = _tag(document)
        if matches(", ".join(request.headers.getlist("if-none-match")), tag["ETag"]):
            return Response(None, 304, {**tag, **VARY})
        return _json(told(document), headers=tag)

    async def put(request: Request, name: Name) -> Response:
        wish = Wish(kind, name, _author(request), request.headers.get("if-match"),
                    request.headers.get("if-none-match"), await _body(request, kind))  # fmt: skip
        change = await anyio.to_thread.run_sync(apply, request.app.state.shelf, wish)
        place = {"Location": f"/v1/{kind}s/{name}"} if change.created else {}
        return _json(
            told(change.document), 201 if change.created else 200, _tag(change.document) | place
        )

    async def delete(request: Request, name: Name) -> Response:
        wish = Wish(kind, name, _author(request), request.headers.get("if-match"), None, None)
        change = await anyio.to_thread.run_sync(apply, request.app.state.shelf, wish)
        return _json({**told(change.document), "deleted": True})

    def add(path: str, method: str, route: Callable[..., Any], name: str, summary: str) -> None:
        router.add_api_route(
            path, route, methods=[method], name=name, summary=summary, description=MANNERS,
            response_class=Response, responses=_answers(kind, method, path),
            openapi_extra=_described(kind, method, path),
        )  # fmt: skip

    add("", "GET", list_all, f"list_{kind}s", f"All {kind}s")
    add("/{name}", "GET", show, f"show_{kind}", f"One {kind}")
    add("/{name}", "PUT", put, f"put_{kind}", f"Make or replace a {kind}")
    add("/{name}", "DELETE", delete, f"delete_{kind}", f"Delete a {kind} that nothing refers to")
    return router


def told(document: Document) -> dict[str, Any]:
    """A document as an answer shows it."""
    body = document.body or {}
    added = (document.name, document.revision, rfc3339(document.changed), document.author)
    said = advisories_of(document.kind, body)
    return {
        **dict(zip(ADDED, added, strict=True)),
        **body,
        **({ADVISORIES: said} if said else {}),
    }


def absent(
    kind: Kind, name: str, documents: Documents, revision: int | str | None = None
) -> NotFound:
    """The answer about something that is not there, or was not at an earlier revision."""
    when = "is no" if revision is None else f"was, at revision {revision}, no"
    near = hint(name, documents.by_kind[kind])
    return NotFound(f"there {when} {kind} {shortened(name)}{near}")


async def _documents(request: Request) -> Documents:
    """The current documents, or those of ``at_revision``."""
    for stray in request.query_params.keys() - {"at_revision", "format"}:
        raise Unprocessable("the query holds what is not read", [Fault("unknown parameter",
                            f"?{stray[:80]}")])  # fmt: skip
    shelf: Shelf = request.app.state.shelf
    head, documents = await anyio.to_thread.run_sync(shelf.fresh)
    asked = request.query_params.get("at_revision")
    if asked is None:
        return documents
    revision = revision_of(asked, head.revision)
    return await anyio.to_thread.run_sync(shelf.at, revision)


def revision_of(text: str, reached: int) -> int:
    """The number of a revision that has been reached; raises Unprocessable."""
    if not (text.isascii() and text.isdigit() and 0 < len(text) < 19 and int(text) <= reached):
        detail = f"at_revision is a number from 0 to {reached}, the revision of the store"
        raise Unprocessable(detail, [Fault(detail, "?at_revision")])
    return int(text)


async def _body(request: Request, kind: Kind) -> Mapping[str, Any]:
    media_type = request.headers.get("content-type", "").partition(";")[0].strip().lower()
    if media_type != JSON:
        raise UnsupportedMediaType(
            f"expected a Content-Type of {JSON}, found {media_type[:80] or 'none'}",
            headers={"Accept": JSON},
        )
    document = loaded(await request.body(), tables=False)
    if not isinstance(document, dict):
        raise Unprocessable("expected an object", [Fault("expected an object", "#")])
    added = {*ADDED, ADVISORIES}
    return checked(kind, {key: value for key, value in document.items() if key not in added})


def _author(request: Request) -> str | None:
    return getattr(request.state, "key_label", None)


def _tag(document: Document) -> dict[str, str]:
    return {"ETag": f'"{document.revision}"', "Cache-Control": "no-cache"}


def _json(body: Any, status: int = 200, headers: Mapping[str, str] | None = None) -> Response:
    return Response(orjson.dumps(body), status, {**VARY, **(headers or {})}, JSON)


def _answers(kind: Kind, method: str, path: str) -> dict[int | str, dict[str, Any]]:
    example: dict[str, Any] = {**dict(zip(ADDED, _ADDED, strict=True)), **_EXAMPLES[kind]}
    if method == "DELETE":
        example = {**dict(zip(ADDED, _ADDED, strict=True)), "deleted": True}
    if not path:
        example = {f"{kind}s": [example], "revision": 17}
    content = {JSON: {"schema": {"type": "object"}, "example": example}}
    answers: dict[int | str, dict[str, Any]] = {200: {"content": content}}
    if method == "PUT":
        answers[201] = {"description": f"The {kind} is new.", "content": content}
    return answers


_ADDED = ("north", 17, "2026-05-04T06:00:00Z", "office")
_EXAMPLES: Mapping[Kind, Mapping[str, Any]] = {
    "soil": {"texture": "loam", "bulk_density": 1.42, "mixing_model": "crim"},
    "probe": {"frequency": 1.0e9, "apparent_permittivity_u": 0.3},
    "station": {"zone": "UTC", "installations": []},
}


def _described(kind: Kind, method: str, path: str) -> dict[str, Any]:
    match = {"name": "If-Match", "in": "header", "required": False,
             "description": "the ETag of the revision that is meant",
             "schema": {"type": "string"}}  # fmt: skip
    if method == "PUT":
        schema = BODIES[kind].json_schema(ref_template="#/components/schemas/{model}")
        schema.pop("$defs", None)
        body = {"required": True, "content": {JSON: {"schema": schema}}}
        return {"parameters": [match], "requestBody": body}
    if method == "DELETE":
        return {"parameters": [match]}
    revision = {"name": "at_revision", "in": "query", "required": False,
                "description": "as of this revision of the store",
                "schema": {"type": "integer", "minimum": 0}}  # fmt: skip
    return {"parameters": [revision]} if path or kind else {}


routers = tuple(router_of(kind) for kind in ("soil", "probe", "station"))
