"""Several processes, their numbers together, and how they end."""

import http.client
import os
import re
import signal
import socket
import threading
import time
from contextlib import closing, contextmanager, suppress
from pathlib import Path

import httpx2
import pytest

from service.app import create_api, surrounded
from service.settings import Settings
from tests.service.echo import running

ROWS = b"".join(b"%d,%d.5\n" % (i, 2 + i % 60) for i in range(60_000))
TABLE = b"row,apparent_permittivity\n" + ROWS
PATH = "/v1/estimates?mixing_model=topp-1980&columns=water_content"


def numbers(service):
    text = service.client.get("/metrics").text
    return {name: float(value) for name, value in re.findall(r"^(\S+) (\S+)$", text, re.MULTILINE)}


@pytest.mark.parametrize("workers", [1, 2])
def test_numbers_are_those_of_all_processes(start, workers):
    service = start(workers=workers)
    for _ in range(20):
        with closing(http.client.HTTPConnection(*service.address, timeout=20)) as line:
            line.request("GET", "/livez")
            assert line.getresponse().status == 200
    service.client.get("/v1/mixing-models/crim")
    service.client.get("/nowhere/at/all")
    body = b"apparent_permittivity\n17\nx\n"
    service.client.post(PATH, content=body, headers={"Content-Type": "text/csv"})
    service.client.post(
        "/v1/estimates",
        json={"mixing_model": "topp-1980", "readings": [{"apparent_permittivity": 17}]},
    )
    found = numbers(service)
    requests = 'gleyline_requests_total{method="GET",route="%s",status="%d"}'
    assert found[requests % ("/livez", 200)] == 20
    assert found[requests % ("/v1/mixing-models/{name}", 200)] == 1
    assert found[requests % ("unmatched", 404)] == 1
    assert found['gleyline_rows_total{route="/v1/estimates"}'] == 3
    assert found['gleyline_flagged_rows_total{route="/v1/estimates"}'] == 1
    assert found['gleyline_request_seconds_count{method="GET",route="/livez"}'] == 20
    assert found["gleyline_tables"] == found["gleyline_spool_bytes"] == 0


def test_a_table_tells_what_its_stages_took(server):
    answer = server.client.post(PATH, content=TABLE, headers={"Content-Type": "text/csv"})
    timing = answer.headers["Server-Timing"]
    stages = dict(re.findall(r"(\w+);dur=([\d.]+)", timing))
    assert list(stages) == ["decode", "estimate", "encode", "total"]
    assert all(float(spent) > 0 for spent in stages.values())
    assert answer.headers["Row-Count"] == "60000"
    assert answer.content.count(b"\n") == 60_001


@contextmanager
def here(folder, **options):
    """A service in this process."""
    settings = Settings(data=folder, **options)
    with (
        running(surrounded(create_api(settings), settings)) as base_url,
        httpx2.Client(base_url=base_url, timeout=20) as client,
    ):
        host, port = base_url.removeprefix("http://").split(":")
        yield client, (host, int(port))


class Upload(threading.Thread):
    """A table that is sent in two halves, the second when it is told to."""

    def __init__(self, address):
        super().__init__(daemon=True)
        self.address, self.go = address, threading.Event()
        self.begun, self.answer = threading.Event(), None

    def run(self):
        half = len(TABLE) // 2

        def parts():
            yield TABLE[:half]
            self.begun.set()
            self.go.wait(20)
            yield TABLE[half:]

        head = {"Content-Type": "text/csv", "Transfer-Encoding": "chunked"}
        with closing(http.client.HTTPConnection(*self.address, timeout=30)) as line:
            line.request("POST", PATH, parts(), head, encode_chunked=True)
            response = line.getresponse()
            self.answer = response.status, response.read()


@pytest.mark.parametrize("workers", [1, 2])
def test_a_table_under_way_is_answered_before_the_end(start, workers):
    service = start(workers=workers, drain_seconds=0.6)
    upload = Upload(service.address)
    upload.start()
    upload.begun.wait(20)
    time.sleep(0.1)
    service.process.send_signal(signal.SIGTERM)
    if workers == 1:
        time.sleep(0.2)
        told = service.client.get("/readyz")
        assert (told.status_code, "Retry-After" in told.headers) == (503, True)
        time.sleep(0.6)
    upload.go.set()
    upload.join(20)
    status, body = upload.answer
    assert (status, body.count(b"\n")) == (200, 60_001)
    assert service.process.wait(20) in {0, -signal.SIGTERM}


