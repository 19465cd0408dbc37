"""The command: starting, refusing to start, stopping, keys."""

import json
import os
import signal
import socket
import subprocess
import sys
import time
import tomllib

import httpx2
import pytest

from service import __version__
from service.settings import Settings, misspelt, read_settings
from tests.service.conftest import ROOT


def gleyline(*arguments, **variables):
    environment = {name: text for name, text in os.environ.items() if "GLEYLINE" not in name}
    return subprocess.run(
        [sys.executable, "-m", "service.cli", *arguments],
        capture_output=True,
        text=True,
        cwd=ROOT,
        env=environment | variables,
        timeout=20,
        check=False,
    )


def test_it_serves_and_says_where_in_one_line(start):
    service = start()
    (line,) = [line for line in service.log.read_text().splitlines() if " GET " not in line]
    assert line.endswith(f"gleyline {__version__} serves {service.base_url}")


def test_a_port_that_is_taken_ends_it_with_a_reason(tmp_path):
    with socket.create_server(("127.0.0.1", 0)) as taken:
        port = str(taken.getsockname()[1])
        ended = gleyline("serve", "--port", port, "--data", str(tmp_path))
    assert ended.returncode != 0
    assert f"port {port}; another program has it" in ended.stderr
    assert "Traceback" not in ended.stderr


def test_a_host_that_others_can_reach_ends_it_without_a_key(tmp_path):
    ended = gleyline("serve", "--host", "0.0.0.0", "--data", str(tmp_path))  # noqa: S104
    assert ended.returncode != 0
    assert f"gleyline key add LABEL --data {tmp_path}" in ended.stderr


@pytest.mark.parametrize(
    ("name", "text"),
    [("PORT", "abc"), ("PORT", "70000"), ("JSON_BODY_BYTES", "4 MB"), ("LOG_FORMAT", "xml"),
     ("WORKERS", "0"), ("BODY_STALL_SECONDS", "-1"), ("HOST", "")],
)  # fmt: skip
def test_a_bad_value_ends_it_and_names_the_variable(name, text):
    ended = gleyline("serve", **{f"GLEYLINE_{name}": text})
    assert ended.returncode != 0
    assert f"GLEYLINE_{name}" in ended.stderr
    assert "Traceback" not in ended.stderr


def test_options_beat_variables(monkeypatch):
    monkeypatch.setenv("GLEYLINE_PORT", "9000")
    monkeypatch.setenv("GLEYLINE_WORKERS", "2")
    settings = read_settings(port="9001")
    assert (settings.port, settings.workers) == (9001, 2)


def test_settings_pass_through_the_environment_unchanged(monkeypatch, tmp_path):
    settings = Settings(port=1, data=tmp_path, body_stall_seconds=1.5, log_format="json")
    for name, text in settings.as_environment().items():
        monkeypatch.setenv(name, text)
    assert Settings() == settings


def test_every_setting_is_described_and_offered_as_an_option():
    shown = gleyline("serve", "--help").stdout
    for name, setting in Settings.model_fields.items():
        assert setting.description
        assert f"--{name.replace('_', '-')} " in shown


def test_a_misspelt_variable_is_a_warning_that_names_the_right_one(start):
    (sentence,) = misspelt({"GLEYLINE_PROT": "1", "GLEYLINE_PORT": "1", "PATH": ""})
    assert sentence.endswith("did you mean GLEYLINE_PORT?")
    assert "GLEYLINE_JSON_BODY_BYTE " in start(json_body_byte=3).log.read_text()


def test_in_json_every_line_of_the_log_is_json(start):
    service = start(log_format="json", prot=3)
    service.client.get("/nope?secret=1", headers={"X-Request-Id": "find-me"})
    service.client.get("/v1/a%0ab")
    service.stop()
    lines = [json.loads(line) for line in service.log.read_text().splitlines()]
    assert [line["level"] for line in lines][:2] == ["warning", "info"]
    (asked,) = [line for line in lines if line.get("request_id") == "find-me"]
    assert (asked["method"], asked["path"], asked["status"]) == ("GET", "/nope", 404)
    assert "secret" not in service.log.read_text()


def test_a_line_break_in_an_address_breaks_no_line_of_the_log(start):
    service = start()
    service.client.get("/v1/x%0a2026 error forged")
    service.stop()
    assert not any(line.startswith("2026 error") for line in service.log.read_text().splitlines())


def test_it_stops_cleanly(start):
    service = start()
    assert service.stop() in {0, -signal.SIGTERM, 128 + signal.SIGTERM}
    assert "Traceback" not in service.log.read_text()


def test_while_draining_it_says_so_and_goes_on_answering(start):
    service = start(drain_seconds=1)
    service.process.send_signal(signal.SIGTERM)
    time.sleep(0.3)
    with httpx2.Client(base_url=service.base_url) as newcomer:
        answer = newcomer.get("/readyz")
        assert answer.status_code == 503
        assert int(answer.headers["retry-after"]) > 0
        assert answer.headers["content-type"] == "application/problem+json"
        assert newcomer.get("/v1/quantities").status_code == 200
    assert service.process.wait(5) in {0, -signal.SIGTERM}
    with pytest.raises(httpx2.ConnectError):
        httpx2.get(service.base_url)


def test_a_second_signal_stops_it_at_once(start):
    service = start(drain_seconds=60)
    service.process.send_signal(signal.SIGTERM)
    time.sleep(0.3)
    service.process.send_signal(signal.SIGTERM)
    service.process.wait(5)


def test_a_request_under_way_is_answered_before_the_end(start):
    service = start(drain_seconds=0.2)
    with socket.create_connection(service.address, timeout=5) as connection:
        connection.sendall(b"POST /v1/quantities HTTP/1.1\r\nHost: x\r\nContent-Length: 2\r\n\r\n1")
        time.sleep(0.2)
        service.process.send_signal(signal.SIGTERM)
        connection.sendall(b"2")
        assert connection.recv(65536).startswith(b"HTTP/1.1 405")


def test_several_processes_share_one_port(start):
    service = start(workers=2)
    assert all(service.client.get("/livez").status_code == 200 for _ in range(5))
    assert service.log.read_text().count("serves") == 1
    assert service.stop() in {0, -signal.SIGTERM}


def test_keys_are_made_listed_and_revoked(tmp_path):
    made = gleyline("key", "add", "logger", "--scope", "write", "--data", str(tmp_path))
    secret = made.stdout.strip()
    assert secret.startswith("gley_")
    listed = gleyline("key", "list", GLEYLINE_DATA=str(tmp_path)).stdout
    assert "logger\twrite\t" in listed
    assert "active" in listed
    assert secret not in listed
    assert gleyline("key", "revoke", "logger", "--data", str(tmp_path)).returncode == 0
    assert "revoked" in gleyline("key", "list", "--data", str(tmp_path)).stdout
    again = gleyline("key", "revoke", "logger", "--data", str(tmp_path))
    assert again.returncode != 0
    assert "no key is called logger" in again.stderr


def test_the_version_is_the_one_that_is_packaged():
    assert gleyline("--version").stdout == f"gleyline, version {__version__}\n"
    project = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))["project"]
    assert project.get("version", __version__) == __version__
