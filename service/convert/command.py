"""`gleyline convert`: files and folders of tables, or standard input, from the command line."""

import os
import sys
from collections.abc import Callable, Iterator
from concurrent.futures import ThreadPoolExecutor
from itertools import chain
from pathlib import Path
from typing import Any, NoReturn

import click

from service.answers.columns import wanted_columns
from service.convert.job import Job, Outcome, Refused, Wish, run, stored_in, told
from service.convert.ledger import Ledger
from service.convert.plan import EXPECTED, Plan, into_folder, plan
from service.convert.processes import run_all
from service.convert.progress import Progress
from service.errors import Problem
from service.formats import FORMATS
from service.schemas.batch_query import PLACES, document_of, meaning
from service.schemas.query import settings_of
from service.settings import SettingsError
from service.stations.named import names_something, with_stored
from service.store.errors import StoreError

MOST_SKIPPED = 20
"""Files that were passed over that are named one by one."""
BAD_INPUT = 2
"""Exit code for what the caller can mend."""

Endings = Iterator[tuple[Job, Outcome | Refused]]


def one_option_per_word(command: Callable[..., None]) -> Callable[..., None]:
    """An option for every parameter of the batch query, under the same name."""
    for name in reversed(list(PLACES)):
        command = click.option(
            f"--{name.replace('_', '-')}",
            name,
            metavar="VALUE",
            hidden=name.endswith("_u"),
            help=meaning(name),
        )(command)
    return command


@click.command()
@click.argument("files", nargs=-1, required=True,
                type=click.Path(exists=True, allow_dash=True))  # fmt: skip
@click.option("-o", "--output", type=click.Path(allow_dash=True), metavar="OUT",
              help="file to write, or folder for the answers to several files; standard output "
              "where left out, or -")  # fmt: skip
@click.option("--format", "written", type=click.Choice(list(FORMATS)),
              help="of the answer; by the name of the output or input where left out")  # fmt: skip
@click.option("--read", type=click.Choice(list(FORMATS)),
              help="format of the input, where its name does not say; csv from -")  # fmt: skip
@click.option("--processes", type=click.IntRange(1, 256), metavar="N",
              help="how many files are worked on at a time; as many as there are processors where "
              "left out")  # fmt: skip
@click.option("--again", is_flag=True, help="answer files that were finished before, too")
@click.option("--overwrite", is_flag=True, help="write over files that are there and are no "
              "answers of an earlier command to this folder")  # fmt: skip
@click.option("--columns", metavar="NAMES", help=meaning("columns"))
@click.option("--parameter", "extra", multiple=True, metavar="NAME=VALUE",
              help="a parameter of the mixing model's own; may be given several times")  # fmt: skip
@click.option("--strict", is_flag=True, help="stop a file at the first cell that cannot be read")
@click.option("--data", type=click.Path(path_type=Path), metavar="DIR",
              help="folder of the store in which --soil and --probe are looked up")  # fmt: skip
@one_option_per_word
def convert(  # noqa: PLR0913, PLR0917 - click passes every option by name
    files: tuple[str, ...],
    output: str | None,
    written: str | None,
    read: str | None,
    processes: int | None,
    again: bool,  # noqa: FBT001
    overwrite: bool,  # noqa: FBT001
    columns: str | None,
    extra: tuple[str, ...],
    strict: bool,  # noqa: FBT001
    data: Path | None,
    **words: str | None,
) -> None:
    """Append water content and its band to every row of FILES: tables, folders of them, or -.

    Of folders, every table below is answered under the same name in the folder named with -o.
    Files that were finished there before, in the same way, are left alone, so that a command that
    was interrupted goes on where it was. Names may end in .csv, .ndjson, .arrows (or .arrow),
    .parquet, and .csv.gz or .ndjson.gz. No table is written over, and no other file unasked.

    Every option takes what the query of POST /v1/estimates takes; each also has a _u, such as
    --bulk-density-u, for its standard uncertainty.
    """
    pairs = [(name, text) for name, text in words.items() if text is not None]
    try:
        pairs += [_split(pair) for pair in extra]
        document = _described(document_of(pairs), data)
        settings_of(document)
        folder = None if data is None else str(data)
        wish = Wish(document, strict, wanted_columns(columns), folder)
        made = plan(files, output, read, written)
    except (Problem, Refused, SettingsError, StoreError) as refusal:
        _fail(told(refusal))
    if into_folder(files):
        _several(made, wish, Path(str(output)), processes, again=again, overwrite=overwrite)
        return
    (job,) = made.jobs
    if job.target is not None and job.target.exists() and not overwrite:
        _fail(_there(job))
    _told(_alone(job, wish), named=False)


