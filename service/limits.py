"""How much of a request is taken in: bytes on the wire and decoded, headers, time."""

import asyncio
import time
import zlib
from dataclasses import dataclass, replace
from typing import Protocol

from starlette.datastructures import Headers
from starlette.types import ASGIApp, Message, Receive, Scope, Send

from service.errors import HeadersTooLarge, Malformed, Stalled, TooLarge, UnsupportedMediaType
from service.settings import Settings

BATCH_PATHS = ("/v1/estimates", "/v1/stations/")
"""Paths that take a table of any length as their body."""
RECORD_PATHS = ("/v1/waveforms", "/v1/reflections", "/v1/scattering", "/v1/spectra")
"""Paths that take raw records: longer documents than readings make."""
JSON = "JSON"
RECORDS = "JSON records"
JSON_SUFFIXES = ("/json", "+json")

PIECE = 64 * 1024
"""Most bytes that come out at a time, however well they were compressed."""
_GZIP = 16 + zlib.MAX_WBITS


@dataclass(frozen=True, slots=True)
class BodyLimit:
    """Most bytes of one body."""

    wire: int
    decoded: int
    kind: str

    def refusal(self, counted: str, most: int) -> TooLarge:
        """The answer to a body above it."""
        way = "send a long table as CSV or NDJSON" if self.kind == JSON else "send it in parts"
        return TooLarge(f"the {self.kind} body has more than {most} bytes {counted}; {way}")


def limit_of(path: str, media_type: str, settings: Settings) -> BodyLimit:
    """The limit for a body: a JSON document is held in memory, a table streams."""
    kind = media_type.partition(";")[0].strip().lower()
    if path.startswith(BATCH_PATHS) and kind and not kind.endswith(JSON_SUFFIXES):
        return BodyLimit(settings.wire_body_bytes, settings.batch_body_bytes, kind)
    if path.startswith(RECORD_PATHS):
        return BodyLimit(settings.record_body_bytes, settings.record_body_bytes, RECORDS)
    return BodyLimit(settings.json_body_bytes, settings.json_body_bytes, JSON)


