"""The body of a request as JSON, in which no object says the same key twice."""

import json
import re
from collections.abc import Sequence
from typing import Any

import orjson

from service.errors import Malformed, Unprocessable
from service.faults import Fault, shown

_NAMED = re.compile(rb'"\s*:')
"""The end of a key; now and then of a piece of text, which costs a second look."""


class _Twice(Exception):
    """An object with a key that stands twice in it."""

    def __init__(self, key: str, pairs: Sequence[tuple[str, Any]]) -> None:
        super().__init__(key)
        self.key = key
        self.time = next((value for name, value in pairs if name == "time"), None)


def loaded(body: bytes) -> Any:
    """What the body holds.

    Raises Malformed where it is no JSON, Unprocessable where an object has a key twice: which of
    both values is meant cannot be known.
    """
    try:
        document = orjson.loads(body)
    except orjson.JSONDecodeError as error:
        raise Malformed(f"the body is not JSON: {error}") from None
    if len(_NAMED.findall(body)) == _keys_in(document):
        return document  # as many keys were read as stand in the body
    try:
        json.loads(body, object_pairs_hook=_once)
    except _Twice as twice:
        place = f" of the reading of {shown(twice.time)}" if twice.time is not None else ""
        detail = f"the key {shown(twice.key)} stands twice in an object{place}: send it once"
        raise Unprocessable(detail, [Fault(detail, "#")]) from None
    except (ValueError, RecursionError):
        return document  # numbers of thousands of digits, deep nesting: judged by what reads them
    return document


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
            raise _Twice(name, pairs)
        seen.add(name)
