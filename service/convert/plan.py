"""Which files are converted to which, and which are passed over."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from types import MappingProxyType

from service.convert.job import Job, Refused
from service.formats import FORMATS

STREAM = "-"
"""Standard input or output."""
COMPRESSED = ".gz"
"""Behind the ending of a table of text: compressed by gzip."""

SUFFIXES: Mapping[str, str] = MappingProxyType(
    {f.suffix: key for key, f in FORMATS.items()} | {".arrow": "arrow"}
)
TEXT = ("csv", "ndjson")
EXPECTED = (
    f"a name that ends in {', '.join(SUFFIXES)}, "
    f"{' or '.join(FORMATS[key].suffix + COMPRESSED for key in TEXT)}"
)


@dataclass(frozen=True, slots=True)
class Plan:
    """The jobs of a command, in order."""

    jobs: list[Job] = field(default_factory=list)
    skipped: list[str] = field(default_factory=list)
    """Files of a folder that are no jobs, each with the reason."""


def plan(sources: Sequence[str], output: str | None, read: str | None, written: str | None) -> Plan:
    """What a command is to do.

    sources: files, folders or "-". output: a file, a folder (for several files), "-" or None.
    read, written: formats, where names of files should not decide.
    Raises Refused.
    """
    if not into_folder(sources):
        made = Plan([_single(sources[0], output, read, written)])
    else:
        if output in {None, STREAM} or Path(str(output)).is_file():
            raise Refused("several files need a folder for their answers: name it with -o")
        made = _of_several(sources, Path(str(output)), read, written)
    _refuse_collisions(made.jobs)
    return made


def into_folder(sources: Sequence[str]) -> bool:
    """Whether the answers go to a folder."""
    return len(sources) > 1 or (sources[0] != STREAM and Path(sources[0]).is_dir())


def _of_several(
    sources: Sequence[str], folder: Path, read: str | None, written: str | None
) -> Plan:
    """The tables in folders and beside them; answers of before, within a folder, are none."""
    made = Plan()
    for source in sources:
        path = Path(source)
        if source == STREAM:
            raise Refused("standard input cannot be one of several files")
        if not path.is_dir():
            made.jobs.append(_job(path, Path(path.name), folder, read, written))
            continue
        if path.resolve() == folder.resolve():
            raise Refused(f"{path} cannot hold tables and their answers: name another folder "
                          "with -o")  # fmt: skip
        own = folder.resolve() if path.resolve() in folder.resolve().parents else None
        for inner in sorted(path.rglob("*")):
            name = inner.relative_to(path)
            answer = own is not None and own in inner.resolve().parents
            if not inner.is_file() or answer or name.name.startswith("."):
                continue
            if _form(inner) or (read and inner.suffix):
                made.jobs.append(_job(inner, name, folder, read, written))
            else:
                made.skipped.append(f"{inner}: expected {EXPECTED}")
    return made


def _job(path: Path, name: Path, folder: Path, read: str | None, written: str | None) -> Job:
    form = _form_of(path, read)
    return Job(path, folder / _renamed(name, written), form, written or form, _is_compressed(path))


def _single(source: str, output: str | None, read: str | None, written: str | None) -> Job:
    path = None if source == STREAM else Path(source)
    target = None if output in {None, STREAM} else Path(str(output))
    if target is not None and target.is_dir():
        target = target / _renamed(Path("stdin.csv" if path is None else path.name), written)
    form = _form_of(path, read) if path else read or "csv"
    named = _form(target) if target else None
    compressed = path is not None and _is_compressed(path)
    return Job(path, target, form, written or named or form, compressed)


def _refuse_collisions(jobs: Sequence[Job]) -> None:
    """Raise Refused where two answers would be one file, or an answer would be a table read."""
    sources = {_identity(job.source) for job in jobs if job.source is not None}
    taken: dict[Path, Path | None] = {}
    for job in jobs:
        if job.target is None:
            continue
        place = job.target.resolve()
        if place in taken:
            raise Refused(f"{taken[place]} and {job.source} would both become {job.target}")
        if place.exists() and _identity(place) in sources:
            raise Refused(
                f"the answer would be written over {job.target}, which is read: name another "
                "file or folder with -o"
            )
        if job.target.suffix.lower() == COMPRESSED:
            raise Refused(f"{job.target}: answers are not compressed: leave out {COMPRESSED}")
        taken[place] = job.source


def _identity(path: Path) -> tuple[int, int]:
    """The same for every name of a file."""
    state = path.stat()
    return state.st_dev, state.st_ino


def _is_compressed(path: Path) -> bool:
    return path.suffix.lower() == COMPRESSED


def _form(path: Path) -> str | None:
    """The format that a name says; only tables of text are read compressed."""
    if not _is_compressed(path):
        return SUFFIXES.get(path.suffix.lower())
    inner = SUFFIXES.get(Path(path.stem).suffix.lower())
    return inner if inner in TEXT else None


def _form_of(path: Path, read: str | None) -> str:
    form = read or _form(path)
    if form is None:
        raise Refused(f"{path.name}: expected {EXPECTED}, or --read")
    if form not in TEXT and _is_compressed(path):
        raise Refused(f"{path.name}: only {' and '.join(TEXT)} are read compressed: unpack it")
    return form


def _renamed(name: Path, written: str | None) -> Path:
    """The name of the answer to a file of this name."""
    if _is_compressed(name):
        name = name.with_suffix("")
    return name.with_suffix(FORMATS[written].suffix) if written else name
