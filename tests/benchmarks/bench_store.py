"""The store: acknowledged posts, bulk, questions; SQLite and PostgreSQL side by side.

Run: python -m tests.benchmarks.bench_store
"""

import asyncio
import http.client
import itertools
import multiprocessing
import socket
import statistics
import tempfile
import time
from contextlib import ExitStack
from functools import partial
from pathlib import Path

import numpy as np
import uvicorn
from fastapi import Request

from service.app import create_api, surrounded
from service.settings import Settings
from service.stations.ask.answers import JSON, encoded
from service.stations.ask.asked import asked_of
from service.stations.ask.overview import latest_page
from service.stations.ask.questions import estimates_page, scene_of
from service.stations.ask.resampled import resampled_page
from service.stations.documents import Shelf
from service.store.interface import Batch, Document, Span
from service.store.opening import open_store
from service.store.writer import Writer
from tests.benchmarks.interleaved import medians, quiet, report
from tests.benchmarks.load import post, rate
from tests.service.stores import KINDS, settings_of

T0 = 1_700_000_000_000_000
SECOND, MINUTE = 1_000_000, 60_000_000
LOGGERS = 64
YEAR = 105_120
clock = itertools.count()


def put(store, kind, name, body):
    store.put(Document(kind, name, 0, 0, None, body), store.head().documents, None)


def furnished(settings, stations=1):
    """A store with a soil, probes and stations."""
    store = open_store(settings)
    put(store, "soil", "loam", {"texture": "loam", "mixing_model": "crim"})
    put(store, "probe", "p1", {"frequency": 1e9, "apparent_permittivity_u": 0.3})
    for number in range(stations):
        item = {"probe": "p1", "soil": "loam", "depth": 0.2}
        put(store, "station", f"s{number}", {"installations": [item]})
    return store


def acknowledged(store, most_rows, seconds=1.0):
    """One-reading batches per second, of 64 loggers that each wait for their acknowledgement."""
    writer, seen = Writer(store, most_rows=most_rows), store.head().documents

    async def run():
        end = time.perf_counter() + seconds

        async def logger(number):
            count = 0
            while time.perf_counter() < end:
                columns = {"apparent_permittivity": [17.2], "temperature": [14.0]}
                moment = T0 + next(clock) * SECOND
                await writer.append(Batch("s0", seen, [f"@{number}"], [moment], columns))
                count += 1
            return count

        return sum(await asyncio.gather(*map(logger, range(LOGGERS)))) / seconds

    found = asyncio.run(run())
    writer.close()
    return found


def group_commit(stores):
    rates = {}
    for _ in range(5):
        for kind, store in stores.items():
            for name, most in (("grouped", 5000), ("alone", 1)):
                rates.setdefault((kind, name), []).append(acknowledged(store, most))
    for kind in stores:
        grouped, alone = (statistics.median(rates[kind, name]) for name in ("grouped", "alone"))
        report(f"{kind}: 64 loggers, acknowledged posts beside one commit each", grouped / alone,
               "at least 6", grouped_per_s=grouped, alone_per_s=alone)  # fmt: skip


def serve(port, given):
    settings = Settings(**given)
    api = create_api(settings)

    @api.post("/noop")
    async def noop(request: Request) -> dict[str, int]:
        await request.body()
        return {"accepted": 1}

    uvicorn.run(surrounded(api, settings), port=port, log_level="warning", access_log=False)


def reading_of(_number, _):
    """Of the probe that is installed there, as loggers send it."""
    text = f'{{"readings":[{{"time":"{stamp(next(clock))}","probe":"p1",'
    text += '"apparent_permittivity":17.2,"temperature":14.1}]}'
    return post("/v1/stations/s0/readings", text.encode())


def stamp(second):
    return time.strftime("%Y-%m-%dT%H:%M:%SZ", time.gmtime(1_400_000_000 + second))


def over_http(given):
    """Posts of one reading beside a no-op, and a long table beside executemany."""
    rates, table, plain = {}, {}, {}
    with ExitStack() as stack:
        servers = {}
        for kind, settings in given.items():
            with socket.create_server(("127.0.0.1", 0)) as free:
                port = free.getsockname()[1]
            process = multiprocessing.get_context("spawn").Process(
                target=serve, args=(port, settings), daemon=True
            )
            process.start()
            stack.callback(process.join)
            stack.callback(process.terminate)
            servers[kind] = ("127.0.0.1", port)
            wait_for(port)
        noop = post("/noop", b"{}")
        for _ in range(5):
            for kind, address in servers.items():
                for name, request in (("noop", lambda *_: noop), ("readings", reading_of)):
                    found = rate(address, request, loggers=LOGGERS)
                    rates.setdefault((kind, name), []).append(found)
        for _ in range(5):
            for kind, (_, port) in servers.items():
                table.setdefault(kind, []).append(post_table(port))
                plain.setdefault(kind, []).append(insert_plainly(given[kind]))
    for kind in given:
        posts, nothing = (statistics.median(rates[kind, n]) for n in ("readings", "noop"))
        report(f"{kind}: acknowledged posts of one reading beside a no-op that reads them",
               posts / nothing, "at least 0.6", posts_per_s=posts, noop_per_s=nothing)  # fmt: skip
        took, bare = statistics.median(table[kind]), statistics.median(plain[kind])
        report(f"{kind}: 100 000 rows of CSV beside executemany", bare / took, "at least 0.5",
               post_s=took, executemany_s=bare)  # fmt: skip


