"""Arrow streams and Parquet files: rows out of typed columns.

The end of a Parquet file says where its columns are, so the body is kept in a file first; so is
that of an Arrow stream, because one record batch may hold all of it. From there, a few thousand
rows are looked at a time. Rows count as lines, from 1.
"""

import mmap
import tempfile
import weakref
from collections.abc import Callable, Collection, Iterator
from functools import partial
from typing import IO

import pyarrow as pa
import pyarrow.parquet as pq

from service.formats.arrow.bounded import ROWS, bounded, check_types, written_out
from service.formats.arrow.columns import block_of
from service.formats.arrow.messages import check_messages
from service.formats.arrow.pages import check_pages
from service.formats.block import Block, Header
from service.formats.errors import MAGIC, FormatError, looks_like, shown
from service.formats.header import check_permittivity, check_width, recognised
from service.formats.records import BLOCK_BYTES, LINE_BYTES
from service.formats.spool import write_to

PAGES = 1 << 20
"""Bytes of a Parquet column that are read at a time."""

Opened = tuple[pa.Schema, Iterator[pa.RecordBatch]]


class TypedDecoder:
    """See Decoder. ``appends``: names of the columns of the answer."""

    def __init__(
        self,
        key: str,
        promised: str,
        begins: bytes,
        opened: Callable[[IO[bytes]], Opened],
        appends: Collection[str],
        *,
        block_bytes: int = BLOCK_BYTES,  # noqa: ARG002 - blocks are cut by rows here
        line_bytes: int = LINE_BYTES,  # noqa: ARG002
    ) -> None:
        self._key, self._promised, self._begins = key, promised, begins
        self._opened, self._appends = opened, appends
        self._file: IO[bytes] = tempfile.TemporaryFile()  # noqa: SIM115 - closed by the next line
        weakref.finalize(self, self._file.close)

    def feed(self, piece: bytes) -> list[Block]:
        """See Decoder."""
        write_to(self._file, piece)
        return []

    def close(self) -> Iterator[Block]:
        """See Decoder."""
        if not self._file.tell():
            raise FormatError(self._promised, "an empty body")
        self._file.flush()
        self._file.seek(0)
        self._check_beginning(self._file.read(MAGIC))
        self._file.seek(0)
        try:
            yield from self._blocks()
        except (pa.ArrowException, OSError, ValueError) as error:
            if isinstance(error, FormatError):
                raise
            raise FormatError(self._promised, shown(str(error).partition("\n")[0])) from None
        finally:
            self._file.close()

    def _check_beginning(self, begin: bytes) -> None:
        if not begin.startswith(self._begins):
            found = looks_like(begin) or f"bytes that begin with {shown(begin.decode('latin-1'))}"
            raise FormatError(self._promised, found)

    def _blocks(self) -> Iterator[Block]:
        schema, batches = self._opened(self._file)
        check_types(schema)
        names = tuple(schema.names)
        check_width(names, line=1)
        places = recognised(names, self._appends, line=1)
        if self._appends:  # what nothing is appended to is not estimated: any numbers will do
            check_permittivity(names, places, line=1)
        header = Header(names, self._key, schema=schema)
        row = 1
        for batch in batches:
            for some in bounded(batch):
                yield block_of(written_out(some, schema), header, places, row)
                row += some.num_rows
        if row == 1:
            yield block_of(_no_rows(schema), header, places, row)


def _no_rows(schema: pa.Schema) -> pa.RecordBatch:
    return pa.RecordBatch.from_arrays([pa.array([], f.type) for f in schema], schema=schema)


def _stream(file: IO[bytes]) -> Opened:
    mapped = mmap.mmap(file.fileno(), 0, access=mmap.ACCESS_READ)
    whole = pa.py_buffer(mapped)
    check_messages(whole)
    reader = pa.ipc.open_stream(whole)
    return reader.schema, _checked(reader, mapped)


def _checked(reader: pa.RecordBatchReader, mapped: mmap.mmap) -> Iterator[pa.RecordBatch]:
    """Batches whose offsets and texts hold what they promise; pages that were seen are let go."""
    for batch in reader:
        batch.validate(full=True)
        for start in range(0, batch.num_rows, ROWS):
            yield batch.slice(start, ROWS)
            if hasattr(mmap, "MADV_DONTNEED"):
                mapped.madvise(mmap.MADV_DONTNEED)


def _parquet(file: IO[bytes]) -> Opened:
    metadata = pq.read_metadata(file)
    with mmap.mmap(file.fileno(), 0, access=mmap.ACCESS_READ) as mapped, memoryview(mapped) as data:
        long = check_pages(data, metadata)
    schema = pq.ParquetFile(file, metadata=metadata).schema_arrow
    table = pq.ParquetFile(file, metadata=metadata, buffer_size=PAGES, read_dictionary=long)
    return schema, table.iter_batches(batch_size=ROWS, use_threads=False)


ArrowDecoder = partial(TypedDecoder, "arrow", "an Arrow stream", b"\xff\xff\xff\xff", _stream)
ParquetDecoder = partial(TypedDecoder, "parquet", "a Parquet file", b"PAR1", _parquet)
