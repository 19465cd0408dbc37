"""Whether the service lives, serves, and how much it takes."""

import platform
from importlib.metadata import version
from typing import Any

import anyio.to_thread
from fastapi import APIRouter, Request, Response

from service import __version__
from service.errors import Unavailable
from service.metrics import MEDIA_TYPE, exposition
from service.settings import LIMITS, Settings

LIBRARIES = ("numpy", "scipy", "polars", "pyarrow", "pydantic", "fastapi", "uvicorn")

router = APIRouter(tags=["service"])


def versions() -> dict[str, str]:
    """What answers, and what it stands on."""
    libraries = {name: version(name) for name in LIBRARIES}
    return {"gleyline": __version__, "python": platform.python_version(), **libraries}


def limits_of(settings: Settings) -> dict[str, Any]:
    """The limits a client meets."""
    return {name: getattr(settings, name) for name in LIMITS}


def _example(value: dict[str, Any]) -> dict[int | str, dict[str, Any]]:
    return {200: {"content": {"application/json": {"example": value}}}}


ALIVE, READY = {"status": "alive"}, {"status": "ready"}
TEXT = MEDIA_TYPE.partition(";")[0]
NUMBERS = 'gleyline_requests_total{method="GET",route="/livez",status="200"} 3.0\n'
VERSIONS = versions()
DEFAULT_LIMITS = limits_of(Settings.model_construct())


@router.get("/livez", summary="Whether the process lives", responses=_example(ALIVE))
async def livez() -> dict[str, str]:
    """Answers as long as the process can answer at all."""
    return ALIVE


@router.get("/readyz", summary="Whether requests are served", responses=_example(READY))
async def readyz(request: Request) -> dict[str, str]:
    """503 with Retry-After while it is stopping, or its store does not answer."""
    if request.app.state.draining:
        raise Unavailable("the service is stopping; requests under way are still answered")
    await anyio.to_thread.run_sync(request.app.state.shelf.store.head)
    return READY


@router.get(
    "/metrics",
    summary="Numbers of this service",
    response_class=Response,
    responses={200: {"content": {TEXT: {"schema": {"type": "string"}, "example": NUMBERS}}}},
)
async def show_metrics() -> Response:
    """For Prometheus: requests and their time by route, rows, tables under way, spooled bytes."""
    return Response(exposition(), headers={"Content-Type": MEDIA_TYPE})


@router.get("/v1/version", summary="Versions", responses=_example(VERSIONS))
async def show_version() -> dict[str, str]:
    """The service, Python, and the libraries that compute, read and answer."""
    return VERSIONS


@router.get("/v1/limits", summary="How much is taken in", responses=_example(DEFAULT_LIMITS))
async def show_limits(request: Request) -> dict[str, Any]:
    """Bytes are counted after decompression, except `wire_body_bytes`."""
    return limits_of(request.app.state.settings)
