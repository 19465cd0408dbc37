"""application/json estimates, as rows or as columns: NaN becomes null, flags become lists."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from io import BytesIO
from typing import Any

import numpy as np
import orjson
import polars as pl

from models.conversion import Units, from_si
from models.estimate import Estimates
from models.flags import Flags
from models.relation import Array
from service.formats.flag_text import combinations
from service.formats.json.readings import JsonReadings

PASSED = ("time", "depth")
"""What of a reading an estimate repeats, so that it can be told whose it is."""


FEW = 200
"""Rows up to which they are written one by one."""


@dataclass(frozen=True, slots=True)
class JsonEstimates:
    """Columns of an answer in the caller's units, in order; the flags come last."""

    texts: Mapping[str, Sequence[str | None]]
    numbers: Mapping[str, Array]
    flags: Flags

    @property
    def names(self) -> tuple[str, ...]:
        """All columns but the flags."""
        return (*self.texts, *self.numbers)

    def with_weight(self, share: Array) -> "JsonEstimates":
        """With each row's share of a combination as a further column."""
        return replace(self, numbers={**self.numbers, "weight": share})


def laid_out(estimates: Estimates, readings: JsonReadings, units: Units) -> JsonEstimates:
    """What tells each reading apart, and its estimates in the caller's units."""
    passed = (*PASSED, *readings.told)
    numbers = {name: readings.numbers[name] for name in passed if name in readings.numbers}
    for name, values in estimates.columns.items():
        numbers[name] = np.ascontiguousarray(from_si(name, values, units))
    texts = {name: readings.texts[name] for name in PASSED if name in readings.texts}
    return JsonEstimates(texts, numbers, estimates.flags)


def encode(answer: JsonEstimates, shape: str, rest: Mapping[str, Any]) -> bytes:
    """The whole answer: ``estimates`` in the shape of the readings, then ``rest``."""
    body = _rows(answer) if shape == "rows" else _columns(answer)
    return b'{"estimates":' + body + b"," + orjson.dumps(rest)[1:]


def encode_members(members: Mapping[str, JsonEstimates], shape: str) -> bytes:
    """``models``: the estimates of each model by its name, in the shape of the readings."""
    laid = _rows if shape == "rows" else _columns
    told = (b'"%b":%b' % (key.encode(), laid(member)) for key, member in members.items())
    return b'"models":{' + b",".join(told) + b"}"


def rows_of(answer: JsonEstimates) -> list[dict[str, Any]]:
    """The answer row by row; NaN where there is no number."""
    words, places = combinations(answer.flags)
    told = [words[place] for place in places.tolist()]
    cells = [*answer.texts.values(), *(values.tolist() for values in answer.numbers.values()), told]
    names = (*answer.names, "flags")
    return [dict(zip(names, row, strict=True)) for row in zip(*cells, strict=True)]


def with_rest(rows: Sequence[Mapping[str, Any]], rest: bytes) -> bytes:
    """Rows and what stands behind them.

    rest: a JSON object without its opening brace.
    """
    return b'{"estimates":%b,%b' % (orjson.dumps(rows), rest)


def tabulate(answer: JsonEstimates, media_type: str) -> bytes:
    """The estimates alone, as a table."""
    frame, text = _frame(answer), BytesIO()
    if media_type == "text/csv":
        return frame.with_columns(pl.col("flags").list.join(";")).write_csv().encode()
    if media_type == "application/vnd.apache.parquet":
        frame.write_parquet(text)
    elif media_type == "application/vnd.apache.arrow.stream":
        frame.write_ipc_stream(text)
    else:
        frame.write_ndjson(text)
    return text.getvalue()


def _rows(answer: JsonEstimates) -> bytes:
    """Row by row; a frame is worth its price only for many."""
    if len(answer.flags) > FEW:
        return _frame(answer).write_json().encode()
    return orjson.dumps(rows_of(answer))


def _columns(answer: JsonEstimates) -> bytes:
    """Column by column: orjson writes NaN as null, each combination of flags is spelt once."""
    words, places = combinations(answer.flags)
    spelt = [orjson.dumps(slugs) for slugs in words]
    parts = [
        orjson.dumps({**answer.texts, **answer.numbers}, option=orjson.OPT_SERIALIZE_NUMPY)[:-1],
        b',"flags":[',
        b",".join([spelt[place] for place in places.tolist()]),
        b"]}",
    ]
    return b"".join(parts)


def _frame(answer: JsonEstimates) -> pl.DataFrame:
    columns: dict[str, Any] = {
        name: pl.Series(name, values, dtype=pl.String) for name, values in answer.texts.items()
    }
    for name, values in answer.numbers.items():
        columns[name] = pl.Series(name, values).fill_nan(None)
    words, places = combinations(answer.flags)
    spelt = pl.Series("flags", words, dtype=pl.List(pl.String))
    columns["flags"] = spelt.gather(places)
    return pl.DataFrame(columns)
