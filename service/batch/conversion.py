"""A table of any length in, the same rows with their answers out, in bounded memory.

The answer is spooled and begins after the last byte of the table. A response that is written
while the request is still read loses bodies: a client that sends everything before it reads
would wait for ever, and a server that looks for a disconnect swallows what is still arriving.
"""

import errno
import io
from collections.abc import AsyncIterator, Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import IO

import anyio
import anyio.lowlevel
import anyio.to_thread
import numpy as np
from starlette.responses import Response
from starlette.types import Receive, Scope, Send

from service.formats.block import Answer, Block, Decoder, Encoder, refuse_first
from service.formats.errors import SpoolFull

PIECE = 1 << 20
"""Bytes that are read, computed or sent at a time."""
IN_MEMORY = 8 << 20
"""Bytes of an answer above which it is kept in a file."""

_FULL = frozenset({errno.ENOSPC, errno.EDQUOT, errno.EFBIG})


@dataclass(frozen=True, slots=True)
class Counts:
    """How many rows were answered, and how many of them carry a flag."""

    rows: int = 0
    flagged: int = 0


@dataclass(slots=True)
class Conversion:
    """One table on its way from its decoder to its encoder.

    answer: what is appended to the rows of a block.
    strict: refuse the table at the first cell that cannot be read, or is missing and needed.
    """

    decoder: Decoder
    encoder: Encoder
    answer: Callable[[Block], Answer]
    strict: bool = False
    counts: Counts = field(default=Counts(), init=False)
    _names: tuple[str, ...] | None = field(default=None, init=False)

    def feed(self, piece: bytes) -> Iterator[bytes]:
        """The answer as far as this piece completes it. Raises FormatError."""
        return self._encoded(self.decoder.feed(piece))

    def close(self) -> Iterator[bytes]:
        """The rest of the answer. Raises FormatError."""
        yield from self._encoded(self.decoder.close())
        yield self.encoder.end()

    def _encoded(self, blocks: Iterable[Block]) -> Iterator[bytes]:
        for block in blocks:
            answer = self.answer(block)
            if self.strict:
                refuse_first(block, answer)
            if self._names is None:
                self._names = tuple(answer.columns)
                yield self.encoder.start(block.header, self._names)
            if self._names != tuple(answer.columns):
                raise ValueError("every block of a table is answered with the same columns")
            if len(block):
                yield self.encoder.block(block, answer)
                flagged = int(np.count_nonzero(answer.flags))
                self.counts = Counts(self.counts.rows + len(block), self.counts.flagged + flagged)


async def convert_stream(
    chunks: AsyncIterator[bytes], conversion: Conversion, spool: IO[bytes]
) -> Counts:
    """Convert a body while it arrives; its answer stands in ``spool`` from where that was.

    While a piece is worked on, nothing more is taken in: a client sends no faster than that, and
    one piece is held. One thread of the process works at a time, whatever the number of bodies;
    they take turns piece by piece.
    Raises FormatError, SpoolFull, and what ``chunks`` raises.
    """

    def work(piece: bytes) -> None:
        _write(spool, conversion.feed(piece))

    async for piece in _pieces(chunks):
        await anyio.to_thread.run_sync(work, piece, limiter=_worker())
    await anyio.to_thread.run_sync(_write, spool, conversion.close(), limiter=_worker())
    return conversion.counts


def convert_file(
    source: IO[bytes],
    target: IO[bytes],
    conversion: Conversion,
    progress: Callable[[int], object] = lambda _: None,
) -> Counts:
    """Convert a file, without a server.

    progress: called with the number of bytes that were read, after each piece.
    Raises FormatError, SpoolFull.
    """
    while piece := source.read(PIECE):
        _write(target, conversion.feed(piece))
        progress(len(piece))
    _write(target, conversion.close())
    return conversion.counts


class SpooledResponse(Response):
    """Everything in a spool, with its length; the spool is closed however it ends."""

    def __init__(self, spool: IO[bytes], media_type: str, headers: Mapping[str, str]) -> None:
        length = spool.seek(0, io.SEEK_END)
        spool.seek(0)
        super().__init__(headers={**headers, "Content-Length": str(length)}, media_type=media_type)
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


async def _pieces(chunks: AsyncIterator[bytes]) -> AsyncIterator[bytes]:
    """The same bytes, in pieces of one size."""
    waiting = bytearray()
    async for chunk in chunks:
        waiting += chunk
        while len(waiting) >= PIECE:
            piece = bytes(waiting[:PIECE])
            del waiting[:PIECE]
            yield piece
    if waiting:
        yield bytes(waiting)


def _write(target: IO[bytes], parts: Iterable[bytes]) -> None:
    for part in parts:
        try:
            target.write(part)
        except OSError as error:
            if error.errno in _FULL:
                raise SpoolFull("there is no room left for the answer") from None
            raise


_LIMITER: anyio.lowlevel.RunVar[anyio.CapacityLimiter] = anyio.lowlevel.RunVar("batch worker")


def _worker() -> anyio.CapacityLimiter:
    """One worker thread for each process, which has one event loop."""
    try:
        return _LIMITER.get()
    except LookupError:
        limiter = anyio.CapacityLimiter(1)
        _LIMITER.set(limiter)
        return limiter
