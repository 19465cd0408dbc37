"""Numbers of this service for Prometheus, by route template; of all its processes together.

With several server processes each keeps its numbers in a folder that all of them know, from which
whichever is asked adds them up.
"""

import os
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from service.formats.spool import Spool
from service.observe import Exchange

FOLDER = "PROMETHEUS_MULTIPROC_DIR"
"""The variable in which prometheus_client looks for that folder when it is first imported."""

from prometheus_client import (  # noqa: E402 - after what it depends on
    CONTENT_TYPE_PLAIN_0_0_4,
    CollectorRegistry,
    Counter,
    Gauge,
    Histogram,
    generate_latest,
    multiprocess,
)

MEDIA_TYPE = CONTENT_TYPE_PLAIN_0_0_4
METHODS = frozenset({"GET", "HEAD", "POST", "PUT", "DELETE", "PATCH", "OPTIONS"})
SECONDS = (0.001, 0.0025, 0.005, 0.01, 0.025, 0.05, 0.1, 0.25, 1.0, 5.0, 30.0, 300.0)

_REGISTRY = CollectorRegistry()
_ROUTE = ("method", "route")
REQUESTS = Counter(
    "gleyline_requests", "Requests that were answered", (*_ROUTE, "status"), registry=_REGISTRY
)
LATENCY = Histogram(
    "gleyline_request_seconds", "From the request line to the last byte of the answer", _ROUTE,
    buckets=SECONDS, registry=_REGISTRY,
)  # fmt: skip
ROWS = Counter("gleyline_rows", "Readings that were answered", ("route",), registry=_REGISTRY)
FLAGGED = Counter(
    "gleyline_flagged_rows", "Those of them that carry a flag", ("route",), registry=_REGISTRY
)
TABLES = Gauge(
    "gleyline_tables", "Tables that are being received, worked on or waiting for it",
    multiprocess_mode="livesum", registry=_REGISTRY,
)  # fmt: skip
SPOOLED = Gauge(
    "gleyline_spool_bytes", "Bytes of answers that wait for the end of their table",
    multiprocess_mode="livesum", registry=_REGISTRY,
)  # fmt: skip
COMMITS = Counter(
    "gleyline_store_commits", "Transactions that changed the store", registry=_REGISTRY
)


def count(exchange: Exchange) -> None:
    """Note one exchange that is over."""
    route: Any = exchange.scope.get("route")
    path = getattr(route, "path", "unmatched")
    method = exchange.method if exchange.method in METHODS else "other"
    REQUESTS.labels(method, path, str(exchange.status)).inc()
    LATENCY.labels(method, path).observe(exchange.milliseconds / 1e3)
    SPOOLED.set(Spool.waiting)
    if exchange.rows:
        ROWS.labels(path).inc(exchange.rows)
        FLAGGED.labels(path).inc(exchange.flagged)


def exposition() -> bytes:
    """Everything, as Prometheus reads it."""
    registry = _REGISTRY
    if FOLDER in os.environ:
        _forget_the_dead(Path(os.environ[FOLDER]))
        registry = CollectorRegistry()
        multiprocess.MultiProcessCollector(registry)  # type: ignore[no-untyped-call]
    return generate_latest(registry)


def _forget_the_dead(folder: Path) -> None:
    """What a process that is gone was working on, nobody is."""
    for file in folder.glob("gauge_live*.db"):
        process = int(file.stem.rpartition("_")[2])
        try:
            os.kill(process, 0)
        except ProcessLookupError:
            multiprocess.mark_process_dead(process)  # type: ignore[no-untyped-call]


@contextmanager
def shared_by(workers: int) -> Iterator[None]:
    """Let the processes that are started within share their numbers."""
    if workers == 1:
        yield
        return
    with tempfile.TemporaryDirectory(prefix="gleyline-metrics-") as folder:
        os.environ[FOLDER] = folder
        try:
            yield
        finally:
            del os.environ[FOLDER]