class LimitBody:
    """ASGI layer that counts, decodes and times the body while the route reads it.

    What it refuses it raises: before the route starts where the headers tell, else from
    ``receive``.
    """

    def __init__(self, app: ASGIApp, settings: Settings) -> None:
        self.app = app
        self.settings = settings

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Let a request through, its body watched."""
        if scope["type"] != "http":
            await self.app(scope, receive, send)
            return
        self._check_headers(scope)
        headers = Headers(scope=scope)
        limit = limit_of(scope["path"], headers.get("content-type", ""), self.settings)
        encoded = _is_gzip(headers)
        if not encoded:
            limit = replace(limit, wire=limit.decoded)
        if int(headers.get("content-length", "0")) > limit.wire:
            raise limit.refusal("as announced", limit.wire)
        if encoded:
            _hide_encoding(scope)
        body = Body(receive, limit, self.settings, Gunzip() if encoded else Plain())
        await self.app(scope, body.receive, send)

    def _check_headers(self, scope: Scope) -> None:
        most = self.settings.header_bytes
        sizes = (len(name) + len(value) + 4 for name, value in scope["headers"])
        if sum(sizes) + len(scope.get("query_string", b"")) > most:
            raise HeadersTooLarge(f"headers and query have more than {most} bytes")


class Decoder(Protocol):
    """Bytes go in by ``feed`` and come out by ``take``."""

    @property
    def at_end(self) -> bool:
        """Whether nothing comes out any more, unless more goes in."""
        ...

    def feed(self, data: bytes) -> None:
        """Add bytes as they came."""
        ...

    def take(self) -> bytes:
        """Some decoded bytes; none when more input is needed. Raises Malformed."""
        ...

    def close(self) -> None:
        """Raise Malformed unless what was fed is complete."""
        ...


class Plain:
    """Nothing to decode."""

    at_end = True

    def __init__(self) -> None:
        self._waiting = b""

    def feed(self, data: bytes) -> None:
        """See Decoder."""
        self._waiting += data

    def take(self) -> bytes:
        """See Decoder."""
        piece, self._waiting = self._waiting, b""
        return piece

    def close(self) -> None:
        """See Decoder."""


class Gunzip:
    """Gzip of one or more members, at most PIECE bytes at a time."""

    at_end = False
    """Only what comes next tells."""

    def __init__(self) -> None:
        self._member = zlib.decompressobj(_GZIP)
        self._waiting = b""
        self._begun = False

    def feed(self, data: bytes) -> None:
        """See Decoder."""
        self._waiting += data

    def take(self) -> bytes:
        """See Decoder."""
        while self._waiting:
            if self._member.eof:
                self._member, self._begun = zlib.decompressobj(_GZIP), False
            self._begun = True
            try:
                piece = self._member.decompress(self._waiting, PIECE)
            except zlib.error as error:
                raise Malformed(
                    f"the body is not gzip, as Content-Encoding says: {error}"
                ) from None
            self._waiting = self._member.unconsumed_tail or self._member.unused_data
            if piece:
                return piece
        return b""

    def close(self) -> None:
        """See Decoder."""
        if self._begun and not self._member.eof:
            raise Malformed("the gzip body ends before its end: it was cut off")


class Body:
    """One request body: ``receive`` gives it on, decoded, as far as its limit."""

    def __init__(
        self, receive: Receive, limit: BodyLimit, settings: Settings, decoder: Decoder
    ) -> None:
        self._receive = receive
        self._limit = limit
        self._decoder = decoder
        self._stall = settings.body_stall_seconds
        self._end = time.monotonic() + settings.request_seconds
        self._wire = self._decoded = 0
        self._arrived = self._over = False

    async def receive(self) -> Message:
        """The next part of the body.

        Raises Stalled, TooLarge or Malformed.
        """
        if self._over:
            return await self._receive()
        piece = self._decoder.take()
        if piece:
            await asyncio.sleep(0)  # what was decoded is there at once: let others have their turn
        while not piece and not self._arrived:
            message = await self._next()
            if message["type"] != "http.request":
                return message
            self._take_in(message.get("body", b""))
            self._arrived = not message.get("more_body", False)
            piece = self._decoder.take()
        self._decoded += len(piece)
        if self._decoded > self._limit.decoded:
            raise self._limit.refusal("after decoding", self._limit.decoded)
        if not piece or (self._arrived and self._decoder.at_end):
            self._decoder.close()
            self._over = True
        return {"type": "http.request", "body": piece, "more_body": not self._over}

    def _take_in(self, data: bytes) -> None:
        self._wire += len(data)
        if self._wire > self._limit.wire:
            raise self._limit.refusal("as sent", self._limit.wire)
        self._decoder.feed(data)

    async def _next(self) -> Message:
        patience = min(self._stall, self._end - time.monotonic())
        try:
            async with asyncio.timeout(patience):
                return await self._receive()
        except TimeoutError:
            raise Stalled(
                f"the body did not go on within {self._stall:g} s, or not end in time",
                headers={"Connection": "close"},
            ) from None


def _is_gzip(headers: Headers) -> bool:
    """Whether the body is compressed; raises UnsupportedMediaType for what is not read here."""
    encoding = ", ".join(headers.getlist("content-encoding")).strip().lower()
    if encoding in {"", "identity"}:
        return False
    if encoding in {"gzip", "x-gzip"}:
        return True
    raise UnsupportedMediaType(
        f"Content-Encoding {encoding[:80]} is not read here; send gzip or none",
        headers={"Accept-Encoding": "gzip"},
    )


def _hide_encoding(scope: Scope) -> None:
    """Take out, in place, what is no longer true of the decoded body."""
    gone = {b"content-encoding", b"content-length"}
    scope["headers"] = [pair for pair in scope["headers"] if pair[0] not in gone]
