"""A table of readings as it arrives: one block is written while the next is read."""

import asyncio
from collections.abc import AsyncIterator, Callable, Coroutine, Iterable
from functools import partial

import anyio.to_thread

from service.formats.block import Block, Decoder
from service.stations.ingest.arrival import Arrival
from service.stations.ingest.tables import TableReader

Keep = Callable[[Arrival], Coroutine[None, None, None]]


async def keep_stream(
    chunks: AsyncIterator[bytes], decoder: Decoder, reader: TableReader, keep: Keep, piece: int
) -> None:
    """Decode, check and keep a body; returns when all of it is durable.

    keep: called with what each block holds, one after the other. piece: bytes decoded at a time.
    Raises FormatError, and what ``chunks`` and ``keep`` raise; what was kept before stays.
    """

    def checked(decode: Callable[[], Iterable[Block]]) -> list[Arrival]:
        return [reader(block) for block in decode()]

    line = _Line(keep)
    try:
        waiting = bytearray()
        async for chunk in chunks:
            waiting += chunk
            if len(waiting) >= piece:
                decode = partial(decoder.feed, bytes(waiting))
                waiting.clear()
                await line.add(await anyio.to_thread.run_sync(checked, decode))
        if waiting:
            decode = partial(decoder.feed, bytes(waiting))
            await line.add(await anyio.to_thread.run_sync(checked, decode))
        await line.add(await anyio.to_thread.run_sync(checked, decoder.close))
    finally:
        await line.end()


class _Line:
    """At most one arrival on its way to the store."""

    def __init__(self, keep: Keep) -> None:
        self._keep = keep
        self._task: asyncio.Task[None] | None = None

    async def add(self, arrivals: Iterable[Arrival]) -> None:
        """Send arrivals on their way, each when the one before is there."""
        for arrival in arrivals:
            await self.end()
            self._task = asyncio.create_task(self._keep(arrival))

    async def end(self) -> None:
        """Wait for the last one."""
        task, self._task = self._task, None
        if task is not None:
            await task
