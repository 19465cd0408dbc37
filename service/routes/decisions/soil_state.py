"""POST /v1/soil-state: porosity, saturation, densities and compaction of soils."""

from fastapi import APIRouter, Request
from fastapi.responses import Response

from service.decisions.soil_state import DESCRIPTION, SOIL_STATES, answer_of
from service.routes.decisions.answering import answered

router = APIRouter(tags=["decisions"])

EXAMPLE = '{"soils": [{"water_content": 0.24, "bulk_density": 1.6}]}'


@router.post("/v1/soil-state", summary="Porosity, saturation, densities and compaction of soils",
             openapi_extra=DESCRIPTION)  # fmt: skip
async def post_soil_state(request: Request) -> Response:
    """State of soils from volumetric water content and dry density, with bands and flags."""
    return await answered(request, SOIL_STATES, answer_of, EXAMPLE)
