"""POST /v1/root-zone: water in the root zone, what is missing, and how sure that is."""

from fastapi import APIRouter, Request
from fastapi.responses import Response

from service.decisions.root_zone.answer import answer_of
from service.decisions.root_zone.bodies import DESCRIPTION, ROOT_ZONES
from service.routes.decisions.answering import answered

router = APIRouter(tags=["decisions"])

EXAMPLE = (
    '{"root_zones": [{"water_content": 0.21, "field_capacity": 0.32, "wilting_point": 0.12, '
    '"root_depth": 0.8, "depletion_fraction": 0.4}]}'
)


@router.post("/v1/root-zone", summary="Storage, depletion and refill depth of root zones",
             openapi_extra=DESCRIPTION)  # fmt: skip
async def post_root_zone(request: Request) -> Response:
    """Water and salt of root zones, depletion and refill depth, with bands and flags."""
    return await answered(request, ROOT_ZONES, answer_of, EXAMPLE)
