"""Small requests that come at once are answered together: nobody can tell from the answer."""

import asyncio
import itertools
import json

import numpy as np
import pytest

from service.answers.few import FEW, few_readings
from service.answers.together import Together, answers_to

SETTINGS = (
    {"mixing_model": "crim", "soil": {"texture": "loam"}, "probe": {"frequency": 1e9}},
    {"soil": {"texture": "silt-loam", "clay": 0.22}, "units": {"bulk_conductivity": "mS/m"}},
    {"mixing_model": "topp-1980", "probe": {"apparent_permittivity_u": 0.4}},
)
ODD = (
    {"apparent_permittivity": 17.2, "temperature": -2.0, "bulk_conductivity": 0.6},
    {"apparent_permittivity": 17.2, "temperature": 285.1, "bulk_conductivity": 0.6},
    {"apparent_permittivity": None, "temperature": 14.0, "bulk_conductivity": 0.6},
    {"apparent_permittivity": -5, "temperature": 14, "bulk_conductivity": 0.0},
    {"apparent_permittivity": 5.0, "temperature": 14.0, "bulk_conductivity": 0.4},
)
"""Frozen, in kelvin, missing, impossible, and hardly telling anything of the pore water."""


def documents():
    """Requests of one to four readings, plain ones and odd ones, some with texts and depths."""
    rng = np.random.default_rng(11)
    for number in range(60):
        rows = [
            {"apparent_permittivity": round(float(rng.uniform(3, 45)), 2),
             "temperature": round(float(rng.uniform(1, 35)), 1),
             "bulk_conductivity": round(float(rng.uniform(0.2, 2)) * 100 ** (number % 2), 3)}
            for _ in range(1 + number % 4)
        ]  # fmt: skip
        if number % 5 == 0:
            rows[-1] = ODD[number // 5 % len(ODD)]
        if number % 3 == 0:
            rows = [{"time": "2026-05-04T06:00:00Z", "depth": 15, **row} for row in rows]
        yield {**SETTINGS[number % 2], "readings": rows}
    yield {**SETTINGS[2], "readings": [{"apparent_permittivity": 20.0}]}


def message(document):
    body = json.dumps(document).encode()
    head = (
        "POST /v1/estimates HTTP/1.1\r\nHost: x\r\nContent-Type: application/json\r\n"
        f"Connection: close\r\nContent-Length: {len(body)}\r\n\r\n"
    )
    return head.encode() + body


def all_at_once(address, sent):
    """The answers to requests on connections of their own, sent before any is read."""

    async def ask():
        lines = [await asyncio.open_connection(*address) for _ in sent]
        for (_, writer), text in zip(lines, sent, strict=True):
            writer.write(text)
        answers = [await reader.read() for reader, _ in lines]
        for _, writer in lines:
            writer.close()
        return answers

    return asyncio.run(ask())


def body_of(answer):
    head, _, body = answer.partition(b"\r\n\r\n")
    counts = sorted(line for line in head.lower().split(b"\r\n") if b"-count" in line)
    return head.partition(b"\r\n")[0], counts, body


def test_who_comes_in_a_crowd_gets_the_bytes_of_who_comes_alone(server):
    sent = [message(document) for document in documents()]
    alone = [body_of(all_at_once(server.address, [text])[0]) for text in sent]
    crowd = [body_of(answer) for answer in all_at_once(server.address, sent * 3)]
    assert crowd == alone * 3
    assert {status for status, _, _ in crowd} == {b"HTTP/1.1 200 OK"}


def test_a_column_gives_each_request_what_its_rows_give_alone():
    for document in documents():
        said, rows = few_readings(document, FEW)
        crowd = [rows, [*rows[1:], rows[0]], *([row] for row in rows)]
        told = answers_to(said, crowd)
        alone = [answers_to(said, [one])[0] for one in crowd]
        assert [answer.body for answer in told] == [answer.body for answer in alone]
        assert [answer.raw_headers for answer in told] == [answer.raw_headers for answer in alone]


def test_a_long_list_and_columns_say_the_same_as_few_rows(server):
    def post(readings):
        return server.client.post(
            "/v1/estimates", json={**SETTINGS[0], "readings": readings}
        ).json()

    rows = [{"apparent_permittivity": 3.0 + number / 2, "temperature": 14} for number in range(70)]
    each = list(itertools.chain.from_iterable(post([row])["estimates"] for row in rows))
    columns = {name: [row[name] for row in rows] for name in rows[0]}
    assert post(rows)["estimates"] == each
    for name, cells in post(columns)["estimates"].items():
        assert cells == [row[name] for row in each]
    few, many = post(rows[:1]), post(columns)
    few.pop("estimates"), many.pop("estimates")
    assert few == many


def test_an_advisory_is_of_the_request_whose_reading_it_is_about(server):
    plain = {**SETTINGS[0], "readings": [{"apparent_permittivity": 17.0, "temperature": 14.0}]}
    frozen = {**SETTINGS[0], "readings": [{"apparent_permittivity": 17.0, "temperature": -3.0}]}
    answers = all_at_once(server.address, [message(plain), message(frozen)] * 20)
    for place, answer in enumerate(answers):
        codes = [said["code"] for said in json.loads(body_of(answer)[2])["advisories"]]
        assert ("frozen-readings" in codes) is bool(place % 2)


def test_a_request_that_is_refused_takes_no_other_along(server):
    good = {**SETTINGS[0], "readings": [{"apparent_permittivity": 17.0, "temperature": 14.0}]}
    bad = ({**good, "readings": [{"apparent_permittivity": "17"}]},
           {**good, "mixing_model": "crimm"}, {**good, "probe": {"frequency": -1}})  # fmt: skip
    sent = [message(document) for document in (good, bad[0], good, bad[1], good, bad[2], good)]
    told = [body_of(answer)[0] for answer in all_at_once(server.address, sent * 5)]
    assert [b"200" in status for status in told] == [*([True, False] * 3), True] * 5
    assert all(b" 422 " in status for status in told if b"200" not in status)


@pytest.mark.parametrize("cancelled", [0, 3, 7])
def test_a_client_that_leaves_does_not_keep_the_others_waiting(cancelled):
    said, rows = few_readings(next(documents()), FEW)

    async def crowd():
        together = Together()
        waiting = [together.ask(said, rows) for _ in range(8)]
        waiting[cancelled].cancel()
        return await asyncio.gather(*waiting, return_exceptions=True)

    told = asyncio.run(crowd())
    assert isinstance(told.pop(cancelled), asyncio.CancelledError)
    assert len({answer.body for answer in told}) == 1


def test_a_crowd_of_any_size_is_answered_in_turns():
    said, rows = few_readings(next(documents()), FEW)
    many = [rows[0] for _ in range(FEW)]

    async def crowd():
        together = Together()
        asked = [together.ask(said, many if number % 3 else rows) for number in range(60)]
        return await asyncio.gather(*asked)

    told = asyncio.run(crowd())
    alone = [answers_to(said, [one])[0].body for one in (rows, many, many)]
    assert [answer.body for answer in told] == alone * 20
