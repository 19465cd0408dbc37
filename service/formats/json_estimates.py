"""application/json estimates, as rows or as columns: NaN becomes null, flags become lists."""

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
import orjson
import polars as pl

from models.conversion import Units, from_si
from models.estimate import Estimates
from models.flags import Flags, slugs_of
from models.relation import Array
from service.formats.json_readings import JsonReadings

PASSED = ("time", "depth")
"""What of a reading an estimate repeats, so that it can be told whose it is."""


def frame_of(estimates: Estimates, readings: JsonReadings, units: Units) -> pl.DataFrame:
    """One row per reading: what tells it apart, the estimates in the caller's units, flags."""
    columns: dict[str, Any] = {}
    for name in PASSED:
        if name in readings.texts:
            columns[name] = pl.Series(name, readings.texts[name], dtype=pl.String)
        elif name in readings.numbers:
            columns[name] = _series(name, readings.numbers[name])
    for name, values in estimates.columns.items():
        columns[name] = _series(name, from_si(name, values, units))
    columns["flags"] = flag_lists(estimates.flags)
    return pl.DataFrame(columns)


def encode(frame: pl.DataFrame, shape: str, rest: Mapping[str, Any]) -> bytes:
    """The whole answer: ``estimates`` in the shape of the readings, then ``rest``."""
    if shape == "rows":
        body = frame.write_json().encode()
    else:
        body = orjson.dumps(
            {name: _cells(frame[name]) for name in frame.columns},
            option=orjson.OPT_SERIALIZE_NUMPY,
        )
    return b'{"estimates":' + body + b"," + orjson.dumps(rest)[1:]


def tabulate(frame: pl.DataFrame, media_type: str) -> bytes:
    """The estimates alone, as a table."""
    if media_type == "text/csv":
        flat = frame.with_columns(pl.col("flags").list.join(";"))
        return flat.write_csv().encode()
    return frame.write_ndjson().encode()


def flag_lists(flags: Flags) -> pl.Series:
    """Flags as a column of lists of slugs; each combination is spelt out once."""
    masks, place = np.unique(flags, return_inverse=True)
    spelt: Sequence[list[str]] = [list(slugs_of(int(mask))) for mask in masks]
    return pl.Series("flags", spelt, dtype=pl.List(pl.String)).gather(place)


def _series(name: str, values: Array) -> pl.Series:
    return pl.Series(name, np.ascontiguousarray(values)).fill_nan(None)


def _cells(series: pl.Series) -> Any:
    if series.dtype == pl.Float64:
        return np.ascontiguousarray(series.fill_null(np.nan).to_numpy())
    return series.to_list()
