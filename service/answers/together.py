"""Few readings of many requests at once: what rests on the same is worked out as one column.

An equation costs as much for one row as for fifty, and the answer to a row depends on that row
alone. So whatever came in while the one before was worked out is worked out together, and each
request gets the very bytes it would have got by itself. Nobody waits for a clock: who comes alone
is answered alone.
"""

import asyncio
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from fastapi.responses import Response

from models.advisories import Advice
from models.estimate import Estimates, estimate
from models.readings import read
from models.relation import Array
from service.answers.advice import remarks_of
from service.answers.prepared import Prepared
from service.formats.json.estimates import laid_out, rows_of, with_rest
from service.formats.json.readings import JsonReadings

MOST_ROWS = 512
"""Readings that are worked out at a time, so that others have their turn."""
MOST_TURNS = 50
"""Rounds of the event loop in which what has arrived is taken in before the work begins."""

Rows = Sequence[Mapping[str, Any]]
"""The readings of one request, all with the same keys."""


class Ready(Response):
    """A JSON answer whose bytes are there, with its counts."""

    def __init__(self, body: bytes, rows: int, flagged: int) -> None:
        self.status_code, self.body, self.background = 200, body, None
        self.raw_headers = [
            (b"content-length", b"%d" % len(body)),
            (b"content-type", b"application/json"),
            (b"vary", b"Accept"),
            (b"row-count", b"%d" % rows),
            (b"flagged-count", b"%d" % flagged),
        ]


class Together:
    """Requests that wait for their turn in one event loop, by what they rest on."""

    def __init__(self) -> None:
        self._waiting: dict[Prepared, list[tuple[Rows, asyncio.Future[Ready]]]] = {}
        self._count = self._seen = self._turns = 0

    def ask(self, said: Prepared, rows: Rows) -> asyncio.Future[Ready]:
        """The answer to some readings, once their turn has come."""
        loop = asyncio.get_running_loop()
        answer: asyncio.Future[Ready] = loop.create_future()
        if not self._waiting:
            loop.call_soon(self._turn, loop)
        self._waiting.setdefault(said, []).append((rows, answer))
        self._count += len(rows)
        return answer

    def _turn(self, loop: asyncio.AbstractEventLoop) -> None:
        """Let the loop take in what is there already; work once nothing more is."""
        grown = self._count > self._seen
        if grown and self._count < MOST_ROWS and self._turns < MOST_TURNS:
            self._seen, self._turns = self._count, self._turns + 1
            loop.call_soon(self._turn, loop)
            return
        self._seen = self._turns = 0
        self._next(loop)

    def _next(self, loop: asyncio.AbstractEventLoop) -> None:
        said = next(iter(self._waiting))
        every = self._waiting.pop(said)
        waiting = [(rows, answer) for rows, answer in every if not answer.done()]
        count, total = 0, 0
        while count < len(waiting) and (not total or total + len(waiting[count][0]) <= MOST_ROWS):
            total += len(waiting[count][0])
            count += 1
        if waiting[count:]:
            self._waiting[said] = waiting[count:]
        self._count = sum(len(rows) for asked in self._waiting.values() for rows, _ in asked)
        if self._waiting:
            loop.call_soon(self._turn, loop)
        if waiting:
            _answer(said, waiting[:count])


def _answer(said: Prepared, asked: Sequence[tuple[Rows, asyncio.Future[Ready]]]) -> None:
    try:
        answers = answers_to(said, [rows for rows, _ in asked])
    except Exception as error:  # noqa: BLE001 - it goes to those who asked
        if len(asked) == 1:
            asked[0][1].set_exception(error)
        else:  # whoever it is about must not take the others along
            for one in asked:
                _answer(said, [one])
        return
    for (_, answer), told in zip(asked, answers, strict=True):
        answer.set_result(told)


def answers_to(said: Prepared, requests: Sequence[Rows]) -> list[Ready]:
    """The answers to several requests that rest on the same."""
    every = [row for rows in requests for row in rows]
    units = said.settings.units
    numbers = {n: np.array([row[n] for row in every], dtype=np.float64) for n in said.numbers}
    texts = {name: [row[name] for row in every] for name in said.texts}
    result = estimate(read(numbers, units, {}), said.basis)
    told = rows_of(laid_out(result, JsonReadings("rows", len(every), numbers, texts, {}), units))
    flagged = (result.flags != 0).tolist()
    ends = np.cumsum([len(rows) for rows in requests]).tolist()
    parts = [slice(end - len(rows), end) for end, rows in zip(ends, requests, strict=True)]
    rests = [said.rest] * len(parts)
    if _remarks(said, numbers, result, slice(None)):
        seen = (_remarks(said, numbers, result, part) for part in parts)
        rests = [said.rest_with(remarks) if remarks else said.rest for remarks in seen]
    return [
        Ready(with_rest(told[part], rest), part.stop - part.start, sum(flagged[part]))
        for part, rest in zip(parts, rests, strict=True)
    ]


def _remarks(
    said: Prepared, numbers: Mapping[str, Array], result: Estimates, part: slice
) -> tuple[Advice, ...]:
    """The advisories that some of the rows give rise to."""
    remarks = remarks_of(said.basis)
    remarks.note(
        {name: values[part] for name, values in numbers.items()},
        said.settings.units,
        result.flags[part],
        {name: values[part] for name, values in result.columns.items()},
    )
    return remarks.advice(said.settings.units)