def test_a_second_signal_ends_the_draining(start):
    service = start(drain_seconds=30)
    service.process.send_signal(signal.SIGTERM)
    time.sleep(0.2)
    assert service.client.get("/readyz").status_code == 503
    service.client.close()
    service.process.send_signal(signal.SIGTERM)
    begun = time.monotonic()
    service.process.wait(20)
    assert time.monotonic() - begun < 10


def test_more_tables_than_the_queue_holds_are_told_to_come_later(tmp_path):
    with here(tmp_path, queued_batches=1) as (client, address):
        upload = Upload(address)
        upload.start()
        assert wait_for(lambda: "gleyline_tables 1.0" in client.get("/metrics").text)
        answer = client.post(PATH, content=TABLE, headers={"Content-Type": "text/csv"})
        assert (answer.status_code, answer.headers["Retry-After"]) == (503, "5")
        upload.go.set()
        upload.join(20)
        assert upload.answer[0] == 200


@pytest.mark.parametrize(
    ("limit", "status", "told"),
    [
        ({"batch_rows": 1000}, 413, "more than 1000 rows"),
        ({"answer_bytes": 100_000}, 413, "more than 100000 bytes"),
        ({"request_seconds": 0.3}, 408, ""),
    ],
)
def test_limits_of_a_table_are_named_and_shown(tmp_path, limit, status, told):
    def slowly():
        for begin in range(0, len(TABLE), 1 << 16):
            yield TABLE[begin : begin + (1 << 16)]
            time.sleep(0.05 if status == 408 else 0)

    ((name, value),) = limit.items()
    with here(tmp_path, **limit) as (client, _):
        assert client.get("/v1/limits").json()[name] == value
        answer = client.post(PATH, content=slowly(), headers={"Content-Type": "text/csv"})
    assert answer.status_code == status
    assert told in answer.json()["detail"]


def wait_for(holds):
    end = time.monotonic() + 10
    while time.monotonic() < end and not holds():
        time.sleep(0.02)
    return holds()


@pytest.mark.parametrize("workers", [1, 2])
def test_a_second_signal_ends_what_is_under_way(start, workers):
    service = start(workers=workers)
    head = b"POST /v1/estimates HTTP/1.1\r\nHost: x\r\nContent-Type: text/csv\r\n"
    with socket.create_connection(service.address, timeout=20) as connection:
        connection.sendall(head + b"Content-Length: 1000\r\n\r\napparent_permittivity\n")
        time.sleep(0.5)
        service.process.send_signal(signal.SIGTERM)
        time.sleep(1.0)
        assert service.process.poll() is None
        service.process.send_signal(signal.SIGTERM)
        service.process.wait(15)


def test_a_table_whose_process_died_is_worked_on_no_more(start):
    service = start(workers=2)
    head = b"POST /v1/estimates HTTP/1.1\r\nHost: x\r\nContent-Type: text/csv\r\n"
    with socket.create_connection(service.address, timeout=20) as connection:
        connection.sendall(head + b"Content-Length: 1000\r\n\r\napparent_permittivity\n")
        until(lambda: numbers(service)["gleyline_tables"] == 1)
        children = Path(f"/proc/{service.process.pid}/task/{service.process.pid}/children")
        workers = [pid for pid in map(int, children.read_text().split()) if is_worker(pid)]
        for pid in workers:
            os.kill(pid, signal.SIGKILL)
        until(lambda: numbers(service)["gleyline_tables"] == 0)


def is_worker(pid):
    return b"spawn_main" in Path(f"/proc/{pid}/cmdline").read_bytes()


def until(holds, seconds=20):
    end = time.monotonic() + seconds
    while time.monotonic() < end:
        with suppress(httpx2.TransportError, KeyError):
            if holds():
                return
        time.sleep(0.1)
    raise AssertionError("it never held")
