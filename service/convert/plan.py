"""Which files are converted to which, and which of them were finished before."""

import json
from collections.abc import Iterable, Iterator, Mapping, Sequence
from pathlib import Path
from types import MappingProxyType
from typing import Any

from service.convert.job import Job, Refused, Wish
from service.formats import FORMATS

STREAM = "-"
"""Standard input or output."""
LEDGER = ".gleyline-convert.json"
"""The file of a folder of answers that says of what they are answers."""

SUFFIXES: Mapping[str, str] = MappingProxyType({f.suffix: key for key, f in FORMATS.items()})


def plan(
    sources: Sequence[str], output: str | None, read: str | None, written: str | None
) -> list[Job]:
    """The jobs of a command, in order.

    sources: files, folders or "-". output: a file, a folder (for several files), "-" or None.
    read, written: formats, where names of files should not decide.
    Raises Refused.
    """
    if not into_folder(sources):
        return [_single(sources[0], output, read, written)]
    if output in {None, STREAM} or Path(str(output)).is_file():
        raise Refused("several files need a folder for their answers: name it with -o")
    folder = Path(str(output))
    jobs = [
        Job(path, folder / _renamed(name, written), _form(path, read), written or _form(path, read))
        for path, name in _files(sources, folder, read)
    ]
    taken: dict[Path, Path | None] = {}
    for job in jobs:
        target = job.target or folder
        if target in taken:
            raise Refused(f"{taken[target]} and {job.source} would both become {target}")
        taken[target] = job.source
    return jobs


def into_folder(sources: Sequence[str]) -> bool:
    """Whether the answers go to a folder."""
    return len(sources) > 1 or (sources[0] != STREAM and Path(sources[0]).is_dir())


class Ledger:
    """What a folder of answers holds answers to."""

    def __init__(self, folder: Path, wish: Wish) -> None:
        self._path, self._wish = folder / LEDGER, wish.digest()
        self._known: dict[str, Any] = {}
        if self._path.is_file():
            try:
                self._known = dict(json.loads(self._path.read_text("utf-8")))
            except ValueError:
                self._known = {}

    def finished(self, job: Job) -> bool:
        """Whether this file was answered as it is now, in the same way."""
        if job.target is None or not job.target.is_file():
            return False
        return bool(self._known.get(str(job.target)) == self._entry(job))

    def note(self, job: Job) -> None:
        """Remember that a file is finished."""
        self._known[str(job.target)] = self._entry(job)
        beside = self._path.with_name(f"{LEDGER}.part")
        beside.write_text(json.dumps(self._known, indent=1), "utf-8")
        beside.replace(self._path)

    def _entry(self, job: Job) -> dict[str, Any]:
        assert job.source is not None  # noqa: S101 - folders are never standard input
        state = job.source.stat()
        return {
            "source": str(job.source.resolve()),
            "bytes": state.st_size,
            "modified": state.st_mtime_ns,
            "wish": f"{self._wish} {job.read} {job.written}",
        }


def _single(source: str, output: str | None, read: str | None, written: str | None) -> Job:
    path = None if source == STREAM else Path(source)
    target = None if output in {None, STREAM} else Path(str(output))
    if target is not None and target.is_dir():
        target = target / _renamed(Path("stdin.csv" if path is None else path.name), written)
    form = _form(path, read) if path else read or "csv"
    named = SUFFIXES.get(target.suffix.lower()) if target else None
    return Job(path, target, form, written or named or form)


def _files(sources: Iterable[str], folder: Path, read: str | None) -> Iterator[tuple[Path, Path]]:
    """Every file, and its name among the answers; answers of before are no tables to answer."""
    for source in sources:
        path = Path(source)
        if source == STREAM:
            raise Refused("standard input cannot be one of several files")
        if not path.is_dir():
            yield path, Path(path.name)
            continue
        for inner in sorted(path.rglob("*")):
            known = inner.suffix.lower() in SUFFIXES or (read and inner.suffix)
            own = folder.resolve() in inner.resolve().parents
            if inner.is_file() and known and not own and not inner.name.startswith("."):
                yield inner, inner.relative_to(path)


def _form(path: Path, read: str | None) -> str:
    form = read or SUFFIXES.get(path.suffix.lower())
    if form is None:
        raise Refused(f"{path.name}: expected a name that ends in {', '.join(SUFFIXES)}, or --read")
    return form


def _renamed(name: Path, written: str | None) -> Path:
    return name.with_suffix(FORMATS[written].suffix) if written else name
