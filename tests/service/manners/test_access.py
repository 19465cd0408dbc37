"""Keys: who may ask what, and how they are kept."""

import stat

import pytest

from service.access import keys_of, scope_needed
from service.settings import Settings, SettingsError
from service.store.keys import KeyFile, KeyFileError

OPEN = ["/", "/docs", "/livez", "/readyz", "/openapi.json", "/problems"]


@pytest.fixture
def keys(tmp_path):
    return KeyFile(tmp_path / "keys.json")


def bearer(secret):
    return {"Authorization": f"Bearer {secret}"}


def test_without_any_key_loopback_is_open(server):
    assert server.client.get("/v1/quantities").status_code == 200


def test_with_a_key_everything_under_v1_asks_for_it(keys, start):
    secret = keys.add("dashboard", ["read"])
    client = start().client
    for path in OPEN:
        assert client.get(path).status_code == 200
    for headers in (
        {},
        bearer("wrong"),
        {"Authorization": f"Basic {secret}"},
        {"Authorization": "Bearer"},
    ):
        answer = client.get("/v1/quantities", headers=headers)
        assert answer.status_code == 401
        assert answer.headers["www-authenticate"].startswith("Bearer")
        assert answer.headers["content-type"] == "application/problem+json"
    for headers in (bearer(secret), {"Authorization": f"bearer  {secret}"}):
        assert client.get("/v1/quantities", headers=headers).status_code == 200
    assert client.get("/v1/nope").status_code == 401


def test_a_key_in_the_query_is_not_read(keys, start):
    secret = keys.add("dashboard", ["read"])
    client = start().client
    for name in ("key", "api_key", "access_token"):
        assert client.get(f"/v1/quantities?{name}={secret}").status_code == 401


@pytest.mark.parametrize("log_format", ["text", "json"])
def test_a_key_is_never_logged_but_its_label_is(keys, start, log_format):
    secret = keys.add("dashboard", ["read"])
    service = start(log_format=log_format)
    service.client.get(f"/v1/quantities?key={secret}", headers=bearer(secret))
    service.client.get("/v1/quantities", headers={"Authorization": secret})
    service.stop()
    assert secret not in service.log.read_text()
    assert "dashboard" in service.log.read_text()


def test_keys_change_without_a_restart(keys, start):
    client = start().client
    assert client.get("/v1/quantities").status_code == 200
    first = keys.add("first", ["read"])
    assert client.get("/v1/quantities").status_code == 401
    second = keys.add("second", ["read"])
    for secret in (first, second):
        assert client.get("/v1/quantities", headers=bearer(secret)).status_code == 200
    keys.revoke("first")
    assert client.get("/v1/quantities", headers=bearer(first)).status_code == 401
    assert client.get("/v1/quantities", headers=bearer(second)).status_code == 200
    keys.revoke("second")
    assert client.get("/v1/quantities").status_code == 401


def test_a_scope_that_is_lacking_is_403(keys, start):
    secret = keys.add("logger", ["write"])
    answer = start().client.get("/v1/quantities", headers=bearer(secret))
    assert answer.status_code == 403
    assert 'scope="read"' in answer.headers["www-authenticate"]


@pytest.mark.parametrize(
    ("method", "path", "expected"),
    [("GET", "/v1/quantities", "read"), ("HEAD", "/v1/quantities", "read"),
     ("POST", "/v1/estimates", "read"), ("POST", "/v1/anything-else", "write"),
     ("PUT", "/v1/estimates", "write"), ("DELETE", "/v1/quantities", "write")],
)  # fmt: skip
def test_what_changes_nothing_needs_read(method, path, expected):
    assert scope_needed(method, path) == expected


def test_the_file_is_private_and_holds_no_key(keys):
    secret = keys.add("dashboard", ["read", "write"])
    assert stat.S_IMODE(keys.path.stat().st_mode) == 0o600
    assert secret not in keys.path.read_text()
    assert secret.removeprefix("gley_") not in keys.path.read_text()
    (known,) = KeyFile(keys.path).all()
    assert (known.label, known.scopes) == ("dashboard", ("read", "write"))
    assert known.created.utcoffset() is not None
    assert len(list(keys.path.parent.iterdir())) == 1


def test_keys_are_different_and_long(keys):
    first, second = keys.add("first", ["read"]), keys.add("second", ["read"])
    assert first != second
    assert len(first) > 40
    assert keys.find(first).label == "first"
    assert keys.find(second).label == "second"
    assert keys.find("") is None


def test_a_label_is_used_once_at_a_time(keys):
    keys.add("logger", ["read"])
    with pytest.raises(KeyFileError, match="revoke it first"):
        keys.add("logger", ["read"])
    keys.revoke("logger")
    keys.add("logger", ["write"])
    assert [known.label for known in keys.active()] == ["logger"]
    assert len(keys.all()) == 2


@pytest.mark.parametrize("label", ["", " ", "a b", "a\nb", "x" * 65, "../x"])
def test_a_label_is_a_word(keys, label):
    with pytest.raises(KeyFileError):
        keys.add(label, ["read"])
    assert not keys.path.exists()


def test_revoking_what_is_not_there_says_what_is(keys):
    keys.add("logger", ["read"])
    with pytest.raises(KeyFileError, match="there are logger"):
        keys.revoke("loger")


def test_a_broken_file_lets_nobody_in(keys, start):
    secret = keys.add("logger", ["read"])
    service = start()
    keys.path.write_text("{broken")
    assert service.client.get("/v1/quantities", headers=bearer(secret)).status_code == 500
    assert service.client.get("/v1/quantities").status_code == 500
    assert service.client.get("/livez").status_code == 200


@pytest.mark.parametrize("host", ["127.0.0.1", "127.1.2.3", "::1", "localhost"])
def test_loopback_needs_no_key(host, tmp_path):
    assert keys_of(Settings(host=host, data=tmp_path)).all() == ()


@pytest.mark.parametrize("host", ["0.0.0.0", "::", "192.0.2.7", "soil.example"])  # noqa: S104
def test_any_other_host_needs_one(host, tmp_path, keys):
    settings = Settings(host=host, data=tmp_path)
    with pytest.raises(SettingsError, match="gleyline key add"):
        keys_of(settings)
    keys.add("logger", ["read"])
    assert keys_of(settings).active()
    keys.revoke("logger")
    with pytest.raises(SettingsError, match="gleyline key add"):
        keys_of(settings)


def test_a_key_that_reads_may_have_anything_worked_out(server):
    """What keeps nothing changes nothing: only readings of a station are written by POST."""
    paths = server.client.get("/openapi.json").json()["paths"]
    posted = {path for path, methods in paths.items() if "post" in methods}
    kept = {path for path in posted if path.startswith("/v1/stations/")}
    assert kept
    assert {path for path in posted if scope_needed("POST", path) == "write"} == kept
