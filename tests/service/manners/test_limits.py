"""Bodies are counted, decoded and timed; what is too much is refused early and as a problem."""

import gzip
import hashlib
import json
import resource
import socket
import time
import zlib

import pytest

from tests.service.echo import BATCH_LIMIT, LIMIT, STALL

PATH = "/v1/estimates/echo"
JSON = {"Content-Type": "application/json"}
CSV = {"Content-Type": "text/csv"}
GZIP = {"Content-Encoding": "gzip"}


def pieces(body, size=10_000):
    for start in range(0, len(body), size):
        yield body[start : start + size]


def exchange(client, *parts, pause=0.0):
    """Send bytes as they are, and read until the server closes or falls silent."""
    address = client.base_url.host, client.base_url.port
    with socket.create_connection(address, timeout=STALL * 6) as connection:
        for part in parts:
            connection.sendall(part)
            time.sleep(pause)
        answer = b""
        while data := connection.recv(65536):
            answer += data
            head, _, body = answer.partition(b"\r\n\r\n")
            if f"content-length: {len(body)}\r\n".encode() in head + b"\r\n":
                break
        return answer


def test_exactly_the_limit_is_taken(echo):
    assert echo.post(PATH, content=b" " * LIMIT, headers=JSON).json()["bytes"] == LIMIT
    chunked = echo.post(PATH, content=pieces(b" " * LIMIT), headers=JSON)
    assert chunked.json()["bytes"] == LIMIT


@pytest.mark.parametrize("body", [b" " * (LIMIT + 1), b" " * (10 * LIMIT)], ids=["one", "ten"])
def test_more_is_413_announced_or_not(echo, body):
    for _ in range(10):
        for content in (body, pieces(body)):
            answer = echo.post(PATH, content=content, headers=JSON)
            assert answer.status_code == 413
            assert answer.headers["content-type"] == "application/problem+json"
            assert f"{LIMIT} bytes" in answer.json()["detail"]


def test_an_announced_body_is_refused_before_it_is_sent(echo):
    head = f"POST {PATH} HTTP/1.1\r\nHost: x\r\nContent-Length: {LIMIT + 1}\r\n"
    answer = exchange(echo, head.encode() + b"Expect: 100-continue\r\n\r\n")
    assert answer.startswith(b"HTTP/1.1 413 ")


def test_a_table_may_be_longer_than_a_document(echo):
    body = b"1,2\n" * LIMIT
    assert echo.post(PATH, content=body, headers=CSV).json()["bytes"] == len(body)
    assert echo.post(PATH, content=body, headers=JSON).status_code == 413
    assert echo.post("/v1/mixing-models", content=body, headers=CSV).status_code == 413


@pytest.mark.parametrize("encoding", ["gzip", "x-gzip", "GZIP"])
@pytest.mark.parametrize("chunk", [7, 1000, 10**6])
def test_a_gzip_body_arrives_as_it_was(echo, encoding, chunk):
    body = json.dumps(list(range(15_000))).encode()
    content = pieces(gzip.compress(body), chunk)
    answer = echo.post(PATH, content=content, headers=JSON | {"Content-Encoding": encoding})
    assert answer.json()["sha256"] == hashlib.sha256(body).hexdigest()
    assert "content-encoding" not in answer.json()["sent"]
    assert "content-length" not in answer.json()["sent"]


def test_a_gzip_body_of_several_members_arrives_whole(echo):
    body = b"".join(gzip.compress(part) for part in (b"a" * 1000, b"", b"b" * 70_000))
    answer = echo.post(PATH, content=body, headers=JSON | GZIP).json()
    assert answer["sha256"] == hashlib.sha256(b"a" * 1000 + b"b" * 70_000).hexdigest()


@pytest.mark.parametrize("cut", [1, 4, 9, 100, 20_000])
def test_a_gzip_body_that_was_cut_off_is_400(echo, cut):
    whole = gzip.compress(hashlib.sha512(b"").digest() * 900, 0)
    answer = echo.post(PATH, content=whole[:-cut], headers=JSON | GZIP)
    assert answer.status_code == 400
    assert "cut off" in answer.json()["detail"]


