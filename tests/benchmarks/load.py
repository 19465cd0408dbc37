"""Many loggers on keep-alive connections, each posting one thing after the other."""

import asyncio
import time
from collections.abc import Callable


async def _logger(
    address: tuple[str, int], number: int, request: Callable[[int, int], bytes], end: float
) -> int:
    reader, writer = await asyncio.open_connection(*address)
    done = 0
    while time.perf_counter() < end:
        writer.write(request(number, done))
        head = await reader.readuntil(b"\r\n\r\n")
        assert head.startswith(b"HTTP/1.1 200"), head
        length = int(head.lower().partition(b"content-length:")[2].split(b"\r", 1)[0])
        body = await reader.readexactly(length)
        assert b'"rejected":[{' not in body, body
        done += 1
    writer.close()
    return done


def rate(
    address: tuple[str, int],
    request: Callable[[int, int], bytes],
    *,
    loggers: int = 64,
    seconds: float = 1.5,
) -> float:
    """Requests per second that were answered.

    request: bytes of a request, from the number of a logger and of its request.
    """

    async def run() -> float:
        begun = time.perf_counter()
        end = begun + seconds
        counts = await asyncio.gather(*(_logger(address, n, request, end) for n in range(loggers)))
        return sum(counts) / (time.perf_counter() - begun)

    return asyncio.run(run())


def post(path: str, body: bytes, media_type: str = "application/json") -> bytes:
    """A request as it goes over the wire."""
    head = f"POST {path} HTTP/1.1\r\nHost: x\r\nContent-Type: {media_type}\r\n"
    return f"{head}Content-Length: {len(body)}\r\n\r\n".encode() + body
