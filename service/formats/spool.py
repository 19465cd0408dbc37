"""Where an answer waits until its table has ended: in memory while short, else in a file."""

import errno
import tempfile
from types import TracebackType
from typing import IO, Any, Protocol, Self

from service.formats.errors import AnswerTooLong, SpoolFull

IN_MEMORY = 1 << 20
"""Bytes above which a spool is kept in a file."""
_FULL = frozenset({errno.ENOSPC, errno.EDQUOT, errno.EFBIG})


class Spool:
    """Bytes written in order and read back once, at most ``most`` of them."""

    waiting = 0
    """Bytes in all open spools of this process."""

    def __init__(self, most: int | None = None, *, in_memory: int = IN_MEMORY) -> None:
        self._file: IO[Any] = tempfile.SpooledTemporaryFile(in_memory)  # noqa: SIM115 - closed by close
        self._most = most
        self.size = 0

    def write(self, data: bytes) -> None:
        """Append. Raises SpoolFull when there is no room, AnswerTooLong."""
        if self._most is not None and self.size + len(data) > self._most:
            raise AnswerTooLong(f"the answer has more than {self._most} bytes")
        write_to(self._file, data)
        self.size += len(data)
        Spool.waiting += len(data)

    def rewind(self) -> int:
        """Go to the first byte; how many there are."""
        self._file.seek(0)
        return self.size

    def read(self, count: int) -> bytes:
        """The next bytes; none at the end."""
        return bytes(self._file.read(count))

    @property
    def closed(self) -> bool:
        """Whether nothing is kept any more."""
        return self._file.closed

    def close(self) -> None:
        """Give back the room."""
        if not self._file.closed:
            Spool.waiting -= self.size
            self._file.close()

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.close()


class Writable(Protocol):
    """What answers are written to."""

    def write(self, data: bytes, /) -> object:
        """Append."""
        ...


def write_to(target: Writable, data: bytes) -> None:
    """Write all of it. Raises SpoolFull when there is no room left."""
    try:
        target.write(data)
    except OSError as error:
        if error.errno in _FULL:
            raise SpoolFull("there is no room left for the answer") from None
        raise
