"""JSON in which an object says the same key twice: which value is meant cannot be known.

RFC 8259 leaves open what a reader makes of it; parsers keep the last one and say nothing.
"""

import json
import re
from collections.abc import Sequence
from itertools import chain
from typing import Any

_NAMED = re.compile(rb'"\s*:')
"""The end of a key; now and then of a piece of text, which costs a second look."""
_NESTED = {dict, list}


class Twice(Exception):
    """An object with a key that stands twice in it, and the time it states, if any."""

    def __init__(self, key: str, pairs: Sequence[tuple[str, Any]]) -> None:
        super().__init__(key)
        self.key = key
        self.values = [value for name, value in pairs if name == key]
        self.time = next((value for name, value in pairs if name == "time"), None)


def found_twice(body: bytes, document: Any) -> Twice | None:
    """The first key that stands twice in an object of the body; document: what was read of it."""
    if _keys_written(body) == _keys_in(document):
        return None  # as many keys were read as stand in the body
    try:
        json.loads(body, object_pairs_hook=_once)
    except Twice as twice:
        return twice
    except (ValueError, RecursionError):
        pass  # numbers of thousands of digits, deep nesting: judged by what reads them
    return None


def lines_with_keys_twice(lines: Sequence[bytes], rows: Sequence[Any]) -> list[int]:
    """Which lines, of those that are objects, say a key twice."""
    if _keys_written(b"\n".join(lines)) == sum(map(len, rows)):
        return []  # each line has as many keys as were read of it
    return [
        place
        for place, (line, row) in enumerate(zip(lines, rows, strict=True))
        if row and found_twice(line, row) is not None
    ]


def _keys_written(text: bytes) -> int:
    """How many keys JSON has, or more where the end of a key occurs in a piece of text."""
    return len(_NAMED.findall(text))


def _keys_in(document: Any) -> int:
    """How many keys all objects of a document have; rows of numbers and text are not walked."""
    count, left = 0, [document] if type(document) in _NESTED else []
    while left:
        each = left.pop()
        if type(each) is dict:
            count += len(each)
            left += [value for value in each.values() if type(value) in _NESTED]
        elif len(each) == 1 or set(map(type, each)) != {dict}:
            if each and type(each[0]) in _NESTED:
                left += [value for value in each if type(value) in _NESTED]
        else:
            count += sum(map(len, each))
            values = chain.from_iterable(map(dict.values, each))
            if _NESTED & set(map(type, values)):
                left += [v for row in each for v in row.values() if type(v) in _NESTED]
    return count


def _once(pairs: list[tuple[str, Any]]) -> None:
    if len(pairs) < 2:
        return
    seen = set()
    for name, _ in pairs:
        if name in seen:
            raise Twice(name, pairs)
        seen.add(name)
