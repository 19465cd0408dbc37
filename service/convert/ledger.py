"""What a folder of answers holds answers to, so that a command goes on where it was."""

import json
from collections.abc import Iterable
from pathlib import Path
from typing import Any

from service.convert.job import Job, Wish

NAME = ".gleyline-convert.json"
"""The file of a folder of answers that says of what they are answers."""


class Ledger:
    """The answers of one folder: which are complete, and which files are nobody else's."""

    def __init__(self, folder: Path, wish: Wish) -> None:
        self._folder, self._path, self._wish = folder, folder / NAME, wish.digest()
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
        return bool(self._known.get(self._key(job)) == self._entry(job))

    def holds(self, job: Job) -> bool:
        """Whether the answer's place is free, or holds an answer of an earlier command."""
        return job.target is None or not job.target.exists() or self._key(job) in self._known

    def begin(self, jobs: Iterable[Job]) -> None:
        """Remember which files are about to be written."""
        for job in jobs:
            self._known.setdefault(self._key(job), None)
        self._write()

    def note(self, job: Job) -> None:
        """Remember that a file is finished."""
        self._known[self._key(job)] = self._entry(job)
        self._write()

    def _key(self, job: Job) -> str:
        """The place of an answer in the folder, from wherever the command was called."""
        return "" if job.target is None else job.target.relative_to(self._folder).as_posix()

    def _write(self) -> None:
        beside = self._path.with_name(f"{NAME}.part")
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
