"""The command `gleyline store`: check, upgrade, export and back up what is kept."""

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import IO, Any

import click
import orjson

from service.settings import SettingsError, read_settings, variable
from service.store.append import told
from service.store.base import SqlStore
from service.store.errors import StoreError
from service.store.interface import COLUMNS, Span
from service.store.opening import open_store, store_of

PAGE = 20_000
"""Readings that are exported at a time."""


@click.group()
def store() -> None:
    """Check, upgrade, export and back up what the service keeps."""


def where(command: Callable[..., None]) -> Callable[..., None]:
    """Give a command the options that name the store."""
    for name, metavar, told_as in (
        ("database_url", "TEXT", "postgresql://user@host/name, instead of the file"),
        ("data", "DIR", "folder of keys and data"),
    ):
        option = f"--{name.replace('_', '-')}"
        text = f"{told_as}  [{variable(name)}]"
        command = click.option(option, name, metavar=metavar, help=text)(command)
    return command


@contextmanager
def _opened(given: dict[str, Any], *, prepared: bool = True) -> Iterator[SqlStore]:
    """The store that the options name; what goes wrong with it ends the command with a sentence."""
    try:
        settings = read_settings(**{name: text for name, text in given.items() if text is not None})
        opened = open_store(settings) if prepared else store_of(settings)
        try:
            yield opened
        finally:
            opened.close()
    except SettingsError as error:
        raise click.ClickException(str(error)) from None
    except StoreError as error:
        raise click.ClickException(error.told()) from None


@store.command()
@where
def check(**given: str | None) -> None:
    """Say whether the store is whole; ends with 1 where it is not."""
    with _opened(given) as opened:
        faults = list(opened.check())
        head = opened.head()
        series = len(opened.channels())
    for fault in faults:
        click.echo(fault)
    click.echo(f"revision {head.revision}, {series} series, {len(faults)} faults", err=True)
    if faults:
        sys.exit(1)


@store.command()
@where
def upgrade(**given: str | None) -> None:
    """Bring the tables to the version of this service; make a backup before."""
    with _opened(given, prepared=False) as opened:
        before, after = opened.upgrade()
    same = f"the tables are of version {after} already"
    click.echo(same if before == after else f"the tables went from version {before} to {after}")


@store.command()
@click.argument("file", type=click.Path(dir_okay=False, path_type=Path))
@where
def backup(file: Path, **given: str | None) -> None:
    """Copy the whole store to FILE while it is in use: a SQLite file, or a dump of PostgreSQL."""
    with _opened(given) as opened:
        opened.backup(file)


@store.command()
@click.option("-o", "--output", type=click.File("wb", lazy=True), default="-",
              help="file to write; standard output where left out")  # fmt: skip
@where
def export(output: IO[bytes], **given: str | None) -> None:
    """Write everything as NDJSON: changes of documents, then readings, then conflicts.

    Times are microseconds since 1970; numbers are in the units of the API.
    """
    with _opened(given) as opened:
        for line in exported(opened):
            output.write(orjson.dumps(line) + b"\n")


def exported(opened: SqlStore) -> Iterator[dict[str, Any]]:
    """Everything that is kept, up to one revision, oldest documents first."""
    head = opened.head()
    for d in opened.documents(upto=head.revision):
        yield {"document": {name: getattr(d, name) for name in d.__slots__}}
    for channel in opened.channels():
        after = None
        while True:
            span = Span([channel], COLUMNS, after=after, upto=head.revision, limit=PAGE)
            rows = opened.readings(span)
            for row in rows:
                key = {"station": channel.station, "place": channel.place, "time": row[1]}
                yield {"reading": {**key, "revision": row[2], **told(row[3:])}}
            if len(rows) < PAGE:
                break
            after = (rows[-1][0], rows[-1][1])
    for station in sorted({channel.station for channel in opened.channels()}):
        for contradiction in opened.conflicts(station, 2**31 - 1):
            yield {"conflict": {"station": station, **contradiction}}
