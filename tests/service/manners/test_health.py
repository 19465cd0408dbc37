"""Start, health, versions, limits, HEAD."""

import pytest

from service import __version__
from service.settings import LIMITS


def test_livez_answers(server):
    answer = server.client.get("/livez")
    assert answer.json() == {"status": "alive"}


def test_readyz_is_200_while_serving(server):
    assert server.client.get("/readyz").status_code == 200


def test_version_is_the_one_of_the_description(server):
    versions = server.client.get("/v1/version").json()
    assert versions["gleyline"] == __version__
    assert {"python", "numpy", "scipy", "pydantic", "fastapi"} <= versions.keys()
    assert server.client.get("/openapi.json").json()["info"]["version"] == __version__


def test_limits_shows_what_is_set(start):
    service = start(json_body_bytes=123_456)
    limits = service.client.get("/v1/limits").json()
    assert list(limits) == list(LIMITS)
    assert limits["json_body_bytes"] == 123_456


@pytest.mark.parametrize(
    "path", ["/", "/docs", "/livez", "/openapi.json", "/v1/mixing-models", "/v1/version"]
)
def test_head_has_the_headers_of_get_and_no_body(server, path):
    get, head = server.client.get(path), server.client.head(path)
    assert head.status_code == get.status_code == 200
    assert head.content == b""
    for name in ("content-length", "content-type", "etag"):
        assert head.headers.get(name) == get.headers.get(name)


def test_a_connection_goes_on_after_head(server):
    for _ in range(3):
        assert server.client.head("/v1/quantities").status_code == 200
        assert server.client.get("/livez").json() == {"status": "alive"}


def test_every_answer_tells_how_long_it_took(server):
    assert server.client.get("/livez").headers["server-timing"].startswith("total;dur=")


@pytest.mark.parametrize("given", ["abc-123", "A.b_c-9", "x" * 64])
def test_a_request_id_is_echoed(server, given):
    answer = server.client.get("/livez", headers={"X-Request-Id": given})
    assert answer.headers["x-request-id"] == given


@pytest.mark.parametrize("given", ["", "a b", "x" * 500, b"a\x01b", "ä".encode()])
def test_a_strange_request_id_is_replaced(server, given):
    answer = server.client.get("/livez", headers={"X-Request-Id": given})
    if answer.status_code == 200:  # a control character may be refused by the server itself
        assert len(answer.headers["x-request-id"]) == 32
    else:
        assert answer.status_code == 400
