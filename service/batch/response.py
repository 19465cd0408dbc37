"""A spool as the body of an answer."""

from collections.abc import Mapping

import anyio.to_thread
from starlette.responses import Response
from starlette.types import Receive, Scope, Send

from service.batch.conversion import PIECE
from service.formats.spool import Spool


class SpooledResponse(Response):
    """Everything in a spool, with its length; the spool is closed however it ends."""

    def __init__(self, spool: Spool, media_type: str, headers: Mapping[str, str]) -> None:
        length = {"Content-Length": str(spool.rewind())}
        super().__init__(headers={**headers, **length}, media_type=media_type)
        self._spool = spool

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:  # noqa: ARG002
        """Send it, a piece at a time."""
        try:
            await send(
                {
                    "type": "http.response.start",
                    "status": self.status_code,
                    "headers": self.raw_headers,
                }
            )
            while piece := await anyio.to_thread.run_sync(self._spool.read, PIECE):
                await send({"type": "http.response.body", "body": piece, "more_body": True})
            await send({"type": "http.response.body", "body": b"", "more_body": False})
        finally:
            self._spool.close()
