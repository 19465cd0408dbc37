"""One file on its way to its answer: what has to be known for it, in whatever process."""

import hashlib
import json
import sys
from collections.abc import Callable, Iterator, Mapping
from concurrent.futures import Executor
from contextlib import contextmanager, suppress
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import IO, Any

from models.errors import ModelError
from service.answers.by_name import Grounds
from service.batch import Conversion, Counts, convert_file
from service.batch_estimates import APPENDED, TableEstimates
from service.errors import Problem
from service.formats import FORMATS
from service.formats.errors import FormatError, SpoolFull
from service.schemas.query import settings_of
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
        with _opened(job.source) as source, _complete_or_absent(job.target) as target:
            counts = convert_file(source, target, conversion, progress)
    except Problem as problem:
        faults = "".join(f"\n  {fault.pointer}: {fault.detail}" for fault in problem.errors)
        raise Refused(f"{problem.detail}{faults}") from None
    except (FormatError, ModelError, SpoolFull, SettingsError, StoreError) as error:
        raise Refused(str(error)) from None
    advice = [f"{said.code}: {said.text}" for said in estimates.advice]
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


@contextmanager
def _opened(path: Path | None) -> Iterator[IO[bytes]]:
    if path is None:
        yield sys.stdin.buffer
        return
    with path.open("rb") as file:
        yield file


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
