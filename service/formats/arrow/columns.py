"""A batch of typed columns as a block: numbers of what is read, text of every cell on demand."""

from collections.abc import Mapping
from typing import Any

import numpy as np
import orjson
import polars as pl
import pyarrow as pa

from models.relation import Array
from service.formats.block import Block, Header
from service.formats.cells import Marks, numbers_in


def block_of(batch: pa.RecordBatch, header: Header, places: Mapping[str, int], row: int) -> Block:
    """Some rows of a table, the first of which is row ``row`` of it, counted from 1.

    places: of the columns that are read, by quantity name or name_u.
    """
    count = batch.num_rows
    values: dict[str, Array] = {}
    unreadable: dict[str, Marks] = {}
    for name, place in places.items():
        values[name], odd = numbers_of(batch.column(place))
        if odd.any():
            unreadable[name] = odd
    return Block(
        header=header,
        lines=np.arange(row, row + count),
        records=pl.repeat("", count, dtype=pl.String, eager=True),
        values=values,
        unreadable=unreadable,
        absent={},
        broken=np.zeros(count, dtype=np.bool_),
        cells=lambda: [
            text_of(column).alias(name)
            for name, column in zip(header.names, batch.columns, strict=True)
        ],
        batch=batch,
        bare=frozenset(field.name for field in batch.schema if _is_bare(field.type)),
    )


def numbers_of(column: pa.Array) -> tuple[Array, Marks]:
    """Numbers, NaN where there is none, and where a cell is neither a number nor missing.

    Text is read as the cells of CSV are; of other types only numbers are numbers. What is not
    finite is missing.
    """
    if isinstance(column, pa.DictionaryArray):
        column = column.dictionary_decode()
    kind = column.type
    if pa.types.is_string(kind) or pa.types.is_large_string(kind) or pa.types.is_string_view(kind):
        return numbers_in(text_of(column))
    present = column.is_valid().to_numpy(zero_copy_only=False)
    if not _is_number(kind):
        return np.full(len(column), np.nan), present
    found = column.cast(pa.float64(), safe=False).to_numpy(zero_copy_only=False)
    numbers = np.where(present & np.isfinite(found), found, np.nan)
    return numbers, np.zeros(len(column), dtype=np.bool_)


def text_of(column: pa.Array) -> pl.Series:
    """Every cell as text, null where there is none; what is nested is JSON, bytes are hex.

    Numbers that are not finite count as none: neither CSV nor JSON has a way to write them.
    """
    if isinstance(column, pa.DictionaryArray):
        column = column.dictionary_decode()
    kind = column.type
    if pa.types.is_nested(kind) or _is_binary(kind):
        spell = _hex if _is_binary(kind) else _json
        texts = [None if cell is None else spell(cell) for cell in column.to_pylist()]
        return pl.Series(values=texts, dtype=pl.String)
    text = pl.Series(values=pl.from_arrow(column.cast(pa.string())), dtype=pl.String)
    if pa.types.is_timestamp(kind):
        return text.str.replace(" ", "T", literal=True)
    if pa.types.is_floating(kind):
        return text.set(~text.str.contains(r"\d"), None)
    return text


def _is_number(kind: pa.DataType) -> bool:
    return pa.types.is_integer(kind) or pa.types.is_floating(kind) or pa.types.is_decimal(kind)


def _is_bare(kind: pa.DataType) -> bool:
    """Whether the text of its cells is JSON as it stands."""
    if pa.types.is_dictionary(kind):
        kind = kind.value_type
    return _is_number(kind) or pa.types.is_boolean(kind) or pa.types.is_nested(kind)


def _is_binary(kind: pa.DataType) -> bool:
    return (
        pa.types.is_binary(kind)
        or pa.types.is_large_binary(kind)
        or pa.types.is_binary_view(kind)
        or pa.types.is_fixed_size_binary(kind)
    )


def _hex(cell: bytes) -> str:
    return cell.hex()


def _json(cell: Any) -> str:
    options = orjson.OPT_NON_STR_KEYS
    return orjson.dumps(cell, default=_hex_or_text, option=options).decode()


def _hex_or_text(cell: Any) -> str:
    return cell.hex() if isinstance(cell, bytes) else str(cell)
