"""Tables go through whole, counted, in order, in bounded memory, over real connections."""

import errno
import http.client
import io
import os
import socket
import threading
import time

import anyio
import httpx2
import numpy as np
import pytest
from starlette.applications import Starlette
from starlette.responses import Response
from starlette.routing import Route

from models.flags import BIT
from service.batch import PIECE, Counts, Spool, SpooledResponse, convert_file, convert_stream
from service.formats.block import Answer
from service.formats.errors import CellError, FormatError, SpoolFull
from tests.service.echo import running
from tests.service.formats.doubling import conversion, converted, cut, doubled

ROWS = b"".join(b"%d,%d.5,%s\n" % (i, 1 + i % 80, b"x" * (i % 40)) for i in range(150_000))
TABLE = b"row,apparent_permittivity,note\n" + ROWS


@pytest.fixture(scope="module")
def expected():
    return converted(TABLE)


async def arriving(*chunks):
    for chunk in chunks:
        yield chunk


def streamed(chunks, work, spool=None):
    spool = spool or io.BytesIO()

    async def main():
        return await convert_stream(arriving(*chunks), work, spool)

    return anyio.run(main), spool


def test_a_stream_and_a_file_have_one_answer(expected):
    pieces = cut(TABLE, [1, 500, 70_000, 70_001, 2_500_000])
    counts, spool = streamed(pieces, conversion("csv", "csv"))
    assert spool.getvalue() == expected
    target, read = io.BytesIO(), []
    assert convert_file(io.BytesIO(TABLE), target, conversion("csv", "csv"), read.append) == counts
    assert target.getvalue() == expected
    assert (sum(read), max(read)) == (len(TABLE), PIECE)
    assert counts == Counts(rows=150_000, flagged=0)


@pytest.mark.parametrize("form", ["csv", "ndjson"])
def test_rows_and_flagged_rows_are_counted(form):
    body = b"apparent_permittivity\n1.5\nx\nNA\n,\n\n2\n"
    if form == "ndjson":
        body = b'{"apparent_permittivity":1}\n{"apparent_permittivity":"x"}\n7\n\n{"a":null}\n{}\n'
    counts, _ = streamed([body], conversion(form, form))
    assert counts == Counts(rows=5, flagged=3 if form == "csv" else 2)


def test_an_answer_begins_where_the_spool_stands():
    spool = io.BytesIO()
    spool.write(b"before ")
    streamed([b"apparent_permittivity\n2\n"], conversion("csv", "csv"), spool)
    assert spool.getvalue() == b"before apparent_permittivity,water_content,flags\n2,4.0,\n"


@pytest.mark.parametrize(
    ("rows", "told"),
    [
        ("1,14\n2,warm\n", "line 3 (row 2), column temperature: expected a number, found 'warm'"),
        ('"1","x\ny"\nz,', "line 2 (row 1), column temperature: expected a number, found 'x\\ny'"),
        ("1,2,3\n", "line 2 (row 1): expected 2 cells, as many as the header has, found 3 cells: "
         "'1,2,3'"),
        ("1,\n,14\n", "line 3 (row 2), column apparent_permittivity: expected a number, found "
         "none: the model needs it"),
    ],
)  # fmt: skip
def test_strictness_refuses_the_first_bad_cell(rows, told):
    body = f"apparent_permittivity, Temperature\n{rows}".encode()
    with pytest.raises(CellError) as caught:
        converted(body, strict=True)
    assert str(caught.value) == told
    assert converted(body, strict=False)


def test_strictness_lets_a_missing_value_pass_that_is_not_needed():
    body = b"apparent_permittivity,temperature\n17,\n18,NA\n"
    assert converted(body, strict=True) == converted(body)


def test_strictness_lets_a_row_pass_that_has_no_number_for_another_reason():
    def impossible(block):
        answer = doubled(block)
        flags = answer.flags | BIT["permittivity-above-water"]
        return Answer({"water_content": np.full(len(block), np.nan)}, flags)

    body = b"apparent_permittivity,temperature\n150,\n"
    assert converted(body, strict=True, answer=impossible)


def test_strictness_in_ndjson():
    body = b'{"apparent_permittivity":1}\n\n{"apparent_permittivity":"17"}\n'
    with pytest.raises(
        CellError, match=r"line 3 \(row 2\), column apparent_permittivity: .*found '17'"
    ):
        converted(body, "ndjson", strict=True)


