"""Text and numbers: a column of cells as numbers, a column of numbers as text."""

from typing import Any

import numpy as np
import polars as pl
from numpy.typing import NDArray

from models.relation import Array

MISSING = ("", "nan", "na", "n/a", "#n/a", "null", "none", "inf", "-inf", "m", "-", "--", "---")
"""What loggers write where there is no value, in any case and with blanks around it."""

Marks = NDArray[np.bool_]


def numbers_in(text: pl.Series) -> tuple[Array, Marks]:
    """The numbers of a column of cells, and where a cell is neither a number nor missing.

    text: shape (n,), null meaning empty. Numbers: shape (n,), NaN where there is none.

    A number has a decimal point if anything, no thousands marks, and is finite: 1e999, 17,2 and
    1_000 are no numbers. Most columns hold nothing else, so only the other cells are looked at.
    """
    values = _cast(text)
    unreadable = np.zeros(len(values), dtype=np.bool_)
    doubtful = np.flatnonzero(~np.isfinite(values))
    if doubtful.size:
        rest = text.gather(doubtful).fill_null("").str.strip_chars()
        again = _cast(rest)
        number = np.isfinite(again)
        values[doubtful] = np.where(number, again, np.nan)
        unreadable[doubtful] = ~(number | is_missing(rest))
    return values, unreadable


def is_missing(text: pl.Series) -> Marks:
    """Where a column of cells says that there is no value."""
    words = text.fill_null("").str.strip_chars().str.to_lowercase()
    return words.is_in(MISSING).to_numpy()


def decimal_commas(text: pl.Series) -> bool:
    """Whether a column is written with decimal commas: three numbers or more, each with one."""
    written = text.filter(pl.Series(~is_missing(text)))
    pattern = r"^\s*[+-]?\d*,\d+\s*$"
    return len(written) >= 3 and bool(written.str.contains(pattern).all())


def numbers_as_text(values: Array) -> pl.Series:
    """Shortest text that reads back as the same number; null where there is no finite number."""
    return finite(values).cast(pl.String)


def finite(values: Array) -> pl.Series:
    """A column with null where there is no finite number."""
    known = np.isfinite(values)
    column = np.ascontiguousarray(values)
    if known.all():
        return pl.Series(column)
    return pl.Series(np.where(known, column, np.nan), nan_to_null=True)


def json_text(text: pl.Series) -> pl.Series:
    """Each text as a JSON string; null stays null."""
    spelt = pl.DataFrame({"": text}).to_struct().struct.json_encode()
    return spelt.str.strip_prefix('{"":').str.strip_suffix("}").replace("null", None)


def csv_text(text: pl.Series) -> pl.Series:
    """Each text as a CSV cell, in quotes where RFC 4180 asks for them; null is empty."""
    text = text.fill_null("")
    return quoted(text).zip_with(text.str.contains('[",\r\n]'), text)


def quoted(text: pl.Series) -> pl.Series:
    """Each text as a CSV cell in quotes."""
    return '"' + text.str.replace_all('"', '""') + '"'


def _cast(text: pl.Series) -> Array:
    values: Any = text.cast(pl.Float64, strict=False).to_numpy()
    return np.array(values, dtype=np.float64)
