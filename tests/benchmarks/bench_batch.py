"""A table of a million rows through HTTP, beside two libraries that only read and write it.

Every case in the same rounds. The client sends and reads through a socket of its own process.
Run: python -m tests.benchmarks.bench_batch [rows]
"""

import contextlib
import os
import socket
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
import polars as pl
import pyarrow.csv as pa_csv

from tests.benchmarks.interleaved import medians, quiet, report

ROWS = 1_000_000
MODELS = "mixing_model=crim&texture=loam&frequency=1e9&pore_water_model=hilhorst-2000"
SPREADS = "apparent_permittivity_u=0.3&temperature_u=0.5&bulk_conductivity_u=0.02"
QUERY = f"{MODELS}&{SPREADS}"
BANDS = ",".join(
    f"{name}{end}"
    for name in ("water_content", "pore_water_conductivity")
    for end in ("", "_lower", "_upper")
)
PIECE = 1 << 20


def table(path, rows):
    """Stations by depths by time, as a logger writes them."""
    rng, row = np.random.default_rng(3), np.arange(rows)
    stations = pl.Series([f"station-{number:02d}" for number in range(40)])
    seconds = pl.Series((1_767_225_600 + row // 200 * 300) * 1000).cast(pl.Datetime("ms"))
    pl.DataFrame({
        "time": seconds.dt.strftime("%Y-%m-%dT%H:%M:%SZ"),
        "station": stations.gather(row // 5 % 40),
        "depth": np.array([0.1, 0.2, 0.4, 0.6, 0.9])[row % 5],
        "apparent_permittivity": rng.uniform(6, 30, rows).round(2),
        "temperature": rng.uniform(2, 35, rows).round(2),
        "bulk_conductivity": rng.uniform(0.1, 1.5, rows).round(4),
    }).write_csv(path)  # fmt: skip


def served(folder):
    """A service of its own on a free port: its process and its port."""
    with socket.create_server(("127.0.0.1", 0)) as free:
        port = free.getsockname()[1]
    environment = os.environ | {"GLEYLINE_PORT": str(port), "GLEYLINE_DATA": str(folder)}
    server = subprocess.Popen(
        [sys.executable, "-m", "service.cli", "serve"], env=environment, stderr=subprocess.DEVNULL
    )
    while server.poll() is None:
        with contextlib.suppress(OSError), socket.create_connection(("127.0.0.1", port)):
            return server, port
        time.sleep(0.05)
    raise SystemExit("the server ended")


def posted(port, path, query):
    """Send all of a file, then read all of the answer: its headers and its length."""
    size = path.stat().st_size
    head = f"POST /v1/estimates?{query} HTTP/1.1\r\nHost: x\r\nContent-Type: text/csv\r\n"
    with socket.create_connection(("127.0.0.1", port)) as line, path.open("rb") as file:
        line.sendall(f"{head}Content-Length: {size}\r\nConnection: close\r\n\r\n".encode())
        line.sendfile(file)
        begun, count, buffer = b"", 0, bytearray(PIECE)
        while got := line.recv_into(buffer):
            if b"\r\n\r\n" not in begun:
                begun += buffer[:got]
            count += got
    headers = begun.partition(b"\r\n\r\n")[0].decode()
    assert headers.startswith("HTTP/1.1 200"), begun[:500]
    return headers, count


def peak(process):
    """Most resident memory so far, MB."""
    status = Path(f"/proc/{process.pid}/status").read_text()
    return int(status.partition("VmHWM:")[2].split()[0]) / 1024


def main():
    rows = int(sys.argv[1]) if len(sys.argv) > 1 else ROWS
    with tempfile.TemporaryDirectory(dir="/dev/shm" if Path("/dev/shm").is_dir() else None) as name:  # noqa: S108
        folder = Path(name)
        sent, out = folder / "sent.csv", folder / "out.csv"
        table(sent, rows)
        few = folder / "few.csv"
        table(few, 30)
        server, port = served(folder)
        try:
            time.sleep(3.0)  # what a server loads beside its start is loaded by then
            posted(port, few, QUERY)
            before = peak(server)
            headers, _ = posted(port, sent, f"{QUERY}&columns={BANDS}")
            assert f"row-count: {rows}" in headers.lower()
            report(f"growth of resident memory, {rows} rows, MB", peak(server) - before,
                   "at most 64")  # fmt: skip
            calm = quiet()
            found = medians({
                "pyarrow": lambda: pa_csv.write_csv(pa_csv.read_csv(sent), out),
                "polars": lambda: pl.read_csv(sent).write_csv(out),
                "bands": lambda: posted(port, sent, f"{QUERY}&columns={BANDS}"),
                "all": lambda: posted(port, sent, QUERY),
            }, rounds=7 if rows <= ROWS else 1)  # fmt: skip
            for case, columns in (("bands", "both bands"), ("all", "every column")):
                for other, aim in (("pyarrow", "at most 0.6"), ("polars", "at most 3")):
                    report(f"{rows} rows, {columns}, in reads and writes of {other}",
                           found[case] / found[other], aim, other_s=found[other],
                           case_s=found[case], calm=calm)  # fmt: skip
        finally:
            server.terminate()
            server.wait()


if __name__ == "__main__":
    main()
