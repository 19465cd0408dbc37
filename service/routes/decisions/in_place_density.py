"""POST /v1/in-place-density: water content and dry density of compacted soil by TDR."""

from fastapi import APIRouter, Request
from fastapi.responses import Response

from service.decisions.in_place.answer import answer_of
from service.decisions.in_place.bodies import DESCRIPTION, PLACES
from service.routes.decisions.answering import answered

router = APIRouter(tags=["decisions"])

EXAMPLE = (
    '{"coefficients": {"a": 1.0, "b": 8.5}, "mould": {"apparent_permittivity": 14.7, '
    '"total_density": 1.995}, "places": [{"apparent_permittivity": 13.5}]}'
)


@router.post("/v1/in-place-density", summary="Water content and dry density in place, by TDR",
             openapi_extra=DESCRIPTION)  # fmt: skip
async def post_in_place_density(request: Request) -> Response:
    """Water content and dry density of compacted soil, in two steps or in one."""
    return await answered(request, PLACES, answer_of, EXAMPLE)
