"""Our layers around routes that answer with the body as it arrived, or fail."""

import hashlib
import socket
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import uvicorn
from fastapi import APIRouter, Request
from pydantic import BaseModel
from starlette.types import ASGIApp

from models.errors import Complaint, ParameterError, UnknownName
from service.app import create_api, surrounded
from service.settings import Settings

LIMIT = 100_000
BATCH_LIMIT = 20_000_000
STALL = 0.5

router = APIRouter(prefix="/v1/estimates")


class Typed(BaseModel):
    number: int


@router.post("/echo")
async def echo_body(request: Request) -> dict[str, object]:
    digest, size = hashlib.sha256(), 0
    async for piece in request.stream():
        digest.update(piece)
        size += len(piece)
    return {"bytes": size, "sha256": digest.hexdigest(), "sent": dict(request.headers)}


@router.post("/typed")
async def echo_typed(body: Typed, factor: int = 1) -> dict[str, int]:
    return {"number": body.number * factor}


@router.get("/failing")
async def fail() -> None:
    raise RuntimeError("secret detail")


@router.get("/unknown-name")
async def fail_on_name() -> None:
    raise UnknownName("mixing model", "tarot", ["topp-1980"])


@router.get("/bad-parameter")
async def fail_on_parameter() -> None:
    raise ParameterError("crim", [Complaint("porosity", "needs porosity (share of pores)")])


def echo_app(data: Path) -> ASGIApp:
    settings = Settings(
        data=data,
        json_body_bytes=LIMIT,
        batch_body_bytes=BATCH_LIMIT,
        wire_body_bytes=BATCH_LIMIT // 10,
        body_stall_seconds=STALL,
    )
    api = create_api(settings)
    api.include_router(router)
    return surrounded(api, settings)


@contextmanager
def running(app: ASGIApp) -> Iterator[str]:
    """Serve on a free port of loopback in a thread; the base URL."""
    listener = socket.create_server(("127.0.0.1", 0))
    server = uvicorn.Server(uvicorn.Config(app, log_config=None, access_log=False))
    thread = threading.Thread(target=server.run, kwargs={"sockets": [listener]})
    thread.start()
    try:
        yield f"http://127.0.0.1:{listener.getsockname()[1]}"
    finally:
        server.should_exit = True
        thread.join(20)
