"""A body that is converted while it arrives.

The answer is spooled and begins after the last byte of the table. A response that is written
while the request is still read loses bodies: a client that sends everything before it reads
would wait for ever, and a server that looks for a disconnect swallows what is still arriving.
"""

import asyncio
import time
from collections.abc import AsyncIterator, Callable, Iterator

from service.batch import workers
from service.batch.conversion import PIECE, Conversion, Counts
from service.batch.workers import on_worker
from service.formats.spool import Writable, write_to


def nothing_ends() -> None:
    """No deadline."""


async def convert_stream(
    chunks: AsyncIterator[bytes],
    conversion: Conversion,
    spool: Writable,
    check: Callable[[], object] = nothing_ends,
) -> Counts:
    """Convert a body while it arrives; its answer stands in ``spool`` from where that was.

    check: called before each piece of work; what it raises ends the conversion.

    While a piece is worked on, the next one is taken in and nothing more: a client sends no faster
    than that. Raises FormatError, SpoolFull, and what ``chunks`` and ``check`` raise.
    """
    conversion.beside = workers.estimates()
    pieces = _pieces(chunks)
    piece = await anext(pieces, None)
    while piece is not None:
        check()
        coming = asyncio.ensure_future(_next(pieces))
        try:
            await on_worker(_write_all, spool, conversion, piece)
            piece = await coming
        finally:
            coming.cancel()
            await asyncio.gather(coming, return_exceptions=True)
    rest = conversion.close()
    more = True
    while more:
        check()
        more = await on_worker(_write_some, spool, rest)
    return conversion.counts


def deadline(seconds: float, late: Callable[[], Exception]) -> Callable[[], None]:
    """A check that raises ``late()`` once so much time has passed since it was made."""
    end = time.monotonic() + seconds

    def check() -> None:
        if time.monotonic() > end:
            raise late()

    return check


async def _next(pieces: AsyncIterator[bytes]) -> bytes | None:
    return await anext(pieces, None)


async def _pieces(chunks: AsyncIterator[bytes]) -> AsyncIterator[bytes]:
    """The same bytes, in pieces of one size."""
    waiting = bytearray()
    async for chunk in chunks:
        waiting += chunk
        while len(waiting) >= PIECE:
            with memoryview(waiting) as view:
                piece = bytes(view[:PIECE])
            del waiting[:PIECE]
            yield piece
    if waiting:
        yield bytes(waiting)


def _write_all(spool: Writable, conversion: Conversion, piece: bytes) -> None:
    for part in conversion.feed(piece):
        write_to(spool, part)


def _write_some(spool: Writable, parts: Iterator[bytes]) -> bool:
    """The next part, so that other tables have their turn; whether there was one."""
    part = next(parts, None)
    if part is not None:
        write_to(spool, part)
    return part is not None
