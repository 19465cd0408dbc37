"""POST /v1/estimates: readings in, water content with its band out."""

from collections.abc import Mapping
from typing import Any

import anyio.to_thread
import orjson
from fastapi import APIRouter, Request
from fastapi.responses import Response
from pydantic import ValidationError

from models.estimate import Estimates, estimate
from models.readings import read
from service.errors import Malformed, Unprocessable
from service.faults import Fault, problems_of
from service.formats.json_estimates import encode, frame_of
from service.formats.json_readings import decode
from service.schemas.estimates import SETTINGS, EstimatesSettings, request_schema
from service.schemas.query import basis_of, echo_of, units_of_answer

router = APIRouter(tags=["estimates"])

INLINE = 2000
"""Readings up to which the answer is worked out at once; longer ones go to a thread."""


@router.post("/v1/estimates", summary="Water content with its band", openapi_extra={})
async def post_estimates(request: Request) -> Response:
    """Water content of each reading, with standard uncertainty, interval and flags."""
    body = await request.body()
    document = _parsed(body)
    readings = document.pop("readings")
    few = isinstance(readings, list) and len(readings) <= INLINE
    if few:
        return _answer(readings, document)
    return await anyio.to_thread.run_sync(_answer, readings, document)


def _parsed(body: bytes) -> dict[str, Any]:
    try:
        document = orjson.loads(body)
    except orjson.JSONDecodeError as error:
        raise Malformed(f"the body is not JSON: {error}") from None
    if not isinstance(document, dict):
        raise Unprocessable("expected an object", [Fault("expected an object", "#")])
    if "readings" not in document:
        raise Unprocessable("readings are missing", [Fault("readings is missing", "#/readings")])
    return document


def _settings(document: Mapping[str, Any]) -> EstimatesSettings:
    try:
        return SETTINGS.validate_python(document)
    except ValidationError as error:
        raise Unprocessable(
            "the request holds what cannot be used", problems_of(error, document, SETTINGS)
        ) from None


def _answer(readings: Any, document: Mapping[str, Any]) -> Response:
    settings = _settings(document)
    sent = decode(readings, most=20_000)
    basis = basis_of(settings, (*sent.numbers, *sent.texts))
    result: Estimates = estimate(read(sent.numbers, settings.units, {}), basis)
    frame = frame_of(result, sent, settings.units)
    units = units_of_answer((*sent.numbers, *result.columns), settings.units)
    rest = {"units": units, **echo_of(basis, settings)}
    return Response(encode(frame, sent.shape, rest), media_type="application/json")


SCHEMA = request_schema()
