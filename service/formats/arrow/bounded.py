"""Batches of rows that stay small when their cells are written out.

A dictionary, or a view, says in a few bytes that a long text stands in every row; it is taken out
row by row later. So batches are cut by what they would be, and what cannot be told is refused.
"""

from collections.abc import Iterator, Sequence
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from service.formats.errors import HeaderError

ROWS = 16_384
"""Most rows of a batch."""
MOST_TEXT = 4 << 20
"""Bytes of text in one, where it has more than one row."""


def check_types(schema: pa.Schema) -> None:
    """Raise HeaderError for columns whose size cannot be told before they are written out."""
    for field in schema:
        odd = _hiding(field.type, within=False)
        if odd is not None:
            raise HeaderError(
                "columns of plain types, lists and structures", str(odd)[:80], column=field.name,
                mend="write the column out, or leave it away",
            )  # fmt: skip


def _hiding(kind: pa.DataType, *, within: bool) -> pa.DataType | None:
    """The type within a type that says in a few bytes what is long."""
    if pa.types.is_run_end_encoded(kind) or _is_list_view(kind):
        return kind
    if within and (pa.types.is_dictionary(kind) or _is_view(kind)):
        return kind
    if pa.types.is_dictionary(kind):
        nested = pa.types.is_nested(kind.value_type) or _is_view(kind.value_type)
        return kind if nested else None
    inner = [kind.field(place).type for place in range(kind.num_fields)]
    found = (_hiding(one, within=True) for one in inner)
    return next((one for one in found if one is not None), None)


def bounded(batch: pa.RecordBatch) -> Iterator[pa.RecordBatch]:
    """The same rows, in batches that stay small."""
    for start in range(0, batch.num_rows, ROWS):
        some = batch.slice(start, ROWS)
        long = [column for column in some.columns if _may_be_long(column.type)]
        if not long:
            yield some
            continue
        lengths = np.sum([_lengths(column) for column in long], axis=0)
        for begin, end in _cuts(lengths):
            yield some.slice(begin, end - begin)


def written_out(batch: pa.RecordBatch, schema: pa.Schema) -> pa.RecordBatch:
    """A batch with the types of a schema: dictionaries that it does not name are taken out."""
    columns = [
        column.dictionary_decode().cast(field.type)
        if pa.types.is_dictionary(column.type) and not pa.types.is_dictionary(field.type)
        else column
        for column, field in zip(batch.columns, schema, strict=True)
    ]
    return pa.RecordBatch.from_arrays(columns, schema=schema)


def _cuts(lengths: NDArray[np.int64]) -> Iterator[tuple[int, int]]:
    """Ends of runs of rows whose lengths add up to no more than MOST_TEXT, or of one row."""
    total = np.concatenate((np.zeros(1, np.int64), np.cumsum(lengths)))
    start = 0
    while start < len(lengths):
        end = int(np.searchsorted(total, total[start] + MOST_TEXT, side="right")) - 1
        end = max(end, start + 1)
        yield start, end
        start = end


def _lengths(column: pa.Array) -> NDArray[np.int64]:
    """Bytes of each cell of text."""
    if _is_view(column.type):
        return _view_lengths(column)
    entries = _of_entries(column.dictionary)
    places = pc.fill_null(column.indices.cast(pa.int64()), len(entries))
    known: NDArray[np.int64] = np.concatenate((entries, np.zeros(1, np.int64)))
    return known[places.to_numpy(zero_copy_only=False)]


def _of_entries(dictionary: pa.Array) -> NDArray[np.int64]:
    lengths: Any = pc.fill_null(pc.binary_length(dictionary), 0)
    return np.asarray(lengths.to_numpy(zero_copy_only=False), np.int64)


def _view_lengths(column: pa.Array) -> NDArray[np.int64]:
    """A view is sixteen bytes, of which the first four are its length."""
    views = np.frombuffer(column.buffers()[1], np.int32).reshape(-1, 4)
    found = views[column.offset : column.offset + len(column), 0].astype(np.int64)
    present = column.is_valid().to_numpy(zero_copy_only=False)
    return np.where(present, found, 0)


def _may_be_long(kind: pa.DataType) -> bool:
    return _is_view(kind) or (pa.types.is_dictionary(kind) and _is_text(kind.value_type))


def _is_text(kind: pa.DataType) -> bool:
    checks: Sequence[Any] = (pa.types.is_string, pa.types.is_large_string, pa.types.is_binary,
                             pa.types.is_large_binary)  # fmt: skip
    return any(check(kind) for check in checks)


def _is_view(kind: pa.DataType) -> bool:
    return pa.types.is_string_view(kind) or pa.types.is_binary_view(kind)


def _is_list_view(kind: pa.DataType) -> bool:
    return pa.types.is_list_view(kind) or pa.types.is_large_list_view(kind)
