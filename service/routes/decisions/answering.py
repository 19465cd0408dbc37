"""A decision asked for in JSON and answered in JSON."""

from collections.abc import Callable, Mapping
from typing import Any

import anyio.to_thread
import orjson
from fastapi import Request
from fastapi.responses import Response
from pydantic import TypeAdapter

from service.errors import UnsupportedMediaType
from service.negotiate import VARY, choose
from service.routes.json_object import object_of
from service.waveforms.question import checked

JSON = "application/json"
Answer = Callable[[Any], Mapping[str, Any]]


async def answered(
    request: Request, adapter: TypeAdapter[Any], answer_of: Answer, example: str
) -> Response:
    """The answer to a request.

    adapter: what its body is checked against. example: what such a body looks like.
    """
    media_type = request.headers.get("content-type", "").partition(";")[0].strip().lower()
    if media_type != JSON:
        raise UnsupportedMediaType(
            f"expected a Content-Type of {JSON}, found {media_type[:80] or 'none'}",
            headers={"Accept": JSON},
        )
    choose(request.headers.get("accept"), request.query_params.get("format"), {"json": JSON})
    body = await request.body()

    def work() -> Response:
        told = answer_of(checked(adapter, object_of(body, example)))
        return Response(orjson.dumps(told), media_type=JSON, headers=VARY)

    return await anyio.to_thread.run_sync(work)
