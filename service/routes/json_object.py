"""A request's body as a JSON object, or a refusal that says what to send."""

import re
from typing import Any

import orjson

from service.errors import Malformed, Unprocessable
from service.faults import Fault, shown

NOT_JSON = re.compile(rb"[ ,:\[-]*?(-?(?:NaN|nan|Infinity|Inf|inf))")
"""Words that other writers put where a number is none or without end."""


def object_of(body: bytes, example: str) -> dict[str, Any]:
    """The object a body holds.

    example: what such an object looks like.
    Raises Malformed where it is no JSON, and Unprocessable where it is another kind of JSON.
    """
    if not body.strip():
        raise Malformed(f"the body is not JSON, but empty; expected an object such as {example}")
    try:
        document = orjson.loads(body)
    except orjson.JSONDecodeError as error:
        raise Malformed(f"the body is not JSON: {error}{_hint(body, error.pos)}") from None
    if not isinstance(document, dict):
        detail = f"expected an object such as {example}, found {shown(document)}"
        raise Unprocessable(detail, [Fault(detail, "#")])
    return document


def _hint(body: bytes, place: int) -> str:
    """What is meant where other writers put a word that JSON does not have."""
    word = NOT_JSON.match(body[max(0, place - 1) : place + 9])
    if word is None:
        return ""
    return (
        f"; found {word[1].decode()} there: JSON has no NaN and no Infinity. Leave out what is not "
        "known; a trace or a sweep has no gaps: send the part of it that is complete"
    )
