"""Rows into typed columns: Arrow streams batch by batch, Parquet files by row groups.

Columns of a typed table keep their types. Those of a table of text are text, what is read is a
number there; a row that could not be taken apart stands whole in a column of its own.
"""

from collections.abc import Callable, Iterable
from functools import partial
from typing import Any

import numpy as np
import polars as pl
import pyarrow as pa
import pyarrow.parquet as pq

from models.relation import Array
from service.formats.block import UNREADABLE_ROW, Answer, Block, Header
from service.formats.errors import HeaderError, shown
from service.formats.flag_text import combinations
from service.formats.header import FLAGS, RECOGNISED, folded

ROW_GROUP = 65_536
"""Rows of a group of a Parquet file; as many wait in memory."""


class _Sink:
    """What a writer of pyarrow's writes to: bytes are taken out as they come."""

    closed = False

    def __init__(self) -> None:
        self._parts: list[bytes] = []
        self._at = 0

    def write(self, data: Any) -> int:
        """Keep a copy."""
        self._parts.append(bytes(data))
        self._at += len(self._parts[-1])
        return len(self._parts[-1])

    def tell(self) -> int:
        """How much was written in all."""
        return self._at

    def flush(self) -> None:
        """Nothing is held back."""

    def close(self) -> None:
        """The bytes stay."""

    def taken(self) -> bytes:
        """What was written since the last call."""
        parts, self._parts = self._parts, []
        return b"".join(parts)


class _StreamWriter:
    """Every batch at once."""

    def __init__(self, sink: pa.NativeFile, schema: pa.Schema) -> None:
        self._writer = pa.ipc.new_stream(sink, schema)

    def write(self, batch: pa.RecordBatch) -> None:
        self._writer.write_batch(batch)

    def close(self) -> None:
        self._writer.close()


class _ParquetWriter:
    """Whole row groups."""

    def __init__(self, sink: pa.NativeFile, schema: pa.Schema) -> None:
        self._writer = pq.ParquetWriter(sink, schema)
        self._waiting: list[pa.RecordBatch] = []

    def write(self, batch: pa.RecordBatch) -> None:
        self._waiting.append(batch)
        if sum(waiting.num_rows for waiting in self._waiting) >= ROW_GROUP:
            self._flush()

    def close(self) -> None:
        self._flush()
        self._writer.close()

    def _flush(self) -> None:
        if self._waiting:
            self._writer.write_table(pa.Table.from_batches(self._waiting))
            self._waiting = []


class TypedEncoder:
    """See Encoder."""

    def __init__(self, key: str, writer: Callable[[pa.NativeFile, pa.Schema], Any]) -> None:
        self._key, self._make = key, writer
        self._sink = _Sink()
        self._names: tuple[str, ...] = ()
        self._schema = pa.schema([])
        self._writer: Any = None

    def start(self, header: Header, names: tuple[str, ...]) -> bytes:
        """See Encoder."""
        self._names = header.names
        fields = [*_given(header), *(pa.field(name, pa.float64()) for name in names)]
        metadata = None if header.schema is None else header.schema.metadata
        self._schema = pa.schema([*fields, pa.field(FLAGS, pa.list_(pa.string()))], metadata)
        try:
            self._writer = self._make(pa.PythonFile(self._sink, "w"), self._schema)
        except pa.ArrowException as error:
            raise HeaderError(
                f"columns that {self._key} can hold", shown(str(error).partition("\n")[0]),
                mend="ask for another format",
            ) from None  # fmt: skip
        return self._sink.taken()

    def block(self, block: Block, answer: Answer) -> bytes:
        """See Encoder."""
        given = _texts(block, self._names) if block.batch is None else block.batch.columns
        numbers = [_numbers(values) for values in answer.columns.values()]
        words, places = combinations(answer.flags)
        flags = pa.array(words, pa.list_(pa.string())).take(pa.array(places))
        self._writer.write(
            pa.RecordBatch.from_arrays([*given, *numbers, flags], schema=self._schema)
        )
        return self._sink.taken()

    def end(self) -> bytes:
        """See Encoder."""
        self._writer.close()
        return self._sink.taken()


def _given(header: Header) -> Iterable[pa.Field]:
    if header.schema is not None:
        return header.schema
    read = [folded(name) in RECOGNISED for name in header.names]
    kinds = [pa.float64() if is_read else pa.string() for is_read in read]
    own = [pa.field(name, kind) for name, kind in zip(header.names, kinds, strict=True)]
    return [*own, pa.field(UNREADABLE_ROW, pa.string())]


def _texts(block: Block, names: tuple[str, ...]) -> list[pa.Array]:
    """The columns of a table of text, and what could not be taken apart."""
    nothing = np.full(len(block), np.nan)
    whole = block.records.set(pl.Series(~block.broken), None)
    columns = [
        _numbers(block.values.get(folded(name), nothing))
        if folded(name) in RECOGNISED
        else _strings(column)
        for name, column in zip(names, block.columns(names), strict=True)
    ]
    return [*columns, _strings(whole)]


def _strings(column: pl.Series) -> pa.Array:
    return column.to_arrow().cast(pa.string())


def _numbers(values: Array) -> pa.Array:
    return pa.array(values, pa.float64(), mask=~np.isfinite(values))


ArrowEncoder = partial(TypedEncoder, "arrow", _StreamWriter)
ParquetEncoder = partial(TypedEncoder, "parquet", _ParquetWriter)