def test_every_block_is_answered_with_the_same_columns():
    def fickle(block):
        return Answer({f"x{len(block)}": np.ones(len(block))}, np.zeros(len(block), np.uint64))

    body = b"apparent_permittivity\n" + b"1\n" * 40_000  # the first block has 64 KiB at least
    with pytest.raises(ValueError, match="same columns"):
        converted(body, block_bytes=30, answer=fickle)


def test_no_room_for_the_answer_is_said_so():
    class Full(io.BytesIO):
        def write(self, _):
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    with pytest.raises(SpoolFull, match="no room left"):
        streamed([TABLE], conversion("csv", "csv"), Full())


def test_while_a_piece_is_worked_on_no_more_than_the_next_is_taken_in():
    taken, ahead = 0, []

    async def chunks():
        nonlocal taken
        for start in range(0, len(TABLE), 1 << 16):
            taken += 1 << 16
            yield TABLE[start : start + (1 << 16)]

    def watched(block):
        ahead.append(taken - seen(block))
        return doubled(block)

    def seen(block):
        return TABLE.index(b"\n%s\n" % block.records[-1].encode())

    async def main():
        await convert_stream(chunks(), conversion("csv", "csv", answer=watched), io.BytesIO())

    anyio.run(main)
    assert max(ahead) <= 3 * PIECE


def app_of(spools):
    """What the route does with a table, without the rest of the service."""

    async def convert(request):
        spool = Spool(in_memory=1 << 16)
        spools.append(spool)
        try:
            counts = await convert_stream(request.stream(), conversion("csv", "csv"), spool)
        except FormatError as error:
            spool.close()
            return Response(str(error))
        return SpooledResponse(spool, "text/csv", {"Row-Count": str(counts.rows)})

    return Starlette(routes=[Route("/", convert, methods=["POST"])])


@pytest.fixture(scope="module")
def spools():
    return []


@pytest.fixture(scope="module")
def port(spools):
    with running(app_of(spools)) as base_url:
        yield int(base_url.rpartition(":")[2])


def soon(holds):
    end = time.monotonic() + 20
    while time.monotonic() < end and not holds():
        time.sleep(0.02)
    return holds()


def posted(port, body, **options):
    """Send everything, then read."""
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=60)
    try:
        connection.request("POST", "/", body, **options)
        response = connection.getresponse()
        return response.headers, response.read()
    finally:
        connection.close()


def test_a_client_that_sends_everything_before_it_reads_loses_nothing(port, expected, spools):
    headers, body = posted(port, TABLE)
    assert body == expected
    assert headers["Content-Length"] == str(len(expected))
    assert headers["Row-Count"] == "150000"
    assert headers["Content-Type"] == "text/csv; charset=utf-8"
    assert soon(lambda: spools[-1].closed)


def test_a_client_that_sends_slowly_loses_nothing(port):
    def slowly():
        for start in range(0, 60_000, 4_000):
            time.sleep(0.01)
            yield TABLE[start : start + 4_000]

    _, body = posted(port, slowly(), encode_chunked=True, headers={"Transfer-Encoding": "chunked"})
    assert body == converted(TABLE[:60_000])


def test_clients_at_the_same_time_get_their_own_answers(port, expected):
    answers = {}

    def ask(name):
        with httpx2.Client(timeout=60) as client:
            body = TABLE.replace(b"\n0,1.5,", b"\n0,%d.5," % name)
            answers[name] = client.post(f"http://127.0.0.1:{port}/", content=body).content

    threads = [threading.Thread(target=ask, args=(name,)) for name in (3, 4, 5)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(60)
    for name, answer in answers.items():
        assert answer == expected.replace(
            b"\n0,1.5,,3.0,", b"\n0,%d.5,,%d.0," % (name, 2 * name + 1)
        )
    assert len(answers) == 3


def test_a_client_that_goes_away_leaves_no_spool_behind(port, spools):
    before = len(spools)
    with socket.create_connection(("127.0.0.1", port)) as connection:
        head = f"POST / HTTP/1.1\r\nHost: x\r\nContent-Length: {len(TABLE)}\r\n\r\n"
        connection.sendall(head.encode() + TABLE)
    assert soon(lambda: len(spools) == before + 1 and spools[-1].closed)
