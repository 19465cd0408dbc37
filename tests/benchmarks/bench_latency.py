"""Single readings while a table is worked on, and beside an endpoint that does nothing.

Open loop: requests are due at fixed instants, and each counts from when it was due.
Run: python -m tests.benchmarks.bench_latency
"""

import asyncio
import json
import multiprocessing
import select
import socket
import statistics
import tempfile
import threading
import time
from pathlib import Path

import uvicorn

from service.app import create_api, surrounded
from service.settings import Settings
from tests.benchmarks.bench_batch import BANDS, QUERY, ROWS, posted, served, table
from tests.benchmarks.bench_posts import connected
from tests.benchmarks.interleaved import quiet, report

RATE = 200
SECONDS = 4.0
READING = {"apparent_permittivity": 17.2, "temperature": 14.1}
BODY = json.dumps({
    "mixing_model": "crim", "soil": {"texture": "loam", "bulk_density": 1.42},
    "probe": {"frequency": 1.0e9, "apparent_permittivity_u": 0.3}, "readings": [READING],
}).encode()  # fmt: skip


def request(path, body):
    """The bytes of a POST."""
    head = f"POST {path} HTTP/1.1\r\nHost: x\r\nContent-Type: application/json\r\n"
    return f"{head}Content-Length: {len(body)}\r\n\r\n".encode() + body


class Line:
    """One connection that is kept open."""

    def __init__(self, reader, writer):
        self.reader, self.writer = reader, writer

    async def ask(self, message):
        self.writer.write(message)
        head = await self.reader.readuntil(b"\r\n\r\n")
        assert head.startswith(b"HTTP/1.1 200"), head
        length = int(head.lower().partition(b"content-length: ")[2].split()[0])
        await self.reader.readexactly(length)


async def at_a_rate(port, message, until):
    """Latencies, s, from the instant each request was due; idle connections are used again."""
    idle, taken, tasks = [], [], set()

    async def one(due):
        line = idle.pop() if idle else Line(*await asyncio.open_connection("127.0.0.1", port))
        await line.ask(message)
        taken.append(time.perf_counter() - due)
        idle.append(line)

    due = time.perf_counter()
    while not until():
        due += 1 / RATE
        await asyncio.sleep(max(0.0, due - time.perf_counter()))
        task = asyncio.create_task(one(due))
        tasks.add(task)
        task.add_done_callback(tasks.discard)
    await asyncio.gather(*tasks)
    for line in idle:
        line.writer.close()
    return taken


def as_fast_as_possible(port, message, clients, seconds):
    """Requests per second of so many connections, by a client that costs little itself."""
    lines = {}
    poll = select.epoll()
    for _ in range(clients):
        line = socket.create_connection(("127.0.0.1", port))
        lines[line.fileno()] = line
        poll.register(line, select.EPOLLIN)
        line.sendall(message)
    begun = time.perf_counter()
    count = 0
    while time.perf_counter() < begun + seconds:
        for number, _ in poll.poll(1.0):
            line = lines[number]
            answer = line.recv(1 << 16)
            while not is_whole(answer):
                answer += line.recv(1 << 16)
            count += 1
            line.sendall(message)
    taken = time.perf_counter() - begun
    for line in lines.values():
        line.close()
    return count / taken


def is_whole(answer):
    """Whether an answer has come to its end."""
    head, blank, body = answer.partition(b"\r\n\r\n")
    if not blank:
        return False
    assert head.startswith(b"HTTP/1.1 200"), head
    return len(body) == int(head.lower().partition(b"content-length: ")[2].split()[0])


def p99(taken):
    return statistics.quantiles(taken, n=100)[98]


def beside_a_table(port, sent):
    """The 99th percentile idle, and while a table is worked on."""
    message = request("/v1/estimates", BODY)
    end = time.perf_counter() + SECONDS
    idle = asyncio.run(at_a_rate(port, message, lambda: time.perf_counter() > end))
    batch = threading.Thread(target=posted, args=(port, sent, f"{QUERY}&columns={BANDS}"))
    batch.start()
    busy = asyncio.run(at_a_rate(port, message, lambda: not batch.is_alive()))
    batch.join()
    return p99(idle), p99(busy)


def serve(port):
    """The service with an endpoint that does nothing, in a process of its own."""
    with tempfile.TemporaryDirectory() as name:
        settings = Settings(data=Path(name))
        api = create_api(settings)

        @api.post("/nothing")
        async def nothing() -> dict[str, str]:
            return {}

        api.router.routes.insert(0, api.router.routes.pop())  # found at once, as ours is
        uvicorn.run(surrounded(api, settings), port=port, log_level="error", access_log=False)


def beside_nothing():
    """Single readings per second, in requests per second to an endpoint that does nothing."""
    with socket.create_server(("127.0.0.1", 0)) as free:
        port = free.getsockname()[1]
    server = multiprocessing.get_context("spawn").Process(target=serve, args=(port,), daemon=True)
    server.start()
    connected(port, server).close()
    messages = {"nothing": request("/nothing", b"{}"), "reading": request("/v1/estimates", BODY)}
    for clients in (1, 32, 64):
        rates = {name: [] for name in messages}
        for _ in range(7):
            for name, message in messages.items():
                rates[name].append(as_fast_as_possible(port, message, clients, 0.7))
        reading, nothing = (statistics.median(rates[name]) for name in ("reading", "nothing"))
        report(f"single readings per second over {clients} connections, in requests that do "
               "nothing", reading / nothing, "at least 0.9", reading=reading,
               nothing=nothing)  # fmt: skip
    server.terminate()
    server.join()


def main():
    beside_nothing()
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        table(folder / "sent.csv", ROWS)
        server, port = served(folder)
        try:
            posted(port, folder / "sent.csv", QUERY)
            calm = quiet()
            pairs = [beside_a_table(port, folder / "sent.csv") for _ in range(5)]
            idle, busy = (statistics.median(side) for side in zip(*pairs, strict=True))
            report("99th percentile of single readings during a table, in idle ones",
                   statistics.median(b / i for i, b in pairs), "at most 4",
                   idle_ms=1e3 * idle, busy_ms=1e3 * busy, calm=calm)  # fmt: skip
        finally:
            server.terminate()
            server.wait()


if __name__ == "__main__":
    main()
