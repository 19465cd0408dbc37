"""Several files at a time, each in a process of its own."""

import multiprocessing
from collections.abc import Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Future, ProcessPoolExecutor, wait
from typing import Any

from service.convert.job import Job, Outcome, Refused, Wish, run
from service.convert.progress import PAUSE, Progress

_read: Any = None
"""In each process: the bytes that all of them have read."""


def run_all(
    jobs: Sequence[Job], wish: Wish, processes: int, progress: Progress
) -> Iterator[tuple[Job, Outcome | Refused]]:
    """Each job with its outcome, as they end."""
    if processes == 1:
        for job in jobs:
            yield job, _here(job, wish, progress)
        return
    context = multiprocessing.get_context("spawn")
    read = context.Value("q", 0)
    with ProcessPoolExecutor(processes, context, _share, (read,)) as pool:
        waiting: dict[Future[Outcome], Job] = {pool.submit(_run, job, wish): job for job in jobs}
        try:
            while waiting:
                ended, _ = wait(waiting, PAUSE, FIRST_COMPLETED)
                progress.show(read.value)
                for future in ended:
                    yield waiting.pop(future), _outcome(future)
        except BaseException:
            pool.shutdown(wait=False, cancel_futures=True)
            raise


def _here(job: Job, wish: Wish, progress: Progress) -> Outcome | Refused:
    try:
        return run(job, wish, progress.add)
    except Refused as refusal:
        return refusal


def _outcome(future: Future[Outcome]) -> Outcome | Refused:
    try:
        return future.result()
    except Refused as refusal:
        return refusal


def _run(job: Job, wish: Wish) -> Outcome:
    return run(job, wish, _count)


def _share(read: Any) -> None:
    global _read  # noqa: PLW0603 - a process has no other way to be given it
    _read = read


def _count(count: int) -> None:
    with _read.get_lock():
        _read.value += count
