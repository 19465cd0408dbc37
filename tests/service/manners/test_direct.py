"""The shortest way to what loggers and dashboards send answers just as the routes do."""

from contextlib import ExitStack

import httpx2
import pytest

from service.app import create_api, surrounded
from service.settings import Settings
from tests.service.echo import running
from tests.service.stations.farm import furnish, reading

ESTIMATES, READINGS = "/v1/estimates", "/v1/stations/north-1/readings"
NDJSON = {"content-type": "application/x-ndjson"}
ASKED = {"mixing_model": "topp-1980", "readings": [{"apparent_permittivity": 17.2}]}


@pytest.fixture(scope="module")
def both(tmp_path_factory):
    """A client of each: all layers with the shortest way among them, and the routes alone."""
    settings = [Settings(data=tmp_path_factory.mktemp(name)) for name in ("direct", "routes")]
    apps = [surrounded(create_api(settings[0]), settings[0]), create_api(settings[1])]
    with ExitStack() as stack:
        clients = []
        for app in apps:  # one after the other: warnings are filtered for a whole process
            url = stack.enter_context(running(app))
            clients.append(stack.enter_context(httpx2.Client(base_url=url, timeout=20)))
            furnish(clients[-1])
        yield clients


def told(answer):
    """What an answer says, but for what no two answers share."""
    body = answer.json()
    for changing in ("request_id", "instance"):
        body.pop(changing, None)
    headers = {n: answer.headers.get(n) for n in ("content-type", "allow", "vary", "accept")}
    return answer.status_code, headers, body


@pytest.mark.parametrize(("path", "sent"), [
    (ESTIMATES, {"json": ASKED}),
    (ESTIMATES, {"json": {"readings": []}}),
    (ESTIMATES, {"content": b"{", "headers": {"content-type": "application/json"}}),
    (READINGS, {"json": {"readings": [reading(0)]}}),
    (READINGS, {"json": {"readings": [reading(0), {"probe": "p1"}]}}),
    (READINGS, {"json": {"readings": [reading(5)]}, "params": {"probe": "p1"}}),
    (READINGS, {"content": b'{"time":"2026-05-04T00:10:00Z","probe":"p1","temperature":14}\n',
                "headers": NDJSON}),
    (READINGS, {"content": b"x", "headers": {"content-type": "text/plain"}}),
    (READINGS, {"json": {"readings": []}, "headers": {"accept": "text/html"}}),
    ("/v1/stations/nowhere/readings", {"json": {"readings": [reading(0)]}}),
    ("/v1/stations/-north/readings", {"json": {"readings": [reading(0)]}}),
    ("/v1/stations/north%201/readings", {"json": {"readings": [reading(0)]}}),
    ("/v1/stations/north-1%0A/readings", {"json": {"readings": [reading(0)]}}),
    ("/v1/stations/north-1/readings/", {"json": {"readings": [reading(0)]}}),
], ids=str)  # fmt: skip
def test_both_ways_give_one_answer(both, path, sent):
    direct, routes = (told(client.post(path, **sent)) for client in both)
    assert direct == routes


@pytest.mark.parametrize("method", ["PUT", "DELETE", "PATCH"])
@pytest.mark.parametrize("path", [ESTIMATES, READINGS])
def test_other_methods_go_to_the_routes(both, method, path):
    direct, routes = (told(client.request(method, path)) for client in both)
    assert direct == routes
    assert direct[0] == 405


def test_requests_are_counted_by_the_template_of_their_route(both):
    direct, _ = both
    direct.post(READINGS, json={"readings": [reading(30)]})
    counted = direct.get("/metrics").text
    assert 'route="/v1/stations/{name}/readings"' in counted
    assert "north-1" not in counted
