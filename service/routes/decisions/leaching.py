"""POST /v1/leaching: leaching requirement, what a water comes to, yield and class of salinity."""

from fastapi import APIRouter, Request
from fastapi.responses import Response

from service.decisions.leaching.answer import answer_of
from service.decisions.leaching.bodies import DESCRIPTION, LEACHING
from service.routes.decisions.answering import answered

router = APIRouter(tags=["decisions"])

EXAMPLE = (
    '{"fields": [{"water_conductivity": 1.2, "crop": "maize-grain", "evapotranspiration": 800}]}'
)


@router.post("/v1/leaching", summary="Leaching requirement, yield response and salinity class",
             openapi_extra=DESCRIPTION)  # fmt: skip
async def post_leaching(request: Request) -> Response:
    """Leaching requirement, applied water, salt down the root zone, yield and salinity class."""
    return await answered(request, LEACHING, answer_of, EXAMPLE)
