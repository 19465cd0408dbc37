"""POST /v1/waveforms: TDR traces in; permittivity, conductivity and effective frequency out."""

from typing import Any

import anyio.to_thread
import orjson
from fastapi import APIRouter, Request
from fastapi.responses import Response

from models.conversion import refuse_units
from service.errors import UnsupportedMediaType
from service.negotiate import VARY, choose
from service.routes.json_object import object_of
from service.schemas.lengths import in_metres
from service.waveforms.answer import advice_of, probe_echo, rows_of, units_of
from service.waveforms.bodies import LENGTHS, WAVEFORMS, WaveformsBody
from service.waveforms.description import DESCRIPTION
from service.waveforms.measuring import measured, refuse_many
from service.waveforms.question import bench_of, checked, groups_of, in_hertz
from service.waveforms.traces import Place, refuse_coarse

router = APIRouter(tags=["records"])

JSON = "application/json"
EXAMPLE = (
    '{"probe": {"probe_length": 0.3}, "waveforms": [{"start": 4.1, "window": 5, '
    '"reflection_coefficient": [...]}]}'
)


@router.post("/v1/waveforms", summary="Permittivity and conductivity of TDR traces",
             openapi_extra=DESCRIPTION)  # fmt: skip
async def post_waveforms(request: Request) -> Response:
    """Apparent permittivity and bulk conductivity of each trace, with bands and flags."""
    media_type = request.headers.get("content-type", "").partition(";")[0].strip().lower()
    if media_type != JSON:
        raise UnsupportedMediaType(
            f"expected a Content-Type of {JSON}, found {media_type[:80] or 'none'}",
            headers={"Accept": JSON},
        )
    choose(request.headers.get("accept"), request.query_params.get("format"), {"json": JSON})
    body = await request.body()
    return await anyio.to_thread.run_sync(_answer, body)


def _answer(sent: bytes) -> Response:
    document = object_of(sent, EXAMPLE)
    document = in_metres(document, LENGTHS)
    told = orjson.dumps(answer_of(checked(WAVEFORMS, document)))
    return Response(told, media_type=JSON, headers=VARY)


def answer_of(body: WaveformsBody) -> dict[str, Any]:
    """The answer to a checked request, its waveforms in the shape they came.

    Raises ModelError and Unprocessable with the place of what cannot be used.
    """
    refuse_units(body.units)
    body = in_hertz(body, body.units)
    single = not isinstance(body.waveforms, list)
    bodies = body.waveforms if isinstance(body.waveforms, list) else [body.waveforms]
    refuse_many(len(bodies), body, "#/waveforms")
    where: dict[int, Place] = {
        k: ("waveforms",) if single else ("waveforms", k) for k in range(len(bodies))
    }
    groups = groups_of(dict(enumerate(bodies)), where)
    bench = bench_of(body, body.units)
    refuse_coarse(dict(enumerate(bodies)), where, bench.length)
    found = measured(groups, len(bodies), body, bench)
    rows = rows_of(found, bodies, body.units, body.coverage_probability)
    return {
        "waveforms": rows[0] if single else rows,
        "units": units_of(found.columns, found.figures, body.units),
        "method": body.method,
        "probe": probe_echo(found, body.units),
        "coverage_probability": body.coverage_probability,
        "advisories": [{"code": said.code, "text": said.text} for said in advice_of(bench, found)],
    }
