"""The command `gleyline convert`: the batch route without a server, same code, same numbers."""

import sys
from collections.abc import Callable
from contextlib import suppress
from pathlib import Path
from typing import IO, NoReturn

import click

from models.errors import ModelError
from service.batch import Conversion, Counts, convert_file
from service.batch_estimates import APPENDED, TableEstimates
from service.errors import Problem
from service.formats import FORMATS, Format
from service.formats.errors import FormatError, SpoolFull
from service.schemas.batch_query import PLACES, document_of, meaning
from service.schemas.query import settings_of

BAD_INPUT = 2
"""Exit code for what the caller can mend."""


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
@click.argument("file", type=click.Path(exists=True, dir_okay=False, path_type=Path))
@click.option("-o", "--output", type=click.Path(dir_okay=False, path_type=Path),
              help="file to write; standard output where left out")  # fmt: skip
@click.option("--format", "form", type=click.Choice(list(FORMATS)),
              help="of the answer; by the name of the output or input where left out")  # fmt: skip
@click.option("--parameter", "extra", multiple=True, metavar="NAME=VALUE",
              help="a parameter of the mixing model's own; may be given several times")  # fmt: skip
@click.option("--strict", is_flag=True, help="stop at the first cell that cannot be read")
@one_option_per_word
def convert(
    file: Path,
    output: Path | None,
    form: str | None,
    extra: tuple[str, ...],
    strict: bool,  # noqa: FBT001 - click passes it by name
    **words: str | None,
) -> None:
    """Append water content and its band to every row of FILE, a CSV or NDJSON table.

    Every option takes what the query of POST /v1/estimates takes; each also has a _u, such as
    --bulk-density-u, for its standard uncertainty.
    """
    pairs = [(name, text) for name, text in words.items() if text is not None]
    pairs += [_split(pair) for pair in extra]
    try:
        source, target = _formats(file, output, form)
        estimates = TableEstimates(settings_of(document_of(pairs)))
        conversion = Conversion(
            source.decoder(APPENDED), target.encoder(), estimates, strict=strict
        )
        counts = _run(file, output, conversion)
    except Problem as problem:
        faults = "".join(f"\n  {fault.pointer}: {fault.detail}" for fault in problem.errors)
        _fail(f"{problem.detail}{faults}")
    except (FormatError, ModelError, SpoolFull) as error:
        _fail(str(error))
    else:
        for said in estimates.advice:
            click.echo(f"{said.code}: {said.text}", err=True)
        click.echo(f"{counts.rows} rows, {counts.flagged} of them flagged", err=True)


def _run(file: Path, output: Path | None, conversion: Conversion) -> Counts:
    """Convert, with a bar on a terminal; a file is complete or not there at all."""
    with file.open("rb") as source:
        if output is None:
            return _with_bar(source, sys.stdout.buffer, file, conversion)
        beside = output.with_name(f"{output.name}.part")
        try:
            with beside.open("wb") as target:
                counts = _with_bar(source, target, file, conversion)
            beside.replace(output)
        except BaseException:
            with suppress(FileNotFoundError):
                beside.unlink()
            raise
    return counts


def _with_bar(source: IO[bytes], target: IO[bytes], file: Path, conversion: Conversion) -> Counts:
    if not sys.stderr.isatty():
        return convert_file(source, target, conversion)
    with click.progressbar(
        length=file.stat().st_size, label=file.name, file=sys.stderr, show_pos=True
    ) as bar:
        return convert_file(source, target, conversion, bar.update)


def _formats(file: Path, output: Path | None, form: str | None) -> tuple[Format, Format]:
    by_suffix = {format_.suffix: format_ for format_ in FORMATS.values()}
    if file.suffix.lower() not in by_suffix:
        _fail(f"{file.name}: expected a name that ends in {', '.join(by_suffix)}")
    source = by_suffix[file.suffix.lower()]
    if form is not None:
        return source, FORMATS[form]
    named = by_suffix.get(output.suffix.lower()) if output else None
    return source, named or source


def _split(pair: str) -> tuple[str, str]:
    name, equals, text = pair.partition("=")
    if not equals:
        _fail(f"--parameter: expected NAME=VALUE, found {pair!r}")
    return name, text


def _fail(message: str) -> NoReturn:
    click.echo(f"gleyline convert: {message}", err=True)
    sys.exit(BAD_INPUT)
