"""GET /v1/stations/{name}/estimates and profile: worked out when asked, from what is kept."""

from typing import Any

import anyio.to_thread
from fastapi import APIRouter, Request, Response

from service.negotiate import VARY, choose
from service.page.chart import MEDIA_TYPE as SVG
from service.routes.etag import tagged
from service.routes.stored.documents import Name
from service.routes.stored.paging import answered
from service.stations.ask.asked import asked_of
from service.stations.ask.charting import chart_of
from service.stations.ask.questions import estimates_page, profile_page, scene_of
from service.stations.ask.resampled import resampled_page
from service.stations.series_edges import EVERY

router = APIRouter(prefix="/v1/stations/{name}", tags=["stations"])

RANGE = ("start", "end", "probe", "depth", "at_revision", "limit", "after", "shape")
_TOLD = {
    "start": "first moment, RFC 3339",
    "end": "the moment before which it ends, RFC 3339",
    "probe": "readings that name this probe",
    "depth": "readings at this depth [m]: those that name it, and those of the probe there",
    "columns": "comma-separated names of the columns of the answer, beside time, probe, depth and "
    "flags; all unless given",
    "at_revision": "as the store was at this revision: readings, soils, probes, installations",
    "limit": "rows of a page; unless given 1000 of JSON, and of a table as many as an answer holds "
    "(page_rows at /v1/limits)",
    "after": "where a page begins: follow the Link of the one before",
    "shape": "rows or columns, of JSON",
    "every": f"means over {', '.join(EVERY)} instead of rows",
    "zone": "IANA zone that days and hours are counted in; the station's unless given",
    "mean": "plain or time-weighted",
    "quantity": "water_content, bulk_conductivity_25, pore_water_conductivity, "
    "saturation_extract_conductivity: one or several, comma-separated",
    "time": "moment, RFC 3339; now unless given",
    "within": "how old a reading may be: 90m, 1h, 2d; 1h unless given",
}


def described(names: tuple[str, ...]) -> dict[str, Any]:
    """How OpenAPI shows the parameters of a question."""
    return {
        "parameters": [
            {"name": name, "in": "query", "required": False, "description": _TOLD[name],
             "schema": {"type": "string"}}
            for name in names
        ]
    }  # fmt: skip


SERIES = (*RANGE, "columns", "every", "zone", "mean")
CHART = ("start", "end", "probe", "depth", "zone", "quantity", "at_revision")
PROFILE = ("time", "within", "probe", "depth", "columns", "at_revision", "shape")


@router.get(
    "/estimates",
    summary="Estimates of kept readings",
    openapi_extra=described(SERIES),
    response_class=Response,
)
async def get_estimates(request: Request, name: Name) -> Response:
    """Each reading with the soil and the probe that were installed at its time.

    So a better calibration corrects the whole record, and `at_revision` gives what was answered
    before. Words of POST /v1/estimates in the query, such as mixing_model, beat what is stored, and
    `soil` names a stored soil in place of the installed ones; words that cannot be used are refused
    as they are there. The band of a mean is that of its readings: the part they share stays, the
    other shrinks, below and above by itself. Headers of a table: `Row-Count`, `Truncated` where
    rows are left, `Not-Estimated` with the reasons for rows without a number.
    """
    asked = asked_of(
        request.query_params.multi_items(), SERIES, request.app.state.settings.page_rows
    )
    question = estimates_page if asked.every is None else resampled_page
    return await answered(request, name, asked, question, "estimates")


@router.get(
    "/chart.svg",
    summary="Chart of water content and salinity",
    openapi_extra=described(CHART),
    responses={200: {"content": {SVG: {"schema": {"type": "string"}, "example": "<svg/>"}}}},
    response_class=Response,
)
async def get_chart(request: Request, name: Name) -> Response:
    """SVG with bands, flags and gaps visible; the week up to the last reading unless asked."""
    choose(request.headers.get("accept"), request.query_params.get("format"), {"svg": SVG})
    asked = asked_of(
        request.query_params.multi_items(), CHART, request.app.state.settings.page_rows
    )

    def work() -> Response:
        scene = scene_of(request.app.state.shelf, name, asked)
        headers = {**VARY, "Store-Revision": str(scene.revision)}
        headers["Content-Security-Policy"] = "default-src 'none'; style-src 'unsafe-inline'"
        return tagged(request, chart_of(scene, asked).encode(), SVG, headers)

    return await anyio.to_thread.run_sync(work)


@router.get(
    "/profile",
    summary="The last estimate of each depth",
    openapi_extra=described(PROFILE),
    response_class=Response,
)
async def get_profile(request: Request, name: Name) -> Response:
    """At or before a moment, from the top down, each with its age."""
    asked = asked_of(
        request.query_params.multi_items(), PROFILE, request.app.state.settings.page_rows
    )
    return await answered(request, name, asked, profile_page, "profile")
