"""One file on its way to its answer: what has to be known for it, in whatever process."""

import gzip
import hashlib
import json
import sys
import zlib
from collections.abc import Callable, Iterator, Mapping
from concurrent.futures import Executor
from contextlib import contextmanager, suppress
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import IO, Any, cast

from models.errors import ModelError
from service.answers.by_name import Grounds
from service.answers.columns import APPENDED
from service.batch import Conversion, Counts, convert_file
from service.batch_estimates import TableEstimates
from service.errors import Problem, Unprocessable, as_problem
from service.formats import FORMATS
from service.formats.errors import FormatError, SpoolFull
from service.schemas.problem import MOST_FAULTS
from service.schemas.query import settings_of
from service.schemas.wording import COMMAND, worded
from service.settings import SettingsError, read_settings
from service.stations.documents import Documents, Shelf
from service.store.errors import StoreError
from service.store.opening import open_store
from service.store.sqlite import FILE


class Refused(Exception):
    """A file or an option the caller can mend."""


@dataclass(frozen=True, slots=True)
class Wish:
    """How tables are to be answered: the same for all files of a command."""

    document: Mapping[str, Any]
    """As the JSON body of POST /v1/estimates, without readings."""
    strict: bool = False
    columns: tuple[str, ...] | None = None
    data: str | None = None
    """Folder of the store of soils and probes that rows may name; None: the usual one."""

    def digest(self) -> str:
        """The same for the same wishes."""
        text = json.dumps(asdict(self), sort_keys=True)
        return hashlib.sha256(text.encode()).hexdigest()[:16]


@dataclass(frozen=True, slots=True)
class Job:
    """One table and where its answer goes; None: standard input or output."""

    source: Path | None
    target: Path | None
    read: str
    written: str
    """Formats by their short names."""
    compressed: bool = False
    """Whether the source is compressed by gzip."""

    @property
    def size(self) -> int:
        """Bytes to be read; 0 where that is not known."""
        return 0 if self.source is None else self.source.stat().st_size


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of a file."""

    counts: Counts
    advice: tuple[str, ...]


def run(
    job: Job,
    wish: Wish,
    progress: Callable[[int], object] = lambda _: None,
    beside: Executor | None = None,
) -> Outcome:
    """Answer one table. Raises Refused.

    progress: called with the number of bytes that were read, after each piece.
    beside: where estimates are made while another part of the table is read and written.
    """
    try:
        settings = settings_of(wish.document)
        estimates = TableEstimates(
            settings, grounds=lambda columns: _grounds(wish, columns), wanted=wish.columns
        )
        conversion = Conversion(
            FORMATS[job.read].decoder(APPENDED),
            FORMATS[job.written].encoder(),
            estimates,
            strict=wish.strict,
            columns=wish.columns,
            beside=beside,
        )
        with _opened(job) as (source, read), _complete_or_absent(job.target) as target:
            counts = convert_file(source, target, conversion, lambda count: progress(read(count)))
    except (Problem, FormatError, ModelError, SpoolFull, SettingsError, StoreError) as error:
        raise Refused(told(error)) from None
    except (gzip.BadGzipFile, EOFError, zlib.error) as error:
        raise Refused(f"cannot be unpacked as gzip: {error}") from None
    advice = [f"{said.code}: {COMMAND.text(said.text)}" for said in estimates.advice]
    return Outcome(counts, (*advice, *(f"not-estimated: {text}" for text in estimates.troubles)))


def stored_in(data: str | None) -> Documents:
    """The soils and probes of a store. Raises SettingsError, StoreError."""
    settings = read_settings(**({} if data is None else {"data": data}))
    if not settings.database_url and not (settings.data / FILE).is_file():
        return Documents()
    store = open_store(settings)
    try:
        return Shelf(store).fresh()[1]
    finally:
        store.close()


def _grounds(wish: Wish, columns: tuple[str, ...]) -> Grounds:
    return Grounds(wish.document, stored_in(wish.data), columns)


def told(error: Exception) -> str:
    """What is wrong, in the words of the command."""
    if isinstance(error, FormatError):
        return COMMAND.text(str(error))
    problem = as_problem(error) if isinstance(error, ModelError) else error
    if not isinstance(problem, Unprocessable):
        return str(getattr(problem, "detail", problem))
    said = worded(problem, COMMAND)
    faults = [f"{fault.pointer}: {fault.detail}" for fault in said.errors[:MOST_FAULTS]]
    return "\n  ".join(faults) or str(said.detail)


@contextmanager
def _opened(job: Job) -> Iterator[tuple[IO[bytes], Callable[[int], int]]]:
    """The table, and how many bytes of its file so many bytes of it are."""
    if job.source is None:
        yield sys.stdin.buffer, lambda count: count
        return
    with job.source.open("rb") as file:
        if not job.compressed:
            yield file, lambda count: count
            return
        with gzip.GzipFile(fileobj=file) as unpacked:
            yield cast("IO[bytes]", unpacked), _steps(file)


def _steps(file: IO[bytes]) -> Callable[[int], int]:
    """How far a file was read since the last call."""
    before = 0

    def step(_: int) -> int:
        nonlocal before
        before, last = file.tell(), before
        return before - last

    return step


@contextmanager
def _complete_or_absent(path: Path | None) -> Iterator[IO[bytes]]:
    """A file beside the one that is meant, renamed once it is complete."""
    if path is None:
        yield sys.stdout.buffer
        sys.stdout.buffer.flush()
        return
    path.parent.mkdir(parents=True, exist_ok=True)
    beside = path.with_name(f"{path.name}.part")
    try:
        with beside.open("wb") as file:
            yield file
        beside.replace(path)
    except BaseException:
        with suppress(FileNotFoundError):
            beside.unlink()
        raise
