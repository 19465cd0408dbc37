"""The body of a request as JSON, in which no object says the same key twice."""

import json
from collections.abc import Sequence
from typing import Any

import orjson

from service.errors import Malformed, Unprocessable
from service.faults import Fault, shown


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
    try:
        json.loads(body, object_pairs_hook=_once)
    except _Twice as twice:
        place = f" of the reading of {shown(twice.time)}" if twice.time is not None else ""
        detail = f"the key {shown(twice.key)} stands twice in an object{place}: send it once"
        raise Unprocessable(detail, [Fault(detail, "#")]) from None
    except (ValueError, RecursionError):
        return document  # numbers of thousands of digits, deep nesting: judged by what reads them
    return document


def _once(pairs: list[tuple[str, Any]]) -> None:
    if len(pairs) < 2:
        return
    seen = set()
    for name, _ in pairs:
        if name in seen:
            raise _Twice(name, pairs)
        seen.add(name)
