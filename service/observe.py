"""The outermost layer: request ids, timing, HEAD, the access log, and answers to what failed."""

import logging
import os
import re
import time
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field

from starlette.types import ASGIApp, Message, Receive, Scope, Send

from service.errors import InternalError, answer, as_problem

REQUEST_ID = re.compile(r"[A-Za-z0-9._-]{1,64}")
"""Request ids that are taken from the caller; others are replaced."""

failures = logging.getLogger("gleyline.failure")
access = logging.getLogger("gleyline.access")


@dataclass(slots=True)
class Exchange:
    """One request and what became of it; nothing in it is secret."""

    scope: Scope
    method: str
    request_id: str
    started: float = field(default_factory=time.perf_counter)
    status: int = 0
    sent_bytes: int = 0
    rows: int = 0
    """Readings that were answered, and those of them that carry a flag."""
    flagged: int = 0
    complete: bool = False

    @property
    def path(self) -> str:
        """As the client wrote it, percent-encoded, without the query."""
        raw = self.scope.get("raw_path") or self.scope["path"].encode()
        return bytes(raw).partition(b"?")[0].decode("ascii", "backslashreplace")

    @property
    def milliseconds(self) -> float:
        """Since the request came."""
        return (time.perf_counter() - self.started) * 1e3


Observer = Callable[[Exchange], None]
Header = tuple[bytes, bytes]


def write_access_log(exchange: Exchange) -> None:
    """One line per request, without the query."""
    if not access.isEnabledFor(logging.INFO):
        return
    access.info(
        "%s %s %d",
        exchange.method,
        exchange.path,
        exchange.status,
        extra={
            "fields": {
                "method": exchange.method,
                "path": exchange.path,
                "status": exchange.status,
                "milliseconds": round(exchange.milliseconds, 1),
                "bytes": exchange.sent_bytes,
                "request_id": exchange.request_id,
                "key": exchange.scope["state"].get("key_label"),
            }
        },
    )


class Observe:
    """ASGI layer around everything, so that every answer carries its headers.

    The scope is changed in place: what routing finds out stays visible to ``observers``, which
    are called once an exchange is over.
    """

    def __init__(self, app: ASGIApp, observers: Sequence[Observer] = (write_access_log,)) -> None:
        self.app = app
        self.observers = tuple(observers)

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Answer one request, whatever happens below."""
        if scope["type"] != "http":
            await self.app(scope, receive, send)
            return
        exchange = Exchange(scope, scope["method"], _request_id(scope))
        scope.setdefault("state", {})["request_id"] = exchange.request_id
        if exchange.method == "HEAD":
            scope["method"] = "GET"
        outwards = _sender(exchange, send)
        try:
            await self.app(scope, receive, outwards)
        except Exception as error:  # what nobody expected ends here
            problem = as_problem(error)
            if problem.status == InternalError.status:
                _log_failure(exchange, error)
            if not exchange.status:
                await answer(scope, problem)(scope, receive, outwards)
            elif not exchange.complete:
                raise
        finally:
            for observer in self.observers:
                observer(exchange)


def _log_failure(exchange: Exchange, error: Exception) -> None:
    failures.error(
        "%s %s failed",
        exchange.method,
        exchange.path,
        exc_info=error,
        extra={"fields": {"request_id": exchange.request_id}},
    )


def _request_id(scope: Scope) -> str:
    given = next((value for name, value in scope["headers"] if name == b"x-request-id"), b"")
    text: str = given.decode("latin-1")
    return text if REQUEST_ID.fullmatch(text) else os.urandom(16).hex()


def _sender(exchange: Exchange, send: Send) -> Send:
    """``send`` with our headers; to HEAD without the body."""
    head = exchange.method == "HEAD"

    async def outwards(message: Message) -> None:
        if message["type"] == "http.response.start":
            exchange.status = message["status"]
            exchange.scope["method"] = exchange.method  # the server frames the answer by it
            message["headers"] = _told(exchange, message.get("headers", ()))
        elif message["type"] == "http.response.body":
            if head:
                message = {**message, "body": b""}
            exchange.sent_bytes += len(message.get("body", b""))
            exchange.complete = not message.get("more_body", False)
        await send(message)

    return outwards


def _told(exchange: Exchange, given: Iterable[Header]) -> list[Header]:
    """The headers of an answer with those that every answer has; its counts are noted."""
    headers, stages = [], b""
    for header in given:
        name, value = header
        if name == b"server-timing":
            stages = value + b", "
            continue
        if name == b"row-count":
            exchange.rows = int(value)
        elif name == b"flagged-count":
            exchange.flagged = int(value)
        if name not in _OURS:
            headers.append(header)
    return [
        *headers,
        (b"x-request-id", exchange.request_id.encode()),
        (b"server-timing", b"%stotal;dur=%.1f" % (stages, exchange.milliseconds)),
        (b"x-content-type-options", b"nosniff"),
    ]


_OURS = frozenset({b"x-request-id", b"x-content-type-options"})
