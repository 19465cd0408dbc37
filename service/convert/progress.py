"""How far a conversion is, at what rate, and how long it will take: one line on a terminal."""

import sys
import time
from collections.abc import Callable
from typing import IO

MEGABYTE = 1e6
PAUSE = 0.2
"""Seconds between two lines."""


class Progress:
    """Counts bytes that were read.

    total: bytes in all, 0 where that is not known.
    """

    def __init__(
        self,
        total: int,
        out: IO[str] = sys.stderr,
        clock: Callable[[], float] = time.monotonic,
    ) -> None:
        self.total, self.done = total, 0
        self._out, self._clock = out, clock
        self._shown = out.isatty()
        self._started = self._told = clock()

    def add(self, count: int) -> None:
        """Note bytes that were read."""
        self.show(self.done + count)

    def show(self, done: int) -> None:
        """Note how many bytes were read so far."""
        self.done = done
        now = self._clock()
        if self._shown and now - self._told >= PAUSE:
            self._told = now
            self._out.write(f"\r{self.line(now)}\x1b[K")
            self._out.flush()

    def line(self, now: float) -> str:
        """The line as it would stand now."""
        rate = self.done / max(now - self._started, 1e-9)
        told = f"{self.done / MEGABYTE:.1f} MB, {rate / MEGABYTE:.1f} MB/s"
        if not self.total:
            return told
        left = (self.total - self.done) / rate if rate else 0.0
        return f"{self.done / self.total:4.0%} of {self.total / MEGABYTE:.1f} MB, {told}, " + (
            f"{left:.0f} s left" if left < 90 else f"{left / 60:.0f} min left"
        )

    def close(self) -> None:
        """Leave the terminal as it was."""
        if self._shown:
            self._out.write("\r\x1b[K")
            self._out.flush()
