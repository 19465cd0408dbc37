"""JSON in which an object says the same key twice: which value is meant cannot be known.

RFC 8259 leaves open what a reader makes of it; parsers keep the last one and say nothing.
"""

import json
import re
from collections.abc import Sequence
from typing import Any

_NAMED = re.compile(rb'"\s*:')
"""The end of a key; now and then of a piece of text, which costs a second look."""


class Twice(Exception):
    """An object with a key that stands twice in it, and the time it states, if any."""

    def __init__(self, key: str, pairs: Sequence[tuple[str, Any]]) -> None:
        super().__init__(key)
        self.key = key
        self.time = next((value for name, value in pairs if name == "time"), None)


def found_twice(body: bytes, document: Any) -> Twice | None:
    """The first key that stands twice in an object of the body; document: what was read of it."""
    if len(_NAMED.findall(body)) == _keys_in(document):
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
    if sum(line.count(b'":') for line in lines) == sum(map(len, rows)):
        return []  # written without a space before the colon, and each key once
    return [
        place
        for place, (line, row) in enumerate(zip(lines, rows, strict=True))
        if row and found_twice(line, row) is not None
    ]


def _keys_in(document: Any) -> int:
    """How many keys all objects of a document have."""
    count, left = 0, [document]
    while left:
        each = left.pop()
        if isinstance(each, dict):
            count += len(each)
            left.extend(value for value in each.values() if isinstance(value, dict | list))
        elif isinstance(each, list) and each and isinstance(each[0], dict | list):
            left.extend(value for value in each if isinstance(value, dict | list))
    return count


def _once(pairs: list[tuple[str, Any]]) -> None:
    if len(pairs) < 2:
        return
    seen = set()
    for name, _ in pairs:
        if name in seen:
            raise Twice(name, pairs)
        seen.add(name)
