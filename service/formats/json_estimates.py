"""application/json estimates, as rows or as columns: NaN becomes null, flags become lists."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import orjson
import polars as pl
from numpy.typing import NDArray

from models.conversion import Units, from_si
from models.estimate import Estimates
from models.flags import Flags, slugs_of
from models.relation import Array
from service.formats.json_readings import JsonReadings

PASSED = ("time", "depth")
"""What of a reading an estimate repeats, so that it can be told whose it is."""


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


def laid_out(estimates: Estimates, readings: JsonReadings, units: Units) -> JsonEstimates:
    """What tells each reading apart, and its estimates in the caller's units."""
    numbers = {name: readings.numbers[name] for name in PASSED if name in readings.numbers}
    for name, values in estimates.columns.items():
        numbers[name] = np.ascontiguousarray(from_si(name, values, units))
    texts = {name: readings.texts[name] for name in PASSED if name in readings.texts}
    return JsonEstimates(texts, numbers, estimates.flags)


def encode(answer: JsonEstimates, shape: str, rest: Mapping[str, Any]) -> bytes:
    """The whole answer: ``estimates`` in the shape of the readings, then ``rest``."""
    body = _rows(answer) if shape == "rows" else _columns(answer)
    return b'{"estimates":' + body + b"," + orjson.dumps(rest)[1:]


def tabulate(answer: JsonEstimates, media_type: str) -> bytes:
    """The estimates alone, as a table."""
    if media_type == "text/csv":
        flat = _frame(answer).with_columns(pl.col("flags").list.join(";"))
        return flat.write_csv().encode()
    return _frame(answer).write_ndjson().encode()


def _rows(answer: JsonEstimates) -> bytes:
    return _frame(answer).write_json().encode()


def _columns(answer: JsonEstimates) -> bytes:
    """Column by column: orjson writes NaN as null, each combination of flags is spelt once."""
    combinations, places = _combinations(answer.flags)
    spelt = [orjson.dumps(slugs) for slugs in combinations]
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
    combinations, places = _combinations(answer.flags)
    spelt = pl.Series("flags", combinations, dtype=pl.List(pl.String))
    columns["flags"] = spelt.gather(places)
    return pl.DataFrame(columns)


def _combinations(flags: Flags) -> tuple[list[list[str]], NDArray[np.intp]]:
    """Every combination of flags there is, spelt out, and which of them each row has."""
    if not flags.any():
        return [[]], np.zeros(flags.size, dtype=np.intp)
    masks, places = np.unique(flags, return_inverse=True)
    return [list(slugs_of(mask)) for mask in masks.tolist()], places
