"""Keys of stations: who may post where, who may change what, how often; nothing leaks."""

import pytest

from service.access import scope_needed
from service.store.keys import KeyFile, KeyFileError
from tests.service.conftest import command
from tests.service.manners.test_access import bearer
from tests.service.manners.test_cli import gleyline
from tests.service.stations.farm import put, reading


@pytest.fixture(scope="module")
def guarded(tmp_path_factory):
    """A service with a key of each kind, and two stations."""
    folder = tmp_path_factory.mktemp("guarded")
    keys = KeyFile(folder / "keys.json")
    secrets = {
        "manage": keys.add("office", ["read", "write", "manage"]),
        "read": keys.add("dashboard", ["read"]),
        "write": keys.add("logger", ["write"]),
        "north-1": keys.add("north", ["read", "write"], ["north-1"]),
    }
    with command(folder) as service:
        manager = bearer(secrets["manage"])
        put(service.client, "probe", "p1", {}, **manager)
        for name in ("north-1", "south-1"):
            assert put(service.client, "station", name, {}, **manager).status_code == 201
        yield service, secrets


@pytest.mark.parametrize(
    ("whose", "method", "path", "status"),
    [
        ("none", "POST", "/v1/stations/north-1/readings", 401),
        ("wrong", "POST", "/v1/stations/north-1/readings", 401),
        ("read", "POST", "/v1/stations/north-1/readings", 403),
        ("write", "POST", "/v1/stations/north-1/readings", 200),
        ("write", "GET", "/v1/stations/north-1/readings", 403),
        ("write", "PUT", "/v1/stations/north-1", 403),
        ("write", "DELETE", "/v1/soils/loam", 403),
        ("read", "GET", "/v1/changes", 403),
        ("manage", "GET", "/v1/changes", 200),
        ("manage", "PUT", "/v1/soils/loam", 201),
        ("north-1", "POST", "/v1/stations/north-1/readings", 200),
        ("north-1", "POST", "/v1/stations/south-1/readings", 403),
        ("north-1", "GET", "/v1/stations/south-1/estimates", 403),
        ("north-1", "GET", "/v1/stations/north-1/estimates", 200),
        ("north-1", "POST", "/v1/stations/north-1%2F..%2Fsouth-1/readings", 404),
        ("north-1", "GET", "/v1/mixing-models", 200),
        ("north-1", "PUT", "/v1/soils/loam", 403),
    ],
)
def test_a_key_reaches_as_far_as_it_was_made_for(guarded, whose, method, path, status):
    service, secrets = guarded
    headers = {} if whose == "none" else bearer(secrets.get(whose, "gley_wrong"))
    body = {"readings": [reading(0)]} if method == "POST" else {"texture": "loam"}
    sent = {"json": body} if method in {"POST", "PUT"} else {}
    answer = service.client.request(method, path, headers=headers, **sent)
    assert answer.status_code == status, answer.text
    if status in {401, 403}:
        assert answer.headers["content-type"] == "application/problem+json"
        assert answer.headers["www-authenticate"].startswith("Bearer")
    for secret in secrets.values():
        assert secret not in answer.text


def test_what_tells_of_all_stations_tells_a_key_of_its_own(guarded):
    service, secrets = guarded
    service.client.post("/v1/stations/south-1/readings", headers=bearer(secrets["manage"]),
                        json={"readings": [reading(0)]})  # fmt: skip
    for path, names in (
        ("/v1/stations", lambda a: {s["name"] for s in a["stations"]}),
        ("/v1/latest", lambda a: {r["station"] for r in a["latest"]}),
        ("/v1/stations.geojson", lambda a: {f["id"] for f in a["features"]}),
    ):
        own = service.client.get(path, headers=bearer(secrets["north-1"])).json()
        everything = service.client.get(path, headers=bearer(secrets["manage"])).json()
        assert names(own) <= {"north-1"}
        assert "south-1" in names(everything)


def test_changes_are_told_with_the_label_of_the_key(guarded):
    service, secrets = guarded
    changes = service.client.get("/v1/changes", headers=bearer(secrets["manage"])).json()
    assert {c["changed_by"] for c in changes["changes"]} == {"office"}
    for secret in secrets.values():
        assert secret not in service.log.read_text()


def test_keys_are_changed_while_loggers_post(guarded):
    service, _ = guarded
    keys = KeyFile(service.log.parent / "keys.json")
    old = keys.add("rotated-2026", ["write"], ["north-1"])
    new = keys.add("rotated-2027", ["write"], ["north-1"])
    sent = {"json": {"readings": [reading(0)]}}
    path = "/v1/stations/north-1/readings"
    for secret in (old, new):
        assert service.client.post(path, headers=bearer(secret), **sent).status_code == 200
    keys.revoke("rotated-2026")
    assert service.client.post(path, headers=bearer(old), **sent).status_code == 401
    assert service.client.post(path, headers=bearer(new), **sent).status_code == 200


def test_the_command_makes_a_key_of_a_station(tmp_path):
    made = gleyline("key", "add", "gate", "--scope", "write", "--station", "north-1",
                    "--data", str(tmp_path))  # fmt: skip
    (key,) = KeyFile(tmp_path / "keys.json").all()
    assert (made.returncode, key.scopes, key.stations) == (0, ("write",), ("north-1",))
    assert "north-1" in gleyline("key", "list", "--data", str(tmp_path)).stdout
    with pytest.raises(KeyFileError):
        KeyFile(tmp_path / "keys.json").add("gate-2", ["write"], ["../x"])


def test_a_key_asks_as_often_as_agreed(tmp_path):
    keys = KeyFile(tmp_path / "keys.json")
    first, second = (bearer(keys.add(label, ["read"])) for label in ("first", "second"))
    with command(tmp_path, requests_per_minute=3) as service:
        answers = [service.client.get("/v1/quantities", headers=first) for _ in range(4)]
        assert [a.status_code for a in answers] == [200, 200, 200, 429]
        assert [a.headers["ratelimit"].partition(";t=")[0] for a in answers] == [
            '"default";r=2', '"default";r=1', '"default";r=0', '"default";r=0',
        ]  # fmt: skip
        assert {a.headers["ratelimit-policy"] for a in answers} == {'"default";q=3;w=60'}
        assert 0 < int(answers[3].headers["retry-after"]) <= 20
        assert answers[3].json()["type"] == "/problems/too-many-requests"
        assert service.client.get("/v1/quantities", headers=second).status_code == 200
        assert service.client.get("/livez").status_code == 200


@pytest.mark.parametrize(
    ("method", "path", "expected"),
    [("POST", "/v1/stations/a/readings", "write"), ("PUT", "/v1/stations/a", "manage"),
     ("DELETE", "/v1/probes/a", "manage"), ("GET", "/v1/changes", "manage"),
     ("GET", "/v1/stations/a/readings", "read"), ("GET", "/v1/latest", "read")],
)  # fmt: skip
def test_the_scope_of_a_request(method, path, expected):
    assert scope_needed(method, path) == expected
