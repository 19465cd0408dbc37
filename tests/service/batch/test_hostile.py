"""Bodies that are meant to hurt: each is refused or answered, the service goes on answering."""

import gzip
import http.client
import os
import socket
import threading
import time
from contextlib import ExitStack, contextmanager, suppress
from pathlib import Path

import numpy as np
import pyarrow as pa
import pytest

from tests.service.formats.typed import written

PATIENCE = 0.25
"""Seconds in which /livez is to answer."""
MEMORY = 160 << 20
"""Bytes by which the service may grow over all of them."""
PATH = "/v1/estimates?mixing_model=topp-1980"
HEAD = b"apparent_permittivity\n"
CSV, NDJSON = {"Content-Type": "text/csv"}, {"Content-Type": "application/x-ndjson"}
JSON, GZIP = {"Content-Type": "application/json"}, {"Content-Encoding": "gzip"}
ARROW = {"Content-Type": "application/vnd.apache.arrow.stream"}
PARQUET = {"Content-Type": "application/vnd.apache.parquet"}


def bomb(content, times):
    """Members that unpack to ``content``, many times; each is a thousandth of it."""
    return gzip.compress(content, 9) * times


def typed(form, **options):
    packed = pa.ipc.IpcWriteOptions(compression="zstd")
    table = pa.table({"apparent_permittivity": np.zeros(12_000_000)})
    given = {"compression": "zstd"} if form == "parquet" else {"options": packed}
    return written(table, form, **given, **options)


HOSTILE = {
    "newlines, 2 GB in 2 MB": (CSV | GZIP, lambda: bomb(b"\n" * (1 << 20), 2000), {413}),
    "blanks, in NDJSON": (NDJSON | GZIP, lambda: bomb(b" " * 999 + b"\n", 200_000), {413}),
    "one line without an end": (CSV, lambda: HEAD + b"1" * 6_000_000, {413}),
    "one line without an end, packed": (CSV | GZIP, lambda: bomb(b"1" * (1 << 20), 500), {413}),
    "a cell that is never closed": (CSV, lambda: HEAD + b'"' + b"x\n" * 2_000_000, {400, 413}),
    "quotes alone": (CSV, lambda: HEAD + b'"' * 900_000 + b"\n", {200, 400, 413}),
    "100 000 bad rows": (CSV, lambda: HEAD + b"a,b,c\n" * 100_000, {200}),
    "100 000 lines of no JSON": (NDJSON, lambda: b"{]\n" * 100_000, {422}),
    "100 000 brackets": (JSON, lambda: b"[" * 100_000, {400}),
    "100 000 brackets a line": (
        NDJSON, lambda: b'{"apparent_permittivity":' * 1000 + b"\n" + b"[" * 100_000, {422}),
    "5 000 columns": (CSV, lambda: b",".join(b"c%d" % i for i in range(5000)) + b"\n1\n", {422}),
    "100 000 bad readings": (
        JSON, lambda: b'{"readings":[' + b"7," * 100_000 + b"7]}", {413, 422}),
    "NUL": (CSV, lambda: HEAD + b"\0" * 2_000_000, {200, 400, 413}),
    "no text": (CSV, lambda: os.urandom(1_000_000), {400, 413, 422}),
    "UTF-16": (CSV, lambda: "apparent_permittivity\n1\n".encode("utf-16"), {400}),
    "no gzip": (CSV | GZIP, lambda: os.urandom(100_000), {400}),
    "no Parquet": (PARQUET, lambda: b"PAR1" + os.urandom(500_000) + b"PAR1", {400}),
    "no Arrow": (ARROW, lambda: b"\xff\xff\xff\xff\xff\xff\xff\x7f" + bytes(100_000), {400}),
    "Arrow that unpacks to 96 MB": (ARROW, lambda: typed("arrow"), {413}),
}  # fmt: skip


class Watch(threading.Thread):
    """Asks /livez over and over; how long each answer took."""

    def __init__(self, address):
        super().__init__(daemon=True)
        self.address, self.taken, self.over = address, [], threading.Event()

    def run(self):
        while len(self.taken) < 5 or not self.over.wait(0.01):
            start = time.perf_counter()
            line = http.client.HTTPConnection(*self.address, timeout=20)
            line.request("GET", "/livez")
            assert line.getresponse().status == 200
            line.close()
            self.taken.append(time.perf_counter() - start)


@contextmanager
def watched(service):
    watch = Watch(service.address)
    before = peak(service)
    watch.start()
    try:
        yield
    finally:
        watch.over.set()
        watch.join(20)
    assert np.quantile(watch.taken, 0.97) < PATIENCE
    assert peak(service) - before < MEMORY
    assert service.process.poll() is None


def peak(service):
    """Most resident memory so far, bytes; nothing is known where there is no /proc."""
    status = Path(f"/proc/{service.process.pid}/status")
    if not status.exists():
        return 0
    (line,) = [line for line in status.read_text().splitlines() if line.startswith("VmHWM")]
    return 1024 * int(line.split()[1])


def posted(address, headers, body):
    """The status, whether or not the body was read to its end."""
    line = http.client.HTTPConnection(*address, timeout=60)
    try:
        path = "/v1/estimates" if headers == JSON else PATH
        with suppress(
            BrokenPipeError, ConnectionResetError
        ):  # the answer may be there all the same
            line.request("POST", path, body, headers)
        return line.getresponse().status
    finally:
        line.close()


@pytest.fixture(scope="module")
def service(tmp_path_factory):
    from tests.service.conftest import command  # noqa: PLC0415 - it starts a server

    with command(tmp_path_factory.mktemp("hostile"), body_stall_seconds=2) as running:
        posted(running.address, CSV, HEAD + b"1\n")
        posted(running.address, PARQUET, typed("parquet")[:100])
        yield running


@pytest.mark.parametrize("name", HOSTILE)
def test_a_hostile_body_is_refused_or_answered(service, name):
    headers, body, expected = HOSTILE[name]
    body = body()
    with watched(service):
        try:
            status = posted(service.address, headers, body)
        except ConnectionResetError:
            status = None  # refused before it was sent
    assert status is None or status in expected
    assert posted(service.address, CSV, HEAD + b"20\n") == 200


def test_a_packed_parquet_table_of_many_rows_stays_within_memory(service):
    with watched(service):
        assert posted(service.address, PARQUET, typed("parquet")[:-1]) == 400  # cut off


def test_idle_connections_and_stalled_uploads_leave_room_for_others(service):
    with ExitStack() as stack, watched(service):
        for number in range(600):
            idle = stack.enter_context(socket.create_connection(service.address))
            if number < 100:
                idle.sendall(b"POST /v1/estimates HTTP/1.1\r\nHost: x\r\nContent-Length: 99\r\n"
                             b"Content-Type: text/csv\r\n\r\napparent")  # fmt: skip
        time.sleep(0.3)
        assert posted(service.address, JSON, b'{"readings":[{"apparent_permittivity":20}]}') == 200
    assert posted(service.address, CSV, HEAD + b"20\n") in {200, 503}
