"""Moments as RFC 3339 with an offset, and as whole microseconds since 1970."""

import re
from collections.abc import Sequence
from datetime import UTC, datetime, timedelta

import numpy as np
import polars as pl
from numpy.typing import NDArray

SECOND = 1_000_000
_EPOCH = datetime(1970, 1, 1, tzinfo=UTC)
_MICROSECOND = timedelta(microseconds=1)

RFC_3339 = (
    r"\d{4}-\d{2}-\d{2}[Tt ]\d{2}:\d{2}:[0-5]\d(\.\d{1,9})?"
    r"([Zz]|[+-]\d{2}:\d{2})"
)
_WHOLE = re.compile(RFC_3339, re.ASCII)
_LOCAL = re.compile(RFC_3339.rpartition("(")[0], re.ASCII)


class TimeError(ValueError):
    """A text is no moment; the message says why."""


def microseconds(text: str) -> int:
    """Microseconds since 1970 of an RFC 3339 text; what is finer is cut off.

    Raises TimeError: for a missing or unknown offset, other forms of ISO 8601, impossible dates.
    """
    if not _WHOLE.fullmatch(text):
        raise TimeError(_complaint(text))
    if text.endswith("-00:00"):
        raise TimeError("the offset -00:00 says that the offset is not known; send Z or +02:00")
    try:
        return (datetime.fromisoformat(text.upper()) - _EPOCH) // _MICROSECOND
    except (ValueError, OverflowError):
        raise TimeError("there is no such date or time of day") from None


def rfc3339(moment: int) -> str:
    """The moment in UTC, with as many decimals as it has."""
    return text_of([moment])[0]


def text_of(moments: Sequence[int] | NDArray[np.int64]) -> pl.Series:
    """Moments as text in UTC, each with a fraction of a second only where it has one."""
    values = np.asarray(moments, dtype=np.int64)
    stamps = pl.Series(values).cast(pl.Datetime("us"))
    whole = stamps.dt.to_string("%Y-%m-%dT%H:%M:%SZ")
    odd = values % SECOND != 0
    if not odd.any():
        return whole
    return stamps.dt.to_string("%Y-%m-%dT%H:%M:%S%.6fZ").zip_with(pl.Series(odd), whole)


def read_column(text: pl.Series) -> tuple[NDArray[np.int64], NDArray[np.bool_]]:
    """A column of texts as microseconds, and which rows are moments; the others hold 0."""
    stripped = text.fill_null("").str.strip_chars()
    fits = stripped.str.contains(f"^{RFC_3339}$") & ~stripped.str.ends_with("-00:00")
    upper = stripped.str.to_uppercase().str.replace("Z", "+00:00", literal=True)
    joined = upper.str.replace(" ", "T", literal=True)
    parsed = joined.str.to_datetime("%Y-%m-%dT%H:%M:%S%.f%:z", time_unit="us", strict=False)
    known = (fits & parsed.is_not_null()).to_numpy()
    return parsed.dt.epoch("us").fill_null(0).to_numpy().astype(np.int64), known


def _complaint(text: str) -> str:
    if _LOCAL.fullmatch(text):
        return "the time has no offset from UTC: add Z, or an offset such as +02:00"
    return "expected RFC 3339 with an offset, such as 2026-05-04T06:00:00Z"
