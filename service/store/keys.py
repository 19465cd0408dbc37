"""The file of keys: hashed, labelled, with scopes; read again when it has changed."""

import hashlib
import hmac
import os
import secrets
import tempfile
from collections.abc import Iterable, Sequence
from datetime import UTC, datetime
from pathlib import Path
from typing import Annotated, Literal, get_args

from pydantic import BaseModel, ConfigDict, Field, ValidationError

from service.faults import problems_of

Reach = Literal["read", "write", "manage"]
SCOPES: tuple[Reach, ...] = get_args(Reach)
MARK = "gley_"
"""Begins every key, so that a search for leaked keys can find them."""


class KeyFileError(ValueError):
    """The file of keys cannot be used, or not as asked."""


class Key(BaseModel):
    """What is kept of a key: never the key itself."""

    model_config = ConfigDict(frozen=True, extra="forbid")

    label: Annotated[str, Field(pattern=r"^[A-Za-z0-9][A-Za-z0-9._-]{0,63}$")]
    sha256: Annotated[str, Field(pattern=r"^[0-9a-f]{64}$")]
    scopes: Annotated[tuple[Reach, ...], Field(min_length=1)]
    stations: tuple[Annotated[str, Field(pattern=r"^[A-Za-z][A-Za-z0-9._-]{0,63}$")], ...] = ()
    """The only stations it reaches; none named: all."""
    created: datetime
    revoked: datetime | None = None


class Keys(BaseModel):
    """The whole file."""

    model_config = ConfigDict(frozen=True, extra="forbid", hide_input_in_errors=True)

    keys: tuple[Key, ...] = ()


class KeyFile:
    """Keys in one file that several processes may read while one changes it."""

    def __init__(self, path: Path) -> None:
        self.path = path
        self._stamp: tuple[int, int, int] | None = None
        self._keys: tuple[Key, ...] = ()

    def all(self) -> tuple[Key, ...]:
        """Every key that was ever made, oldest first.

        Raises KeyFileError when the file is not what ``add`` wrote.
        """
        stamp = self._current_stamp()
        if stamp != self._stamp:
            self._keys = self._read() if stamp else ()
            self._stamp = stamp
        return self._keys

    def active(self) -> tuple[Key, ...]:
        """The keys that were not revoked."""
        return tuple(key for key in self.all() if key.revoked is None)

    def find(self, secret: str) -> Key | None:
        """The active key with this secret; the time it takes tells nothing about it."""
        digest = _hash(secret)
        found = None
        for key in self.active():
            if hmac.compare_digest(key.sha256, digest):
                found = key
        return found

    def add(self, label: str, scopes: Sequence[Reach], stations: Sequence[str] = ()) -> str:
        """Make a key and return it: the only time it can be seen.

        stations: the only ones it reaches; none: all.

        Raises KeyFileError when the label is in use, or is none.
        """
        if any(key.label == label for key in self.active()):
            raise KeyFileError(f"there is a key {label} already; revoke it first")
        secret = MARK + secrets.token_urlsafe(32)
        try:
            key = Key(
                label=label, sha256=_hash(secret), scopes=tuple(scopes), stations=tuple(stations),
                created=datetime.now(UTC),
            )  # fmt: skip
        except ValidationError as error:
            raise KeyFileError("; ".join(fault.detail for fault in problems_of(error))) from None
        self._write((*self.all(), key))
        return secret

    def revoke(self, label: str) -> None:
        """End a key; raises KeyFileError when no active key has this label."""
        known = [key.label for key in self.active()]
        if label not in known:
            raise KeyFileError(f"no key is called {label}; there are {', '.join(known) or 'none'}")
        ended = {"revoked": datetime.now(UTC)}
        self._write(
            key.model_copy(update=ended) if key.label == label and key.revoked is None else key
            for key in self.all()
        )

    def _current_stamp(self) -> tuple[int, int, int] | None:
        try:
            status = self.path.stat()
        except FileNotFoundError:
            return None
        return status.st_mtime_ns, status.st_size, status.st_ino

    def _read(self) -> tuple[Key, ...]:
        try:
            return Keys.model_validate_json(self.path.read_bytes()).keys
        except (OSError, ValidationError) as error:
            raise KeyFileError(f"the file of keys {self.path} cannot be read: {error}") from error

    def _write(self, keys: Iterable[Key]) -> None:
        """Replace the file as a whole, so that no reader ever sees half of it."""
        text = Keys(keys=tuple(keys)).model_dump_json(indent=2)
        self.path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        descriptor, name = tempfile.mkstemp(dir=self.path.parent, prefix=".keys-")  # mode 0600
        with os.fdopen(descriptor, "w", encoding="utf-8") as file:
            file.write(text + "\n")
            file.flush()
            os.fsync(file.fileno())
        Path(name).replace(self.path)


def _hash(secret: str) -> str:
    """Keys are 256 random bits: a plain hash cannot be searched for them."""
    return hashlib.sha256(secret.encode("utf-8", "replace")).hexdigest()
