"""POST /v1/spectra: a permittivity spectrum in; relaxation terms, circuit, chart and soil out."""

from collections.abc import Mapping
from typing import Any

import anyio.to_thread
import orjson
from fastapi import APIRouter, Request
from fastapi.responses import Response

from models.conversion import refuse_units, unit_of
from models.spectrum import Interpretation, interpret
from models.spectrum.views import UNIT_CUBE
from service.errors import Unprocessable, UnsupportedMediaType
from service.faults import Fault
from service.negotiate import VARY, choose
from service.page.svg import MEDIA_TYPE as SVG
from service.routes.json_object import object_of
from service.spectra.answer import answer_of
from service.spectra.bodies import SPECTRA, SpectraBody
from service.spectra.chart import chart_of
from service.spectra.circuits import CircuitBody, circuit_from, material_echo
from service.spectra.question import body_of, question_of, sent_spectrum

router = APIRouter(tags=["records"])

JSON = "application/json"
EXAMPLE = (
    '{"spectrum": {"frequency": [1e8, 1e9], "real_permittivity": [20, 18], '
    '"imaginary_permittivity": [4, 2]}}'
)
OFFERED: Mapping[str, str] = {"json": JSON, "svg": SVG}


def request_schema() -> dict[str, Any]:
    """JSON schema of the body, its parts in the components of the description."""
    schema = SPECTRA.json_schema(ref_template="#/components/schemas/{model}")
    schema.pop("$defs", None)
    return schema


DESCRIPTION: dict[str, Any] = {
    "requestBody": {
        "required": True,
        "description": "A spectrum, and what is asked of it. Complex numbers are those of "
        "exp(+j w t): the imaginary part of a lossy permittivity is below zero. A spectrum of the "
        "other convention is conjugated once, with a flag that says so.",
        "content": {JSON: {"schema": request_schema()}},
    },
    "responses": {
        "200": {
            "description": "Terms with bands, the fitted curve, the equivalent circuit, and where "
            "a soil is described its water; or the chart.",
            "content": {JSON: {"schema": {"type": "object"}}, SVG: {"schema": {"type": "string"}}},
        }
    },
}


@router.post("/v1/spectra", summary="Relaxation terms of a spectrum, and the soil behind it",
             openapi_extra=DESCRIPTION)  # fmt: skip
async def post_spectra(request: Request) -> Response:
    """Fit of a permittivity spectrum, as JSON or, by Accept, as a chart."""
    media_type = request.headers.get("content-type", "").partition(";")[0].strip().lower()
    if media_type != JSON:
        raise UnsupportedMediaType(
            f"expected a Content-Type of {JSON}, found {media_type[:80] or 'none'}",
            headers={"Accept": JSON},
        )
    answered = choose(request.headers.get("accept"), request.query_params.get("format"), OFFERED)
    document = object_of(await request.body(), EXAMPLE)
    return await anyio.to_thread.run_sync(_answer, document, answered)


def _answer(document: dict[str, Any], answered: str) -> Response:
    body = body_of(document)
    if body.circuit is not None:
        return _of_circuit(body, body.circuit, answered)
    found, cell = interpreted(body)
    if answered == SVG:
        return Response(chart_of(found, body, cell), media_type=SVG, headers=VARY)
    return _json(answer_of(found, body, cell))


def _of_circuit(body: SpectraBody, circuit: CircuitBody, answered: str) -> Response:
    if body.spectrum is not None:
        raise _refusal("a request holds a spectrum or a circuit, found both", "#/circuit")
    if answered == SVG:
        raise _refusal("a circuit is answered in JSON: send Accept: application/json", "Accept")
    refuse_units(body.units)
    frequency = unit_of("frequency", body.units).to_si(body.frequency or [])
    if frequency.size and not frequency.min() > 0:
        raise _refusal("frequency must be above 0", "#/frequency")
    return _json(material_echo(circuit_from(circuit), frequency, body.units))


def _json(told: dict[str, Any]) -> Response:
    body = orjson.dumps(told, option=orjson.OPT_SERIALIZE_NUMPY)
    return Response(body, media_type=JSON, headers=VARY)


def _refusal(detail: str, place: str) -> Unprocessable:
    return Unprocessable(detail, [Fault(detail, place)])


def interpreted(body: SpectraBody) -> tuple[Interpretation, float]:
    """The interpretation of a request's spectrum, and its cell, F."""
    if body.spectrum is None:
        raise _refusal("spectrum is missing", "#/spectrum")
    question = question_of(body)
    cell = body.cell.capacitance if body.cell else None
    spectrum = sent_spectrum(body.spectrum, body.units, cell)
    return interpret(spectrum, question), cell or UNIT_CUBE
