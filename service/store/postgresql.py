"""The store for many processes and machines: PostgreSQL, readings in partitions by month."""

import os
import subprocess
from collections.abc import Iterator, Sequence
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from sqlalchemy import URL, Connection, create_engine, make_url, select, text, true
from sqlalchemy.exc import ArgumentError

from service.store.asking import columns_of, known_at
from service.store.base import SqlStore
from service.store.errors import StoreUnavailable
from service.store.interface import COLUMNS, RAW, Row, Span
from service.store.schema import channel

COPY_FROM = 500
"""Rows from which on COPY into a table of its own is faster than arrays."""

_ALL = ", ".join(COLUMNS)
_KEPT = (
    f"SELECT time, revision, {_ALL} FROM reading "  # noqa: S608 - our own column names
    "WHERE channel = %s AND time = ANY(%s::bigint[])"
)
_TYPES = {"channel": "bigint", "time": "bigint", "revision": "bigint", RAW: "bytea"}
_MIGRATING = 7_401_985_210
"""The advisory lock of whoever changes the tables; the number means nothing."""


class PostgresqlStore(SqlStore):
    """See Store.

    Every transaction that writes updates the one row that counts revisions, so writers take
    turns, and whoever sees a revision sees all before it.
    """

    def __init__(self, url: str) -> None:
        try:
            parsed = make_url(url).set(drivername="postgresql+psycopg")
            engine = create_engine(parsed, pool_pre_ping=True)
        except (ArgumentError, ValueError):
            raise StoreUnavailable(
                "the database URL cannot be read; it looks like postgresql://user@host/name"
            ) from None
        except ModuleNotFoundError:
            raise StoreUnavailable(
                "PostgreSQL needs one more package: pip install 'gleyline[postgres]'"
            ) from None
        super().__init__(engine)
        self._months: set[tuple[int, int]] = set()

    def _lock(self, connection: Connection) -> None:
        connection.execute(text("SELECT pg_advisory_xact_lock(:n)"), {"n": _MIGRATING})

    def _insert(self, connection: Connection, names: tuple[str, ...], rows: Sequence[Row]) -> int:
        self._partition(connection, rows)
        columns = ("channel", "time", "revision", *names)
        listed = ", ".join(columns)
        into = f"INSERT INTO reading ({listed})"
        once = "ON CONFLICT (channel, time) DO NOTHING"
        if len(rows) < COPY_FROM:
            arrays = ", ".join(f"%s::{_TYPES.get(name, 'float8')}[]" for name in columns)
            statement = f"{into} SELECT * FROM unnest({arrays}) {once}"  # noqa: S608
            parameters = tuple(list(cells) for cells in zip(*rows, strict=True))
            return connection.exec_driver_sql(statement, parameters).rowcount
        connection.exec_driver_sql(
            f"CREATE TEMP TABLE arriving ON COMMIT DROP AS SELECT {listed} "  # noqa: S608
            "FROM reading WITH NO DATA"
        )
        driver: Any = connection.connection.driver_connection
        with (
            driver.cursor() as cursor,
            cursor.copy(f"COPY arriving ({listed}) FROM STDIN (FORMAT BINARY)") as copy,
        ):
            copy.set_types([_TYPES.get(name, "float8") for name in columns])
            for row in rows:
                copy.write_row(row)
        inserted = connection.exec_driver_sql(
            f"{into} SELECT {listed} FROM arriving {once}"  # noqa: S608
        ).rowcount
        connection.exec_driver_sql("DROP TABLE arriving")
        return inserted

    def _partition(self, connection: Connection, rows: Sequence[Row]) -> None:
        """Make the partitions these readings need; what another process made is left alone."""
        days = {row[1] // 86_400_000_000 for row in rows}
        months = {
            (d.year, d.month) for d in (datetime.fromtimestamp(n * 86_400, UTC) for n in days)
        }
        for year, month in sorted(months - self._months):
            start = datetime(year, month, 1, tzinfo=UTC)
            end = datetime(year + month // 12, month % 12 + 1, 1, tzinfo=UTC)
            low, high = (int(moment.timestamp()) * 1_000_000 for moment in (start, end))
            connection.exec_driver_sql(
                f"CREATE TABLE IF NOT EXISTS reading_{year}_{month:02} PARTITION OF reading "
                f"FOR VALUES FROM ({low}) TO ({high})"
            )
        self._months |= months

    def _kept(self, connection: Connection, number: int, times: Sequence[int]) -> list[Row]:
        found = connection.exec_driver_sql(_KEPT, (number, list(times)))
        return list(map(tuple, found.fetchall()))

    def newest(self, span: Span) -> list[Row]:
        """See Store: one step into the newest partition for each series, not a search for both."""
        numbers = [known.number for known in span.channels]
        with self._transaction(write=False) as connection:
            known = known_at(connection, span)
            last = select(*columns_of(span, known)).where(known.c.channel == channel.c.id)
            if span.end is not None:
                last = last.where(known.c.time < span.end)
            last = last.order_by(known.c.time.desc()).limit(1).correlate(channel)
            each = last.lateral("last")
            wanted = select(each).select_from(channel.join(each, true()))
            wanted = wanted.where(channel.c.id.in_(numbers)).order_by(each.c.channel)
            return list(map(tuple, connection.execute(wanted).fetchall()))

    def check(self) -> Iterator[str]:
        """See Store."""
        with self._transaction(write=False) as connection:
            (level,) = connection.execute(text("SHOW fsync")).one()
            if level != "on":
                yield "fsync is off on this database: what was acknowledged can be lost"
            (level,) = connection.execute(text("SHOW synchronous_commit")).one()
            if level == "off":
                yield "synchronous_commit is off: what was acknowledged can be lost"

    def backup(self, target: Path) -> None:
        """See Store: by pg_dump of the server's version, which must be installed."""
        if target.exists():
            raise StoreUnavailable(f"{target} is there already; name a new file")
        url = self.engine.url
        secret = {} if url.password is None else {"PGPASSWORD": str(url.password)}
        named = URL.create(
            "postgresql", url.username, None, url.host, url.port, url.database, url.query
        ).render_as_string()
        try:
            subprocess.run(  # noqa: S603
                ["pg_dump", "--format=custom", f"--file={target}", named],  # noqa: S607
                check=True, capture_output=True, env={**os.environ, **secret},
            )  # fmt: skip
        except FileNotFoundError:
            raise StoreUnavailable(f"pg_dump is not installed: {_OTHERWISE}") from None
        except subprocess.CalledProcessError as error:
            target.unlink(missing_ok=True)
            said = " ".join(error.stderr.decode(errors="replace").split())[-300:]
            raise StoreUnavailable(f"pg_dump failed ({said}): {_OTHERWISE}") from None


_OTHERWISE = (
    "install that of the server's version, or keep what gleyline store export writes, which "
    "gleyline store import takes back"
)
"""How else to make a copy."""
