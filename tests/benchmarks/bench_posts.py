"""Ten thousand readings in one POST, beside a FastAPI endpoint that takes a list of models.

Both answer with the same numbers of the same code, in one server process, to one client.
Run: python -m tests.benchmarks.bench_posts
"""

import http.client
import json
import multiprocessing
import socket
import time

import numpy as np
import uvicorn
from pydantic import BaseModel

from models.estimate import Query, estimate, prepare
from models.readings import read
from models.soil.description import describe
from service.app import create_api, surrounded
from service.settings import Settings
from tests.benchmarks.interleaved import medians, quiet, report

ROWS = 10_000
SETTINGS = {"mixing_model": "crim", "soil": {"texture": "loam"}, "probe": {"frequency": 1e9}}


class Reading(BaseModel):
    time: str
    depth: float
    apparent_permittivity: float
    temperature: float


class Estimate(BaseModel):
    time: str
    depth: float
    water_content: float | None
    water_content_u: float | None
    water_content_u_shared: float | None
    water_content_lower: float | None
    water_content_upper: float | None
    flags: list[str]


def with_models(api):
    """The usual way: a list of models in, a list of models out, the same estimate between."""

    @api.post("/as-models")
    async def as_models(readings: list[Reading]) -> list[Estimate]:
        columns = {
            name: np.array([getattr(r, name) for r in readings])
            for name in ("depth", "apparent_permittivity", "temperature")
        }
        query = Query(model="crim", soil=describe("loam", {}, {}), probe={"frequency": 1e9},
                      columns=frozenset(columns))  # fmt: skip
        found = estimate(read(columns, {}, {}), prepare(query)).columns
        return [
            Estimate(time=r.time, depth=r.depth, flags=[], **dict(zip(found, cells, strict=True)))
            for r, cells in zip(readings, zip(*(v.tolist() for v in found.values()), strict=True),
                                strict=True)
        ]  # fmt: skip


def serve(port):
    """The service and the other endpoint, in a process of their own."""
    settings = Settings(json_readings=ROWS)
    api = create_api(settings)
    with_models(api)
    uvicorn.run(surrounded(api, settings), port=port, log_level="warning", access_log=False)


def connected(port, server):
    """A connection, as soon as there is a server to connect to."""
    while server.is_alive():
        line = http.client.HTTPConnection("127.0.0.1", port)
        try:
            line.connect()
        except ConnectionRefusedError:
            time.sleep(0.01)
        else:
            return line
    raise SystemExit("the server ended")


def main():
    with socket.create_server(("127.0.0.1", 0)) as free:
        port = free.getsockname()[1]
    server = multiprocessing.get_context("spawn").Process(target=serve, args=(port,), daemon=True)
    server.start()
    line = connected(port, server)

    def post(path, body):
        line.request("POST", path, body, {"Content-Type": "application/json"})
        answer = line.getresponse()
        text = answer.read()
        assert answer.status == 200, text[:300]
        return text

    small = json.dumps({**SETTINGS, "readings": [{"apparent_permittivity": 17.0,
                                                  "temperature": 14.0}]})  # fmt: skip
    taken = []
    for _ in range(100):
        start = time.perf_counter()
        post("/v1/estimates", small)
        taken.append(time.perf_counter() - start)
    report("first estimate after start, minus the hundredth, ms", 1e3 * (taken[0] - taken[-1]),
           "at most 50", first_ms=1e3 * taken[0], hundredth_ms=1e3 * taken[-1])  # fmt: skip
    rng = np.random.default_rng(3)
    columns = {
        "time": ["2026-05-04T06:00:00Z"] * ROWS,
        "depth": [0.15] * ROWS,
        "apparent_permittivity": rng.uniform(6, 30, ROWS).round(2).tolist(),
        "temperature": rng.uniform(2, 35, ROWS).round(2).tolist(),
    }
    rows = [dict(zip(columns, cells, strict=True)) for cells in zip(*columns.values(), strict=True)]
    as_rows = json.dumps({**SETTINGS, "readings": rows})
    as_columns = json.dumps({**SETTINGS, "readings": columns})
    plain = json.dumps(rows)
    calm = quiet()
    found = medians({
        "models": lambda: post("/as-models", plain),
        "rows": lambda: post("/v1/estimates", as_rows),
        "columns": lambda: post("/v1/estimates", as_columns),
    }, rounds=15)  # fmt: skip
    for name, aim in (("columns", "at least 15"), ("rows", "at least 6")):
        report(f"10 000 readings as {name}, times as fast as a list of models",
               found["models"] / found[name], aim, models_ms=1e3 * found["models"],
               case_ms=1e3 * found[name], calm=calm)  # fmt: skip
    server.terminate()
    server.join()


if __name__ == "__main__":
    main()
