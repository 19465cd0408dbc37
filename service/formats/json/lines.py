"""Lines of NDJSON as rows, and the values of their keys as numbers or as text.

Lines are parsed one by one, each by one call: joined to one list and parsed at once, a malformed
line could lend its braces to its neighbours.
"""

import json
import math
from collections.abc import Iterable, Mapping, Sequence
from itertools import chain
from typing import Any, NoReturn

import numpy as np
import orjson

from models.relation import Array
from service.formats.cells import MISSING, Marks
from service.formats.json.keys_twice import lines_with_keys_twice

Row = Mapping[str, Any]
NOTHING: Row = {}

DEEPEST = 100
"""Brackets within brackets; a line with more is not taken apart."""


class Literal(str):
    """A number as it was written."""

    __slots__ = ()


def rows_of(lines: Sequence[bytes]) -> tuple[list[Row], Marks]:
    """The objects on some lines, and which lines hold none; their row is empty.

    NaN and Infinity are not JSON (RFC 8259, section 6), so a line with one holds no object. A
    number too large for a double is JSON and stays, as it was written. An object that says a key
    twice is none, for which value is meant cannot be known.
    """
    try:
        found = list(map(orjson.loads, lines))
    except orjson.JSONDecodeError:
        found = [_parsed(line) for line in lines]
    if set(map(type, found)) <= {dict} and not _may_be_deep(b"".join(lines), len(lines)):
        rows = found
    else:
        rows = [
            row
            if isinstance(row, dict) and not (_may_be_deep(line, 1) and _is_deep(row))
            else NOTHING
            for line, row in zip(lines, found, strict=True)
        ]
    for place in lines_with_keys_twice(lines, rows):
        rows[place] = NOTHING
    return rows, np.array([row is NOTHING for row in rows], dtype=np.bool_)


def rows_as_written(lines: Sequence[bytes], broken: Marks) -> list[Row]:
    """The same objects, each value as the text of a cell.

    Numbers and texts are to the letter, null is nothing, what is nested is JSON.
    """
    return [
        NOTHING if no_object else _as_written(line)
        for line, no_object in zip(lines, broken.tolist(), strict=True)
    ]


def first_rows(rows: Sequence[Row]) -> dict[tuple[str, ...], int]:
    """Every set of keys that occurs, in order, and the first row that has it."""
    last_to_first = range(len(rows) - 1, -1, -1)
    shapes = dict(zip(map(tuple, reversed(rows)), last_to_first, strict=True))
    return dict(sorted(shapes.items(), key=lambda item: item[1]))


def keys_of(shapes: Iterable[tuple[str, ...]]) -> tuple[str, ...]:
    """Every key, in the order they first occur."""
    return tuple(dict.fromkeys(chain.from_iterable(shapes)))


def numbers_of(values: Sequence[Any]) -> tuple[Array, Marks]:
    """Numbers, NaN where there is none, and where a value is neither number nor missing.

    Only JSON numbers are numbers: neither true nor "17.2" is one. null is missing, and so are
    the words that loggers write for it.
    """
    if set(map(type, values)) <= {float, int, type(None)}:
        return np.array(values, dtype=np.float64), np.zeros(len(values), dtype=np.bool_)
    numbers = [_number(value) for value in values]
    told = [value is None or _is_missing(value) for value in values]
    found = np.array(numbers, dtype=np.float64)
    return found, np.isnan(found) & ~np.array(told, dtype=np.bool_)


def _as_written(line: bytes) -> Row:
    text = line.decode().lstrip()
    row: dict[str, Any] = _TEXTS.raw_decode(text)[0]
    if set(map(type, row.values())) == {str}:
        return row
    if any(isinstance(value, dict | list) for value in row.values()):
        row = _LITERALS.raw_decode(text)[0]
    return {key: value if isinstance(value, str) else _cell(value) for key, value in row.items()}


def _cell(value: Any) -> str:
    return "" if value is None else _json(value)


def _json(value: Any) -> str:
    if isinstance(value, Literal):
        return value
    if isinstance(value, Mapping):
        return "{" + ",".join(f"{_json(key)}:{_json(item)}" for key, item in value.items()) + "}"
    if isinstance(value, list):
        return "[" + ",".join(map(_json, value)) + "]"
    return json.dumps(value, ensure_ascii=False)


def _refuse(constant: str) -> NoReturn:
    raise ValueError(constant)


_TEXTS = json.JSONDecoder(parse_float=str, parse_int=str)
_LITERALS = json.JSONDecoder(parse_float=Literal, parse_int=Literal, parse_constant=_refuse)


def _parsed(line: bytes) -> Any:
    """One line; None where it is not JSON, or has half a surrogate pair."""
    try:
        return orjson.loads(line)
    except orjson.JSONDecodeError:
        pass
    try:
        value = _LITERALS.decode(line.decode())
        json.dumps(value, ensure_ascii=False).encode()
    except (ValueError, RecursionError):
        return None
    return value


def _may_be_deep(objects: bytes, count: int) -> bool:
    """Whether one of so many objects could be: each of the others has a bracket at least."""
    return objects.count(b"[") + objects.count(b"{") >= count + DEEPEST


def _is_deep(row: Row) -> bool:
    """Whether a value lies within more than DEEPEST brackets; without recursion."""
    level: list[Any] = [row]
    for _ in range(DEEPEST + 1):
        level = [
            item
            for value in level
            if isinstance(value, dict | list)
            for item in (value.values() if isinstance(value, dict) else value)
        ]
        if not level:
            return False
    return True


def _number(value: Any) -> float:
    if type(value) in {float, int, Literal}:
        number = float(value)
        return number if math.isfinite(number) else math.nan
    return math.nan


def _is_missing(value: Any) -> bool:
    return type(value) is str and value.strip().lower() in MISSING
