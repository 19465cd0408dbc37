"""The tables, and the numbered steps that lead to them on either database.

The steps are SQL by hand: what differs between the two databases (STRICT tables kept in the
order of their key here, partitions by month there) is just what a generator would not write.
A step that has been released is never changed; a new one is added behind it.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType

from sqlalchemy import (
    BigInteger,
    Column,
    Connection,
    Float,
    Integer,
    LargeBinary,
    MetaData,
    Table,
    Text,
    inspect,
    text,
)

from service.store.errors import SchemaError
from service.store.interface import RAW, VALUES

metadata = MetaData()
_big = BigInteger

store = Table(
    "store", metadata, Column("id", Integer), Column("schema_version", Integer),
    Column("revision", _big), Column("documents", _big),
)  # fmt: skip
document = Table(
    "document", metadata, Column("revision", _big), Column("kind", Text), Column("name", Text),
    Column("changed", _big), Column("author", Text), Column("body", Text),
)  # fmt: skip
channel = Table(
    "channel", metadata, Column("id", _big), Column("station", Text), Column("place", Text),
    Column("held", Text),
)  # fmt: skip
reading = Table(
    "reading", metadata, Column("channel", _big), Column("time", _big), Column("revision", _big),
    *(Column(name, Float) for name in VALUES), Column(RAW, LargeBinary),
)  # fmt: skip
earlier = Table(
    "earlier",
    metadata,
    *(Column(c.name, c.type) for c in reading.columns),
    Column("until", _big),
)
"""Readings as they were before they were completed: known from ``revision`` to before ``until``."""
conflict = Table(
    "conflict", metadata, Column("channel", _big), Column("time", _big), Column("digest", Text),
    Column("revision", _big), Column("received", _big), Column("sent", Text),
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class Step:
    """What makes version n of the tables from version n - 1, by dialect."""

    sqlite: Sequence[str]
    postgresql: Sequence[str]

    def on(self, dialect: str) -> Sequence[str]:
        """The statements for a database."""
        return self.sqlite if dialect == "sqlite" else self.postgresql


_VALUES = (
    "depth", "apparent_permittivity", "real_permittivity", "imaginary_permittivity", "frequency",
    "travel_time", "temperature", "bulk_conductivity", "apparent_permittivity_u",
    "real_permittivity_u", "imaginary_permittivity_u", "travel_time_u", "temperature_u",
    "bulk_conductivity_u", "frequency_u",
)  # fmt: skip

_TABLES = """
CREATE TABLE store (id {int} PRIMARY KEY CHECK (id = 1), schema_version {int} NOT NULL,
    revision {int} NOT NULL, documents {int} NOT NULL){strict};
CREATE TABLE document (revision {int} PRIMARY KEY, kind TEXT NOT NULL, name TEXT NOT NULL,
    changed {int} NOT NULL, author TEXT, body TEXT){strict};
CREATE INDEX document_by_name ON document (kind, name, revision);
CREATE TABLE channel (id {serial}, station TEXT NOT NULL, place TEXT NOT NULL,
    held TEXT NOT NULL, UNIQUE (station, place)){strict};
CREATE TABLE reading (channel {int} NOT NULL, time {int} NOT NULL, revision {int} NOT NULL,
    {values}, raw {blob}, PRIMARY KEY (channel, time)){kept};
CREATE TABLE conflict (channel {int} NOT NULL, time {int} NOT NULL, digest TEXT NOT NULL,
    revision {int} NOT NULL, received {int} NOT NULL, sent TEXT NOT NULL,
    PRIMARY KEY (channel, time, digest)){strict};
INSERT INTO store VALUES (1, 0, 0, 0)
"""
_WORDS: Mapping[str, Mapping[str, str]] = MappingProxyType({
    "sqlite": {
        "int": "INTEGER", "serial": "INTEGER PRIMARY KEY", "blob": "BLOB", "real": "REAL",
        "strict": " STRICT", "kept": " STRICT, WITHOUT ROWID",
    },
    "postgresql": {
        "int": "BIGINT", "serial": "BIGINT GENERATED ALWAYS AS IDENTITY PRIMARY KEY",
        "blob": "BYTEA", "real": "DOUBLE PRECISION", "strict": "",
        "kept": " PARTITION BY RANGE (time)",
    },
})  # fmt: skip


_EARLIER = """
CREATE TABLE earlier (channel {int} NOT NULL, time {int} NOT NULL, revision {int} NOT NULL,
    {values}, raw {blob}, until {int} NOT NULL, PRIMARY KEY (channel, time, revision)){strict}
"""


def _written(tables: str, dialect: str) -> list[str]:
    words = _WORDS[dialect]
    values = ", ".join(f"{name} {words['real']}" for name in _VALUES)
    return tables.format(values=values, **words).split(";")


STEPS: tuple[Step, ...] = tuple(
    Step(_written(tables, "sqlite"), _written(tables, "postgresql"))
    for tables in (_TABLES, _EARLIER)
)
"""Step n, counted from 1, makes version n."""


def version_of(connection: Connection) -> int:
    """The version of the tables; 0 where there are none."""
    if not inspect(connection).has_table(store.name):
        return 0
    return int(connection.execute(text("SELECT schema_version FROM store")).scalar_one())


def upgrade(connection: Connection, steps: Sequence[Step] = STEPS) -> tuple[int, int]:
    """Take the steps that are missing; the versions before and after.

    To be called in a transaction that no other changes the tables in.
    Raises SchemaError when the tables are newer.
    """
    before = version_of(connection)
    if before > len(steps):
        raise SchemaError(_newer(before, len(steps)))
    for step in steps[before:]:
        for statement in step.on(connection.dialect.name):
            connection.exec_driver_sql(statement)
    connection.execute(text("UPDATE store SET schema_version = :v"), {"v": len(steps)})
    return before, len(steps)


def refuse_version(found: int, steps: Sequence[Step] = STEPS) -> None:
    """Raise SchemaError unless the tables are of this version."""
    if found > len(steps):
        raise SchemaError(_newer(found, len(steps)))
    if found < len(steps):
        raise SchemaError(
            f"the store has version {found} of its tables, this service needs {len(steps)}: make "
            "a backup (gleyline store backup FILE), then run: gleyline store upgrade"
        )


def _newer(found: int, known: int) -> str:
    return (
        f"the store has version {found} of its tables, this service knows {known}: "
        "it was written by a newer gleyline; start that one"
    )
