"""GET /problems: every `type` an error can have, and what to do about it."""

from typing import Any

from fastapi import APIRouter

from service.errors import PROBLEMS, NotFound, Problem, Unprocessable
from service.faults import hint, shortened

router = APIRouter(prefix="/problems", tags=["service"])


def _described(kind: type[Problem]) -> dict[str, Any]:
    return {
        "type": f"/problems/{kind.slug}",
        "status": kind.status,
        "title": kind.title(),
        "meaning": kind.meaning(),
    }


def _example(value: Any) -> dict[int | str, dict[str, Any]]:
    return {200: {"content": {"application/json": {"example": value}}}}


@router.get(
    "",
    summary="Kinds of problem",
    responses=_example({"problems": [_described(Unprocessable)]}),
)
async def list_problems() -> dict[str, Any]:
    """The `type` of every application/problem+json answer is one of these addresses."""
    return {"problems": [_described(kind) for kind in PROBLEMS.values()]}


@router.get("/{slug}", summary="One kind of problem", responses=_example(_described(Unprocessable)))
async def show_problem(slug: str) -> dict[str, Any]:
    """What a `type` stands for, and what the caller can do."""
    if slug not in PROBLEMS:
        called = f"{shortened(slug)}{hint(slug, PROBLEMS)}"
        raise NotFound(f"no kind of problem is called {called}")
    return _described(PROBLEMS[slug])
