"""Strong entity tags over the bytes of an answer, and the answer to those who have it already."""

import hashlib
import re
from collections.abc import Mapping

from fastapi import Request, Response

_TAG = re.compile(r'(?:W/)?("[^"]*")')


def tag_of(body: bytes) -> str:
    """The strong entity tag of these bytes."""
    return f'"{hashlib.sha256(body).hexdigest()[:32]}"'


def matches(if_none_match: str, tag: str) -> bool:
    """Whether a list of tags, weak ones included, or * names this one."""
    return if_none_match.strip() == "*" or tag in _TAG.findall(if_none_match)


def tagged(
    request: Request, body: bytes, media_type: str, headers: Mapping[str, str] | None = None
) -> Response:
    """``body`` with its tag; 304 without a body where If-None-Match names it."""
    tag = tag_of(body)
    known = {"ETag": tag, "Cache-Control": "no-cache", **(headers or {})}
    if matches(", ".join(request.headers.getlist("if-none-match")), tag):
        return Response(None, 304, known)
    return Response(body, 200, known, media_type)
