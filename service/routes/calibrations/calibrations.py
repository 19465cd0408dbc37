"""POST /v1/calibrations: pairs of permittivity and water content in; a mixing model out."""

from fastapi import APIRouter, Request
from fastapi.responses import Response

from service.calibrations.answer import answer_of
from service.calibrations.bodies import CALIBRATIONS
from service.calibrations.description import DESCRIPTION
from service.routes.decisions.answering import answered

router = APIRouter(tags=["calibrations"])

EXAMPLE = (
    '{"pairs": {"apparent_permittivity": [4.2, 9.1, 15.8, 24.0], '
    '"water_content": [0.06, 0.17, 0.28, 0.38]}}'
)


@router.post("/v1/calibrations", summary="A soil's own curve from measured pairs",
             openapi_extra=DESCRIPTION)  # fmt: skip
async def post_calibrations(request: Request) -> Response:
    """Coefficients, covariance, leave-one-out error and bands; to be used as mixing_model."""
    return await answered(request, CALIBRATIONS, answer_of, EXAMPLE)
