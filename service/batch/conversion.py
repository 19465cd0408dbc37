"""One table on its way: decoded block by block, answered, encoded; from files without a server.

Where an executor is given, the estimates of a block are worked out in it while the block before is
encoded and the next one decoded. Order and answers are the same either way.
"""

import time
from collections.abc import Callable, Collection, Iterable, Iterator
from concurrent.futures import Executor
from dataclasses import dataclass, field, replace
from functools import partial
from typing import IO

import numpy as np

from service.formats.block import Answer, Block, Decoder, Encoder, refuse_first
from service.formats.errors import FormatError, HeaderError
from service.formats.spool import write_to

PIECE = 1 << 20
"""Bytes that are read, computed or sent at a time."""


@dataclass(frozen=True, slots=True)
class Counts:
    """How many rows were answered, and how many of them carry a flag."""

    rows: int = 0
    flagged: int = 0


@dataclass(slots=True)
class Stages:
    """Seconds spent on a table, by stage; estimates run beside the other two."""

    decode: float = 0.0
    estimate: float = 0.0
    encode: float = 0.0


@dataclass(slots=True)
class Conversion:
    """One table on its way from its decoder to its encoder.

    answer: what is appended to the rows of a block.
    strict: refuse the table at the first cell that cannot be read, or is missing and needed.
    columns: names of the appended columns that are wanted; None: all of them. Flags always come.
    beside: where answers are worked out; None: in line.
    """

    decoder: Decoder
    encoder: Encoder
    answer: Callable[[Block], Answer]
    strict: bool = False
    columns: Collection[str] | None = None
    beside: Executor | None = None
    counts: Counts = field(default=Counts(), init=False)
    stages: Stages = field(default_factory=Stages, init=False)
    _names: tuple[str, ...] | None = field(default=None, init=False)
    _pending: tuple[Block, Callable[[], Answer]] | None = field(default=None, init=False)

    def feed(self, piece: bytes) -> Iterator[bytes]:
        """The answer as far as this piece completes it. Raises FormatError."""
        yield from self._through(self.decoder.feed(piece))

    def close(self) -> Iterator[bytes]:
        """The rest of the answer. Raises FormatError."""
        yield from self._through(self.decoder.close())
        yield from self._settled()
        with _clocked(self.stages, "encode"):
            end = self.encoder.end()
        yield end

    def _through(self, blocks: Iterable[Block]) -> Iterator[bytes]:
        waiting = iter(blocks)
        while True:
            try:
                with _clocked(self.stages, "decode"):
                    block = next(waiting, None)
            except FormatError:
                yield from self._settled()  # what is wrong with earlier rows is said first
                raise
            if block is None:
                return
            before, self._pending = self._pending, (block, self._begun(block))
            if before is not None:
                yield from self._encoded(*before)

    def _begun(self, block: Block) -> Callable[[], Answer]:
        if self.beside is None:
            return partial(self._answered, block)
        return self.beside.submit(self._answered, block).result

    def _answered(self, block: Block) -> Answer:
        with _clocked(self.stages, "estimate"):
            return self.answer(block)

    def _settled(self) -> Iterator[bytes]:
        before, self._pending = self._pending, None
        if before is not None:
            yield from self._encoded(*before)

    def _encoded(self, block: Block, result: Callable[[], Answer]) -> Iterator[bytes]:
        answer = result()
        if self.strict:
            refuse_first(block, answer, self.counts.rows)
        answer = self._wanted(answer)
        begin = b""
        with _clocked(self.stages, "encode"):
            if self._names is None:
                self._names = tuple(answer.columns)
                begin = self.encoder.start(block.header, self._names)
            if self._names != tuple(answer.columns):
                raise ValueError("every block of a table is answered with the same columns")
            text = self.encoder.block(block, answer) if len(block) else b""
        flagged = int(np.count_nonzero(answer.flags))
        self.counts = Counts(self.counts.rows + len(block), self.counts.flagged + flagged)
        yield begin + text if begin else text

    def _wanted(self, answer: Answer) -> Answer:
        if self.columns is None:
            return answer
        lacking = [name for name in self.columns if name not in answer.columns]
        if lacking:
            raise HeaderError(
                f"columns among {', '.join(answer.columns)}", ", ".join(lacking),
                mend="leave it out of ?columns=, or send the readings it needs",
            )  # fmt: skip
        kept = {name: cells for name, cells in answer.columns.items() if name in self.columns}
        return replace(answer, columns=kept)


class _clocked:
    """Adds the time of a block of code to one of the stages."""

    __slots__ = ("_name", "_stages", "_started")

    def __init__(self, stages: Stages, name: str) -> None:
        self._stages, self._name = stages, name

    def __enter__(self) -> None:
        self._started = time.perf_counter()

    def __exit__(self, *_: object) -> None:
        spent = getattr(self._stages, self._name) + time.perf_counter() - self._started
        setattr(self._stages, self._name, spent)


def convert_file(
    source: IO[bytes],
    target: IO[bytes],
    conversion: Conversion,
    progress: Callable[[int], object] = lambda _: None,
) -> Counts:
    """Convert a file, without a server.

    progress: called with the number of bytes that were read, after each piece.
    Raises FormatError, SpoolFull.
    """
    while piece := source.read(PIECE):
        for part in conversion.feed(piece):
            write_to(target, part)
        progress(len(piece))
    for part in conversion.close():
        write_to(target, part)
    return conversion.counts
