"""The body of a request as JSON, in which no object says the same key twice."""

from typing import Any

import orjson

from service.errors import Malformed, Unprocessable
from service.faults import Fault, shown
from service.formats.json.keys_twice import found_twice


def loaded(body: bytes) -> Any:
    """What the body holds.

    Raises Malformed where it is no JSON, Unprocessable where an object has a key twice: which of
    both values is meant cannot be known.
    """
    try:
        document = orjson.loads(body)
    except orjson.JSONDecodeError as error:
        raise Malformed(f"the body is not JSON: {error}") from None
    twice = found_twice(body, document)
    if twice is None:
        return document
    place = f" of the reading of {shown(twice.time)}" if twice.time is not None else ""
    detail = f"the key {shown(twice.key)} stands twice in an object{place}: send it once"
    raise Unprocessable(detail, [Fault(detail, "#")])
