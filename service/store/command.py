"""The command `gleyline store`: check, upgrade, export and back up what is kept."""

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import IO, Any

import click
import orjson

from service.settings import SettingsError, read_settings, variable
from service.store.base import SqlStore
from service.store.errors import StoreError
from service.store.opening import missing_file, open_store, store_of
from service.store.transfer.exporting import exported


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
def _opened(
    given: dict[str, Any], *, prepared: bool = True, existing: bool = False
) -> Iterator[SqlStore]:
    """The store that the options name; what goes wrong with it ends the command with a sentence.

    existing: none is made where there is none.
    """
    try:
        settings = read_settings(**{name: text for name, text in given.items() if text is not None})
        absent = missing_file(settings) if existing else None
        if absent is not None:
            raise click.ClickException(
                f"there is no store in {absent.parent}: name the folder of one with --data"
            )
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
    """Say whether the store is whole; ends with 1 where it is not, or where there is none."""
    with _opened(given, existing=True) as opened:
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
    """Copy the whole store to FILE while it is in use: a SQLite file, or a dump of PostgreSQL.

    A SQLite copy is put in place of the file of a service that is stopped. A dump is put back into
    an empty database by PostgreSQL's own tool: pg_restore --no-owner --dbname=URL FILE. Where
    there is no pg_dump of the server's version, export does the same.
    """
    with _opened(given, existing=True) as opened:
        opened.backup(file)


@store.command()
@click.option("-o", "--output", type=click.File("wb", lazy=True), default="-",
              help="file to write; standard output where left out")  # fmt: skip
@where
def export(output: IO[bytes], **given: str | None) -> None:
    """Write everything as NDJSON, of either database, while it is in use; import takes it back.

    Changes of documents, then series with their readings (those that were completed followed by
    what they were before), then conflicts. Times are microseconds since 1970; numbers are in the
    unit of the API.
    """
    with _opened(given, existing=True) as opened:
        for line in exported(opened):
            output.write(orjson.dumps(line) + b"\n")


@store.command("import")
@click.argument("file", type=click.File("rb"))
@where
def import_(file: IO[bytes], **given: str | None) -> None:
    """Put the export in FILE into an empty store of either database; - reads standard input.

    Every revision stays what it was, so that questions as of a revision have the same answers.
    """
    with _opened(given) as opened:
        reached = opened.restore(file)
    click.echo(f"the store is at revision {reached}", err=True)
