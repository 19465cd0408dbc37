"""Answers as tables: rows with names, in JSON, CSV, NDJSON or Arrow."""

from collections.abc import Mapping, Sequence
from io import BytesIO
from typing import Any

import numpy as np
import orjson
import polars as pl

from models.flags import Flags, slugs_of
from models.relation import Array

JSON = "application/json"
ARROW = "application/vnd.apache.arrow.stream"
OFFERED: Mapping[str, str] = {
    "json": JSON, "csv": "text/csv", "ndjson": "application/x-ndjson", "arrow": ARROW,
}  # fmt: skip
"""Media types by short name, the preferred one first."""


def numbers(values: Array) -> pl.Series:
    """A column of numbers, null where there is none."""
    return pl.Series(np.ascontiguousarray(values), nan_to_null=True)


def slugs(flags: Flags) -> pl.Series:
    """A column of lists of flags; each combination is spelt once."""
    masks, places = np.unique(flags, return_inverse=True)
    spelt = pl.Series([list(slugs_of(m)) for m in masks.tolist()], dtype=pl.List(pl.String))
    return spelt.gather(places)


def encoded(
    frame: pl.DataFrame, media_type: str, key: str, rest: Mapping[str, Any], shape: str = "rows"
) -> bytes:
    """The answer in a media type; ``rest`` stands beside the rows in JSON and nowhere else.

    key: under which JSON holds the rows. shape: rows, or columns, of JSON.
    """
    if media_type == JSON:
        if shape == "columns":
            body = orjson.dumps({name: frame[name].to_list() for name in frame.columns})
        else:
            body = frame.write_json().encode()
        return orjson.dumps(key).join((b"{", b":")) + body + b"," + orjson.dumps(rest)[1:]
    if media_type == ARROW:
        stream = BytesIO()
        frame.write_ipc_stream(stream)
        return stream.getvalue()
    if media_type == OFFERED["ndjson"]:
        return frame.write_ndjson().encode()
    lists = [name for name, kind in frame.schema.items() if kind == pl.List]
    joined = [pl.col(name).list.join(";").replace("", None) for name in lists]
    return frame.with_columns(joined).write_csv(line_terminator="\r\n").encode()


def frame_of(columns: Mapping[str, pl.Series | Sequence[Any]]) -> pl.DataFrame:
    """A table of columns, in order."""
    return pl.DataFrame(
        {
            name: values if isinstance(values, pl.Series) else pl.Series(name, values)
            for name, values in columns.items()
        }
    )