@pytest.mark.parametrize(
    "body", [b"no gzip at all", gzip.compress(b"x") + b"garbage", b"\x1f\x8b" + b"\xff" * 50]
)
def test_what_is_not_gzip_is_400(echo, body):
    assert echo.post(PATH, content=body, headers=JSON | GZIP).status_code == 400


@pytest.mark.parametrize("encoding", ["br", "gzip, gzip", "deflate"])
def test_another_encoding_is_415_and_told_what_is_read(echo, encoding):
    answer = echo.post(PATH, content=b"x", headers=JSON | {"Content-Encoding": encoding})
    assert answer.status_code == 415
    assert answer.headers["accept-encoding"] == "gzip"


@pytest.fixture(scope="module")
def bomb():
    """A gigabyte of line ends in one megabyte."""
    packer = zlib.compressobj(9, wbits=31)
    block = b"\n" * 10**6
    return b"".join(packer.compress(block) for _ in range(1000)) + packer.flush()


@pytest.mark.parametrize("headers", [JSON, CSV], ids=["document", "table"])
def test_a_bomb_goes_off_at_the_limit(echo, bomb, headers):
    before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    begun = time.perf_counter()
    answer = echo.post(PATH, content=bomb, headers=headers | GZIP)
    assert answer.status_code == 413
    assert time.perf_counter() - begun < 2
    assert resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before < 100_000  # kB


def test_compressed_bytes_are_counted_as_well(echo):
    empty_members = gzip.compress(b"") * (BATCH_LIMIT // 100)
    assert len(empty_members) > BATCH_LIMIT // 10
    for content in (empty_members, pieces(empty_members, 60_000)):
        assert echo.post(PATH, content=content, headers=CSV | GZIP).status_code == 413


def test_a_stalled_body_is_408(echo):
    head = f"POST {PATH} HTTP/1.1\r\nHost: x\r\nContent-Length: 100\r\n\r\n0123456789"
    begun = time.perf_counter()
    answer = exchange(echo, head.encode())
    assert answer.startswith(b"HTTP/1.1 408 ")
    assert b"connection: close" in answer
    assert STALL <= time.perf_counter() - begun < 3 * STALL


def test_a_slow_body_is_taken(echo):
    head = f"POST {PATH} HTTP/1.1\r\nHost: x\r\nContent-Length: 3\r\n\r\n"
    assert b'"bytes":3' in exchange(echo, head.encode(), b"1", b"2", b"3", pause=STALL * 0.6)


def test_a_client_that_leaves_is_no_failure(echo, caplog):
    address = echo.base_url.host, echo.base_url.port
    with socket.create_connection(address) as connection:
        connection.sendall(
            f"POST {PATH} HTTP/1.1\r\nHost: x\r\nContent-Length: 9\r\n\r\n1".encode()
        )
    time.sleep(0.1)
    assert echo.get("/livez").status_code == 200
    assert "failed" not in caplog.text


def test_huge_headers_are_431_and_the_service_goes_on(echo):
    answer = echo.get("/livez", headers={"X-Long": "x" * 1_000_000})
    assert answer.status_code == 431
    assert answer.json()["status"] == 431
    assert exchange(echo, b"GET /livez?" + b"x" * 70_000 + b" HTTP/1.1\r\nHost: x\r\n\r\n")[
        9
    ] == ord("4")
    assert echo.get("/livez").status_code == 200


def test_two_content_lengths_are_refused(echo):
    head = f"POST {PATH} HTTP/1.1\r\nHost: x\r\nContent-Length: 1\r\nContent-Length: 2\r\n\r\n12"
    assert exchange(echo, head.encode()).startswith(b"HTTP/1.1 400 ")
    assert echo.get("/livez").status_code == 200
