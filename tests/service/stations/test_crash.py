"""What was acknowledged is there after the process was killed, once and whole."""

import asyncio
import time

import httpx2
import pytest

from tests.service.conftest import command
from tests.service.stations.farm import furnish, put
from tests.service.stores import KINDS, settings_of

LOGGERS, ROUNDS = 50, 1
T0 = 1_750_000_000


def at(second):
    return time.strftime("%Y-%m-%dT%H:%M:%SZ", time.gmtime(T0 + second))


async def post_until_killed(base_url, numbers, acknowledged, first):
    """Each logger posts a reading a second of its own clock; the value tells the time."""
    async with httpx2.AsyncClient(base_url=base_url, timeout=5) as client:

        async def logger(number):
            for second in range(first, first + 100_000):
                row = {"time": at(second), "depth": number / 1000, "temperature": second % 50,
                       "apparent_permittivity": 2 + (second % 700) / 10}  # fmt: skip
                try:
                    sent = {"readings": [row]}
                    answer = await client.post("/v1/stations/north-1/readings", json=sent)
                except httpx2.HTTPError:
                    return
                assert answer.json()["accepted"] == 1, answer.text
                acknowledged.add((number, second))

        await asyncio.gather(*map(logger, numbers))


def kept(client):
    """Logger and second of every kept reading; each is checked to be whole."""
    found, address = [], "/v1/stations/north-1/readings?limit=50000&shape=columns"
    while address:
        answer = client.get(address)
        rows = answer.json()["readings"]
        names = ("time", "depth", "apparent_permittivity", "temperature")
        for moment, depth, permittivity, temperature in zip(*map(rows.get, names), strict=True):
            second = int(time.mktime(time.strptime(moment, "%Y-%m-%dT%H:%M:%SZ"))) - time.timezone
            second -= T0
            assert permittivity == pytest.approx(2 + (second % 700) / 10, abs=1e-12)
            assert temperature == second % 50
            found.append((round(depth * 1000), second))
        address = answer.links.get("next", {}).get("url")
    return found


def kill_while_posting(settings, folder, rounds):
    """Rounds of posting, kill -9 and looking: how many readings were acknowledged."""
    acknowledged = set()
    for number in range(rounds):
        with command(folder, **settings) as service:
            furnish(service.client)
            base, first = service.base_url, number * 100_000

            async def posting(base=base, first=first, process=service.process):
                task = asyncio.create_task(
                    post_until_killed(base, range(LOGGERS), acknowledged, first)
                )
                await asyncio.sleep(0.5)
                process.kill()
                await task

            asyncio.run(posting())
        with command(folder, **settings) as service:
            assert service.client.get("/readyz").status_code == 200
            found = kept(service.client)
        assert len(found) == len(set(found))
        assert acknowledged <= set(found)
    return len(acknowledged)


@pytest.mark.parametrize("kind", KINDS)
def test_kill_9_loses_nothing_that_was_acknowledged(tmp_path, kind):
    with settings_of(kind, tmp_path) as settings:
        count = kill_while_posting(settings, tmp_path, ROUNDS)
    assert count > LOGGERS


def test_stopping_loses_nothing_and_answers_what_is_under_way(tmp_path):
    acknowledged = set()
    with command(tmp_path) as service:
        furnish(service.client)

        async def posting():
            task = asyncio.create_task(
                post_until_killed(service.base_url, range(10), acknowledged, 0)
            )
            await asyncio.sleep(0.4)
            service.process.terminate()
            await task

        asyncio.run(posting())
        service.process.wait(10)
        assert "Traceback" not in service.log.read_text()
    with command(tmp_path) as service:
        assert set(kept(service.client)) == acknowledged


def test_two_services_on_one_database_are_one_record(tmp_path):
    folders = [tmp_path / "a", tmp_path / "b"]
    for folder in folders:
        folder.mkdir()
    with settings_of("postgresql", tmp_path) as settings:
        first, second = (command(f, **{**settings, "data": f}) for f in folders)
        with first as one, second as other:
            furnish(one.client)
            assert other.client.get("/v1/stations/north-1").status_code == 200
            for i in range(6):
                here, there = (one, other) if i % 2 else (other, one)
                row = {"time": at(i), "probe": "p1", "apparent_permittivity": 17.0}
                sent = {"readings": [row]}
                answer = here.client.post("/v1/stations/north-1/readings", json=sent).json()
                assert answer["accepted"] == 1
                again = there.client.post("/v1/stations/north-1/readings", json=sent).json()
                assert again["duplicates"] == 1
                rows = there.client.get("/v1/stations/north-1/readings").json()["readings"]
                assert len(rows) == i + 1
            put(one.client, "station", "new", {})
            sent = {"readings": [{"time": at(0), "depth": 0.1, "temperature": 1}]}
            assert other.client.post("/v1/stations/new/readings", json=sent).status_code == 200
            assert one.client.delete("/v1/stations/new").status_code == 409
            assert one.stop() is not None
            rows = other.client.get("/v1/stations/north-1/readings").json()["readings"]
            assert len(rows) == 6
            assert other.client.get("/readyz").status_code == 200
