"""GET /v1/latest, /v1/stations.geojson, a station's conflicts, and the log of changes."""

from typing import Any

import anyio.to_thread
import orjson
from fastapi import APIRouter, Request, Response

from service.negotiate import VARY, choose
from service.routes.stored.documents import Name, absent
from service.routes.stored.estimates import described
from service.stations.ask.answers import OFFERED, encoded
from service.stations.ask.asked import asked_of
from service.stations.ask.overview import features_of, latest_page
from service.stations.ingest.keeping import told_place
from service.stations.times import rfc3339
from service.store.interface import Document

GEOJSON = "application/geo+json"
JSON = "application/json"
MOST = 1000

router = APIRouter(prefix="/v1", tags=["stations"])

_REST = {"revision": 17, "units": {"water_content": "m3/m3"}, "advisories": []}


def _shown(media_type: str, example: Any) -> dict[int | str, dict[str, Any]]:
    return {200: {"content": {media_type: {"schema": {"type": "object"}, "example": example}}}}


@router.get("/latest", summary="The last values of all stations", response_class=Response,
            openapi_extra=described(("shape",)), responses=_shown(JSON, {
                "latest": [{"station": "north-1", "time": "2026-05-04T06:00:00Z",
                            "probe": "rod-1", "depth": 0.2, "water_content": 0.315,
                            "age_seconds": 41.0, "flags": []}], **_REST}))  # fmt: skip
async def get_latest(request: Request) -> Response:
    """One row for each series of each station: its last reading, estimated, and its age."""
    media_type = choose(request.headers.get("accept"), request.query_params.get("format"), OFFERED)
    asked = asked_of(request.query_params.multi_items(), ("shape",), 1)
    allowed = getattr(request.state, "key_stations", ())

    def work() -> Response:
        page, _ = latest_page(request.app.state.shelf, asked, allowed)
        headers = {**VARY, "Cache-Control": "no-cache", "Row-Count": str(page.frame.height)}
        body = encoded(page.frame, media_type, "latest", page.rest, asked.shape)
        return Response(body, 200, headers, media_type)

    return await anyio.to_thread.run_sync(work)


@router.get("/stations.geojson", summary="Stations on a map", response_class=Response,
            responses=_shown(GEOJSON, {"type": "FeatureCollection", "features": [], **_REST})
            )  # fmt: skip
async def get_stations_geojson(request: Request) -> Response:
    """A point for each station (RFC 7946), with the last values of each depth."""
    choose(request.headers.get("accept"), None, {"geojson": GEOJSON, "json": JSON})
    asked = asked_of(request.query_params.multi_items(), (), 1)
    allowed = getattr(request.state, "key_stations", ())

    def work() -> Response:
        page, documents = latest_page(request.app.state.shelf, asked, allowed)
        body = orjson.dumps(features_of(page, documents, allowed))
        return Response(body, 200, {**VARY, "Cache-Control": "no-cache"}, GEOJSON)

    return await anyio.to_thread.run_sync(work)


@router.get("/stations/{name}/conflicts", summary="Readings that contradict kept ones",
            response_class=Response)  # fmt: skip
async def get_conflicts(request: Request, name: Name) -> Response:
    """Those that came with the key of a kept reading and other values, newest first.

    Impossible values in whose place there are possible ones now are among them.
    """
    choose(request.headers.get("accept"), request.query_params.get("format"), {"json": JSON})
    asked_of(request.query_params.multi_items(), (), 1, estimates=False)

    def work() -> Response:
        shelf = request.app.state.shelf
        _, documents = shelf.fresh()
        if documents.find("station", name) is None:
            raise absent("station", name, documents)
        found = [
            {
                "time": rfc3339(row["time"]),
                **told_place(row["place"]),
                "received": rfc3339(row["received"]),
                "sent": row["sent"],
            }
            for row in shelf.store.conflicts(name, MOST)
        ]
        return Response(orjson.dumps({"station": name, "conflicts": found}), 200, VARY, JSON)

    return await anyio.to_thread.run_sync(work)


@router.get("/changes", summary="Who changed what", response_class=Response,
            responses=_shown(JSON, {"changes": []}), openapi_extra={"parameters": [{
                "name": "after", "in": "query", "required": False,
                "description": "the last revision that is known already",
                "schema": {"type": "integer", "minimum": 0}}]})  # fmt: skip
async def list_changes(request: Request, after: int = 0) -> Response:
    """Every change of a soil, probe or station, oldest first, with the label of the key."""
    choose(request.headers.get("accept"), request.query_params.get("format"), {"json": JSON})
    after = max(0, min(after, 2**62))
    changes = await anyio.to_thread.run_sync(request.app.state.shelf.store.documents, after)
    told: dict[str, Any] = {"changes": [_told(change) for change in changes[:MOST]]}
    headers = dict(VARY)
    if len(changes) > MOST:
        told["next"] = f"{request.url.path}?after={changes[MOST - 1].revision}"
        headers["Link"] = f'<{told["next"]}>; rel="next"'
    return Response(orjson.dumps(told), 200, headers, JSON)


def _told(change: Document) -> dict[str, Any]:
    return {
        "revision": change.revision,
        "changed": rfc3339(change.changed),
        "changed_by": change.author,
        "kind": change.kind,
        "name": change.name,
        "deleted": change.body is None,
        "body": change.body,
    }
