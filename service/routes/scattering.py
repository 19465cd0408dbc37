"""POST /v1/scattering: a two-port sweep of a filled line in, permittivity and permeability out."""

from typing import Any

from fastapi import APIRouter, Request
from fastapi.responses import Response

from models.reflection.two_port.estimate import estimate_constants
from service.routes.reflections import answered, description_of
from service.sweeps.answer import two_port_answer
from service.sweeps.bodies import SCATTERING, ScatteringBody
from service.sweeps.question import body_of
from service.sweeps.two_port import two_port_question

router = APIRouter(tags=["records"])

EXAMPLE = '{"sample": {"touchstone": "..."}, "line": {"sample_length": 0.03}}'

DESCRIPTION = description_of(
    SCATTERING,
    "S-parameters of an air line with a sample in it, as complex numbers or Touchstone text. With "
    "`holder_length` and without `air_before` the position of the sample is found.",
    "The spectrum with standard uncertainties: `_u` all of it, `_u_shared` what lengths and "
    "position leave open; permeability where the sample is magnetic, or the method tells it. "
    "What contradicts a permeability of 1, the position or the symmetry of the sample is flagged "
    "at every point; a permeability far below 1 is that of no soil and leaves no number.",
)


@router.post("/v1/scattering", summary="Permittivity and permeability from two ports",
             openapi_extra=DESCRIPTION)  # fmt: skip
async def post_scattering(request: Request) -> Response:
    """Permittivity, and permeability where it is not 1, of a sample between two ports."""
    return await answered(request, _answer, EXAMPLE)


def _answer(document: dict[str, Any]) -> dict[str, Any]:
    body: ScatteringBody = body_of(document, SCATTERING)
    query, said = two_port_question(body)
    return two_port_answer(body, estimate_constants(query), said)