def wait_for(port):
    for _ in range(500):
        try:
            socket.create_connection(("127.0.0.1", port)).close()
        except ConnectionRefusedError:
            time.sleep(0.02)
        else:
            return


def post_table(port):
    rng = np.random.default_rng(3)
    values = rng.uniform(6, 30, 100_000).round(2)
    rows = [f"{stamp(next(clock))},p1,{v},14.25,0.62" for v in values.tolist()]
    body = "\n".join(["time,probe,apparent_permittivity,temperature,bulk_conductivity", *rows])
    line = http.client.HTTPConnection("127.0.0.1", port)
    begun = time.perf_counter()
    line.request("POST", "/v1/stations/s0/readings", body, {"Content-Type": "text/csv"})
    answer = line.getresponse().read()
    took = time.perf_counter() - begun
    assert b'"accepted":100000,' in answer, answer[:300]
    return took


def insert_plainly(settings):
    """executemany of the same columns into the same table, in one transaction."""
    store = open_store(Settings(**settings))
    number = 10**6 + next(clock)
    rows = [(number, T0 + i * MINUTE, 1, 17.2, 14.25, 0.62) for i in range(100_000)]
    marks = ", ".join(["?" if store.engine.dialect.name == "sqlite" else "%s"] * 6)
    columns = "channel, time, revision, apparent_permittivity, temperature, bulk_conductivity"
    statement = f"INSERT INTO reading ({columns}) VALUES ({marks})"  # noqa: S608
    with store.engine.connect().execution_options(write=True) as connection:
        if store.engine.dialect.name != "sqlite":
            store._partition(connection, rows)
        begun = time.perf_counter()
        connection.exec_driver_sql(statement, rows)
        connection.commit()
        took = time.perf_counter() - begun
    store.close()
    return took


def questions(stores):
    """A year of readings as rows and as hourly means beside fetching them; everything now."""
    everything = asked_of([("limit", "150000")], ("limit",), 150_000)
    hourly = asked_of([("every", "1h"), ("limit", "150000")], ("every", "limit"), 150_000)
    for kind, store in stores.items():
        seen, rng = store.head().documents, np.random.default_rng(3)
        times = [T0 + i * 5 * MINUTE for i in range(YEAR)]
        columns = {"apparent_permittivity": rng.uniform(8, 28, YEAR).round(2).tolist(),
                   "temperature": rng.uniform(2, 30, YEAR).round(2).tolist()}  # fmt: skip
        store.append([Batch("s1", seen, ["p1"] * YEAR, times, columns)])
        for start in range(1, 1000, 100):
            store.append([
                Batch(f"s{n}", seen, ["p1"], [T0 - MINUTE], {k: v[:1] for k, v in columns.items()})
                for n in range(start, min(start + 100, 1000))
            ])  # fmt: skip
        shelf = Shelf(store)
        whole = Span(store.channels("s1"), list(columns))

        def answer(asked, question, shelf=shelf):
            page = question(scene_of(shelf, "s1", asked), asked)
            return encoded(page.frame, JSON, "estimates", page.rest)

        def now(shelf=shelf):
            page, _ = latest_page(shelf, asked_of([], (), 1), ())
            assert page.frame.height >= 999
            return encoded(page.frame, JSON, "latest", page.rest)

        calm = quiet()
        found = medians({
            "fetch": partial(store.readings, whole),
            "hourly": partial(answer, hourly, resampled_page),
            "rows": partial(answer, everything, estimates_page),
            "latest": now,
        }, rounds=7)  # fmt: skip
        for case, aim in (("hourly", "at most 2"), ("rows", "at most 4")):
            ratio = found[case] / found["fetch"]
            report(f"{kind}: a year, {case}, with bands, times fetching it", ratio, aim,
                   fetch_s=found["fetch"], calm=calm)  # fmt: skip
        report(f"{kind}: the latest values of 1 000 stations, ms", 1e3 * found["latest"],
               "at most 50", calm=calm)  # fmt: skip


def main():
    with ExitStack() as stack:
        given = {
            kind: stack.enter_context(settings_of(kind, Path(tempfile.mkdtemp()))) for kind in KINDS
        }
        stores = {kind: furnished(Settings(**s), stations=1000) for kind, s in given.items()}
        questions(stores)
        group_commit(stores)
        over_http(given)
        for store in stores.values():
            store.close()


if __name__ == "__main__":
    main()