def _described(document: dict[str, Any], data: Path | None) -> dict[str, Any]:
    """The request with stored soils and probes in place of their names."""
    if not names_something(document):
        return document
    return with_stored(document, stored_in(None if data is None else str(data)))


def _several(made: Plan, wish: Wish, folder: Path, processes: int | None, *, again: bool,
             overwrite: bool) -> None:  # fmt: skip
    for reason in made.skipped[:MOST_SKIPPED]:
        click.echo(f"skipped {reason}", err=True)
    if made.skipped[MOST_SKIPPED:]:
        click.echo(f"skipped {len(made.skipped) - MOST_SKIPPED} more files like these", err=True)
    if not made.jobs:
        _fail(f"found no table to convert: expected {EXPECTED}")
    folder.mkdir(parents=True, exist_ok=True)
    ledger = Ledger(folder, wish)
    due = [job for job in made.jobs if again or not ledger.finished(job)]
    if len(due) < len(made.jobs):
        done = len(made.jobs) - len(due)
        click.echo(f"{done} of {len(made.jobs)} files were finished before", err=True)
    free = [job for job in due if overwrite or ledger.holds(job)]
    taken = [job for job in due if not (overwrite or ledger.holds(job))]
    ledger.begin(free)
    progress = Progress(sum(job.size for job in free))
    count = min(processes or os.cpu_count() or 1, max(len(free), 1))
    endings = run_all(free, wish, count, progress) if free else iter(())
    refused: Endings = ((job, Refused(_there(job))) for job in taken)
    _told(chain(refused, _noted(endings, ledger, progress)), named=True)


def _there(job: Job) -> str:
    return f"{job.target} is there: name another place with -o, or write over it with --overwrite"


def _noted(endings: Endings, ledger: Ledger, progress: Progress) -> Endings:
    for job, outcome in endings:
        if isinstance(outcome, Outcome):
            ledger.note(job)
        progress.close()
        yield job, outcome


def _alone(job: Job, wish: Wish) -> Endings:
    """One file, read and written in one thread and estimated in another."""
    progress = Progress(job.size)
    with ThreadPoolExecutor(1) as beside:
        try:
            outcome: Outcome | Refused = run(job, wish, progress.add, beside)
        except Refused as refusal:
            outcome = refusal
    progress.close()
    yield job, outcome


def _told(endings: Endings, *, named: bool) -> None:
    """Say what became of each file; exit with BAD_INPUT where one was refused."""
    refused, said = False, set[str]()
    for job, outcome in endings:
        name = f"{job.source}: " if named else ""
        if isinstance(outcome, Refused):
            refused = True
            click.echo(f"gleyline convert: {name}{outcome}", err=True)
            continue
        for line in outcome.advice:
            if line not in said:
                click.echo(line, err=True)
        said.update(outcome.advice)
        counts = outcome.counts
        click.echo(f"{name}{counts.rows} rows, {counts.flagged} of them flagged", err=True)
    if refused:
        sys.exit(BAD_INPUT)


def _split(pair: str) -> tuple[str, str]:
    name, equals, text = pair.partition("=")
    if not equals:
        raise Refused(f"--parameter: expected NAME=VALUE, found {pair!r}")
    return name, text


def _fail(message: str) -> NoReturn:
    click.echo(f"gleyline convert: {message}", err=True)
    sys.exit(BAD_INPUT)
