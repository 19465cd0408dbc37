"""The two threads of a process that work on tables, and how little they disturb the others.

One decodes and encodes, one estimates; tables take turns in both, piece by piece. They step back
behind the thread that answers small requests, which waits for the interpreter a tenth of the
usual time.
"""

import asyncio
import gc
import os
import sys
import threading
from collections.abc import Callable
from concurrent.futures import Executor, ThreadPoolExecutor
from contextlib import suppress
from functools import cache
from typing import TypeVar

NICENESS = 10
SWITCH_SECONDS = 0.0005

T = TypeVar("T")


@cache
def tables() -> Executor:
    """Where tables are decoded and encoded."""
    return ThreadPoolExecutor(1, "tables", _step_back)


@cache
def estimates() -> Executor:
    """Where the rows of tables are estimated."""
    return ThreadPoolExecutor(1, "estimates", _step_back)


async def on_worker(work: Callable[..., T], *given: object) -> T:
    """What ``work`` returns, from the thread of the tables.

    A caller that is cancelled waits until the thread has left what both of them use.
    """
    future = asyncio.get_running_loop().run_in_executor(tables(), work, *given)
    try:
        return await asyncio.shield(future)
    except asyncio.CancelledError:
        await asyncio.wait([future])
        raise


def yield_to_requests() -> None:
    """Let threads of this process change places more often. Once for each server process."""
    sys.setswitchinterval(SWITCH_SECONDS)


def spare_what_is_loaded() -> None:
    """Let the collector of garbage look past modules and routes, which never become any.

    Looking through all of them takes tens of milliseconds, in which nobody is answered.
    """
    gc.collect()
    gc.freeze()


def _step_back() -> None:
    """Only where the system gives threads a priority of their own."""
    if sys.platform == "linux":
        with suppress(OSError):
            os.setpriority(os.PRIO_PROCESS, threading.get_native_id(), NICENESS)
