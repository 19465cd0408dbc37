"""Many small posts, few commits: whatever came while one transaction ran goes into the next.

No timer: a post that comes alone is written at once. Posts wait for the transaction under way
and their own, and never for posts that come later.
"""

import asyncio
import threading
from collections import deque
from collections.abc import Sequence

from service.store.errors import StoreError, StoreUnavailable
from service.store.interface import Batch, Outcome, Store

MOST_ROWS = 20_000
"""Readings in one transaction, so that a small post does not wait long behind a large one."""
MOST_WAITING = 200_000
"""Readings that may wait; more are not taken on."""

Waiting = tuple[Batch, "asyncio.Future[Outcome]", asyncio.AbstractEventLoop]


class Writer:
    """The one thread of this process that appends readings."""

    def __init__(self, store: Store, *, most_rows: int = MOST_ROWS) -> None:
        self._store = store
        self._most = most_rows
        self._queue: deque[Waiting] = deque()
        self._rows = 0
        self._ready = threading.Condition()
        self._closing = False
        self._thread = threading.Thread(target=self._run, name="store writer", daemon=True)
        self._thread.start()

    async def append(self, batch: Batch) -> Outcome:
        """What became of the batch, once it is durable.

        Raises StoreError: Stale when it was checked against older documents, StoreUnavailable.
        """
        loop = asyncio.get_running_loop()
        future: asyncio.Future[Outcome] = loop.create_future()
        with self._ready:
            if self._closing:
                raise StoreUnavailable("the service is stopping")
            if self._rows > MOST_WAITING:
                raise StoreUnavailable("more readings wait to be written than are taken on")
            self._queue.append((batch, future, loop))
            self._rows += len(batch)
            self._ready.notify()
        return await future

    def close(self) -> None:
        """Write what waits, then end."""
        with self._ready:
            self._closing = True
            self._ready.notify()
        self._thread.join()

    def _run(self) -> None:
        while drained := self._drain():
            try:
                found: Sequence[Outcome | StoreError] = self._store.append(
                    [b for b, _, _ in drained]
                )
            except Exception as error:  # noqa: BLE001 - one bad batch must not end the thread
                found = self._one_by_one(drained, error)
            for loop in {loop for _, _, loop in drained}:
                answers = [
                    (future, outcome)
                    for (_, future, its), outcome in zip(drained, found, strict=True)
                    if its is loop
                ]
                loop.call_soon_threadsafe(_answer, answers)

    def _drain(self) -> list[Waiting]:
        """The batches of the next transaction; none when it is time to end."""
        with self._ready:
            while not self._queue and not self._closing:
                self._ready.wait()
            drained: list[Waiting] = []
            rows = 0
            while self._queue and (not drained or rows + len(self._queue[0][0]) <= self._most):
                drained.append(self._queue.popleft())
                rows += len(drained[-1][0])
            self._rows -= rows
            return drained

    def _one_by_one(
        self, drained: Sequence[Waiting], error: Exception
    ) -> list[Outcome | StoreError]:
        """Each batch by itself, so that what is wrong with one is told to that one alone."""
        if len(drained) == 1:
            return [_as_store_error(error)]
        found: list[Outcome | StoreError] = []
        for batch, _, _ in drained:
            try:
                found += self._store.append([batch])
            except Exception as own:  # noqa: BLE001 - as above
                found.append(_as_store_error(own))
        return found


def _as_store_error(error: Exception) -> StoreError:
    if isinstance(error, StoreError):
        return error
    wrapped = StoreUnavailable(f"the store failed: {type(error).__name__}")
    wrapped.__cause__ = error
    return wrapped


def _answer(answers: list[tuple["asyncio.Future[Outcome]", Outcome | StoreError]]) -> None:
    for future, outcome in answers:
        if future.done():
            continue
        if isinstance(outcome, StoreError):
            future.set_exception(outcome)
        else:
            future.set_result(outcome)
