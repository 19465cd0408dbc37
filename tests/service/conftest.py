"""Real servers on loopback: the command as it is started, and one that echoes bodies."""

import os
import re
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import ExitStack, contextmanager
from dataclasses import dataclass
from pathlib import Path

import httpx2
import pytest

from tests.service.echo import echo_app, running

ROOT = Path(__file__).parents[2]


@dataclass
class Service:
    """One running command."""

    base_url: str
    client: httpx2.Client
    process: subprocess.Popen[bytes]
    log: Path

    @property
    def address(self) -> tuple[str, int]:
        host, port = self.base_url.removeprefix("http://").split(":")
        return host, int(port)

    def stop(self) -> int:
        self.process.send_signal(signal.SIGTERM)
        return self.process.wait(20)


@contextmanager
def command(folder: Path, **options: object) -> Iterator[Service]:
    """gleyline serve on a free port, until the block ends."""
    log = folder / "log"
    settings = {"port": 0, "data": folder, **options}
    environment = {name: text for name, text in os.environ.items() if "GLEYLINE" not in name}
    environment |= {f"GLEYLINE_{name.upper()}": str(value) for name, value in settings.items()}
    with log.open("wb") as stderr:
        process = subprocess.Popen(
            [sys.executable, "-m", "service.cli", "serve"],
            cwd=ROOT,
            env=environment,
            stderr=stderr,
        )
    try:
        base_url = address_in(log, process)
        with httpx2.Client(base_url=base_url, timeout=20) as client:
            client.get("/readyz")
            yield Service(base_url, client, process, log)
    finally:
        process.kill()
        process.wait(20)


def address_in(log: Path, process: subprocess.Popen[bytes]) -> str:
    end = time.monotonic() + 20
    while time.monotonic() < end and process.poll() is None:
        if found := re.search(r"serves (http://[\d.]+:\d+)", log.read_text()):
            return found[1]
        time.sleep(0.02)
    raise AssertionError(log.read_text())


@pytest.fixture(scope="session")
def server(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Service]:
    """The service with default settings, started once."""
    with command(tmp_path_factory.mktemp("server")) as service:
        yield service


@pytest.fixture
def start(tmp_path: Path) -> Iterator[Callable[..., Service]]:
    """Start the service with other settings; it ends with the test."""
    with ExitStack() as stack:
        yield lambda **options: stack.enter_context(command(tmp_path, **options))


@pytest.fixture(scope="session")
def echo(tmp_path_factory: pytest.TempPathFactory) -> Iterator[httpx2.Client]:
    """A service with small limits whose POST routes answer with what arrived."""
    app = echo_app(tmp_path_factory.mktemp("echo"))
    with running(app) as base_url, httpx2.Client(base_url=base_url, timeout=20) as client:
        yield client
