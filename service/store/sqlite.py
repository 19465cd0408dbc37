"""The default store: one SQLite file, durable at every commit, one writer at a time."""

import json
import sqlite3
from collections.abc import Iterator, Sequence
from contextlib import closing, suppress
from pathlib import Path
from typing import Any

from sqlalchemy import URL, Connection, create_engine, event, text

from service.store.base import SqlStore
from service.store.errors import StoreUnavailable
from service.store.interface import COLUMNS, Row
from service.store.schema import reading

FILE = "gleyline.sqlite"
PATIENCE = 30.0
"""Seconds to wait for another process that writes."""

_ALL = ", ".join(COLUMNS)
_KEPT = (
    f"SELECT time, revision, {_ALL} FROM reading "  # noqa: S608 - our own column names
    "WHERE channel = ? AND time IN (SELECT value FROM json_each(?))"
)


class SqliteStore(SqlStore):
    """See Store.

    In WAL mode readers never wait; synchronous=FULL flushes each commit before it is
    acknowledged. A transaction that will write says so when it begins: one that only finds out
    later cannot wait for its turn and fails at once.
    """

    def __init__(self, path: Path) -> None:
        self.path = path
        try:
            path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        except OSError as error:
            raise StoreUnavailable(f"the folder {path.parent} cannot be made: {error}") from None
        url = URL.create("sqlite", database=str(path))
        super().__init__(create_engine(url, connect_args={"timeout": PATIENCE}))
        event.listen(self.engine, "connect", _set_up)
        event.listen(self.engine, "begin", _begin)

    def close(self) -> None:
        """See Store."""
        with suppress(sqlite3.Error):  # another process may be reading: it will do it then
            self._outside("PRAGMA wal_checkpoint(TRUNCATE)")
        super().close()

    def _lock(self, connection: Connection) -> None:
        """A transaction that writes is alone from its beginning."""

    def _insert(self, connection: Connection, names: tuple[str, ...], rows: Sequence[Row]) -> int:
        statement = _INSERTS.get(names)
        if statement is None:
            columns = [reading.c[name] for name in ("channel", "time", "revision", *names)]
            insert = reading.insert().prefix_with("OR IGNORE")
            compiled = insert.compile(
                dialect=connection.dialect, column_keys=[column.name for column in columns]
            )
            statement = _INSERTS[names] = (str(compiled), _order(compiled, names))
        sql, order = statement
        if order is not None:
            rows = [tuple([row[place] for place in order]) for row in rows]
        return connection.exec_driver_sql(sql, rows).rowcount

    def _kept(self, connection: Connection, number: int, times: Sequence[int]) -> list[Row]:
        found = connection.exec_driver_sql(_KEPT, (number, json.dumps(list(times))))
        return list(map(tuple, found.fetchall()))

    def check(self) -> Iterator[str]:
        """See Store."""
        with self._transaction(write=False) as connection:
            for (line,) in connection.execute(text("PRAGMA integrity_check")):
                if line != "ok":
                    yield f"the file is damaged: {line}"

    def backup(self, target: Path) -> None:
        """See Store."""
        if target.exists():
            raise StoreUnavailable(f"{target} is there already; name a new file")
        try:
            self._outside("VACUUM INTO ?", str(target))
        except sqlite3.Error as error:
            raise StoreUnavailable(f"the copy cannot be made: {error}") from None

    def _outside(self, statement: str, *parameters: str) -> None:
        """What SQLite does outside of any transaction."""
        with closing(self.engine.raw_connection()) as connection:
            connection.cursor().execute(statement, parameters)


_INSERTS: dict[tuple[str, ...], tuple[str, list[int] | None]] = {}


def _order(compiled: Any, names: tuple[str, ...]) -> list[int] | None:
    """Where each bound value stands in a row; None: in the order of the row."""
    row = ("channel", "time", "revision", *names)
    bound = list(compiled.positiontup)
    return None if bound == list(row) else [row.index(name) for name in bound]


def _set_up(connection: sqlite3.Connection, _: object) -> None:
    connection.isolation_level = None  # transactions begin where we say so
    for pragma in ("journal_mode = WAL", "synchronous = FULL", "foreign_keys = ON"):
        connection.execute(f"PRAGMA {pragma}")


def _begin(connection: Connection) -> None:
    write = connection.get_execution_options().get("write", False)
    connection.exec_driver_sql("BEGIN IMMEDIATE" if write else "BEGIN")
