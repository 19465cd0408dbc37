"""A request's body as JSON, in which no object says the same key twice, or what to send instead."""

import codecs
import re
from collections.abc import Sequence
from typing import Any

import orjson

from service.errors import Malformed, Unprocessable
from service.faults import Fault, shown
from service.formats.errors import MAGIC, looks_like
from service.formats.header import RECOGNISED, folded
from service.formats.json.keys_twice import Twice, found_twice

NOT_JSON = re.compile(rb"[ ,:\[-]*?(-?(?:NaN|nan|Infinity|Inf|inf))")
"""Words that other writers put where a number is none or without end."""
SEPARATORS = re.compile("[,;\t]")
LINE = 4096
"""Bytes of a first line that are looked at to tell what a body is."""


def object_of(body: bytes, example: str, *, tables: bool = False) -> dict[str, Any]:
    """The object a body holds.

    example: what such an object looks like. tables: whether CSV and NDJSON are taken there, too.
    Raises Malformed where it is no JSON, and Unprocessable where it is another kind of JSON or an
    object has a key twice.
    """
    if not body.strip():
        raise Malformed(f"the body is not JSON, but empty; expected an object such as {example}")
    document = loaded(body, tables=tables)
    if not isinstance(document, dict):
        detail = f"expected an object such as {example}, found {shown(document)}"
        raise Unprocessable(detail, [Fault(detail, "#")])
    return document


def loaded(body: bytes, *, tables: bool = True) -> Any:
    """What the body holds; a byte order mark before it is read past.

    Raises Malformed where it is no JSON, Unprocessable where an object has a key twice: which of
    both values is meant cannot be known.
    """
    body = body.removeprefix(codecs.BOM_UTF8)
    try:
        document = orjson.loads(body)
    except orjson.JSONDecodeError as error:
        told = _other_text(body) or f"{error}{_hint(body, error.pos, tables=tables)}"
        raise Malformed(f"the body is not JSON: {told}") from None
    twice = found_twice(body, document)
    if twice is None:
        return document
    detail = _told_twice(twice)
    raise Unprocessable(detail, [Fault(detail, "#")])


def _told_twice(twice: Twice) -> str:
    place = f" of the reading of {shown(twice.time)}" if twice.time is not None else ""
    found = " and ".join(shown(value) for value in twice.values[:2])
    return (
        f"the key {shown(twice.key)} stands twice in an object{place}, with {found}: send it once"
    )


def _other_text(body: bytes) -> str | None:
    """What a body is that is no text in UTF-8; None where it is."""
    if b"\0" in body[:2]:
        return "found UTF-16 text: save it as UTF-8"
    meant = looks_like(body[:MAGIC])
    return None if meant is None else f"found {meant}"


def _hint(body: bytes, place: int, *, tables: bool) -> str:
    """What is most likely meant, where that can be told."""
    word = NOT_JSON.match(body[max(0, place - 1) : place + 9])
    if word is not None:
        mend = (
            ": send null where there is no number"
            if tables
            else ". Leave out what is not known; a trace or a sweep has no gaps: send the part "
            "of it that is complete"
        )
        return f"; found {word[1].decode()} there: JSON has no NaN and no Infinity{mend}"
    return _table_hint(body) if tables else ""


def _table_hint(body: bytes) -> str:
    """That the body is a table under another media type."""
    first = body.lstrip()[:LINE].partition(b"\n")[0].decode("utf-8", "replace")
    names: Sequence[str] = SEPARATORS.split(first)
    if any(folded(name.strip(' "\r')) in RECOGNISED for name in names) and "{" not in first:
        return "; the first line looks like the header of a table: send it as text/csv"
    try:
        row = orjson.loads(first)
    except orjson.JSONDecodeError:
        return ""
    if not isinstance(row, dict):
        return ""
    return "; one object on each line is NDJSON: send it as application/x-ndjson"
