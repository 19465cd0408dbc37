"""Which of the offered media types to answer in: Accept with q-values, or ?format=."""

import re
from collections.abc import Mapping
from types import MappingProxyType

from service.errors import NotAcceptable

VARY: Mapping[str, str] = MappingProxyType({"Vary": "Accept"})
"""Header of every answer whose form was chosen by Accept."""

_QVALUE = re.compile(r"0(\.\d*)?|1(\.0*)?")


def choose(accept: str | None, format_name: str | None, offered: Mapping[str, str]) -> str:
    """The media type to answer in.

    accept: the Accept header; None or empty: anything.
    format_name: the ?format= parameter, one of the keys of ``offered``; it beats Accept.
    offered: media types by their short name, the preferred one first.
    Raises NotAcceptable when nothing that is offered is accepted.
    """
    if format_name is not None:
        if format_name not in offered:
            raise _refusal(f"format={format_name[:80]} is not offered", offered)
        return offered[format_name]
    if not (accept or "").strip():
        return next(iter(offered.values()))
    wishes = [wish for part in (accept or "").split(",") if (wish := _wish(part))]
    media_types = list(offered.values())
    ranked = [(*_rank(media_type, wishes), -place) for place, media_type in enumerate(media_types)]
    quality, _, place = max(ranked)
    if quality <= 0:
        raise _refusal("none of the media types in Accept is offered", offered)
    return media_types[-place]


def _wish(part: str) -> tuple[str, float] | None:
    """One element of Accept as (range, quality); None where it is not one."""
    media_range, *parameters = (piece.strip().lower() for piece in part.split(";"))
    if media_range.count("/") != 1:
        return None
    quality = next((p[2:] for p in parameters if p.startswith("q=")), "1")
    return (media_range, float(quality)) if _QVALUE.fullmatch(quality) else None


def _rank(media_type: str, wishes: list[tuple[str, float]]) -> tuple[float, int]:
    """Quality of a media type, and how exactly it was asked for: 3 by name, 1 by */*, 0 not."""
    main = media_type.partition("/")[0]
    ranges = {media_type: 3, f"{main}/*": 2, "*/*": 1}
    matches = [(ranges[name], quality) for name, quality in wishes if name in ranges]
    if not matches:
        return 0.0, 0
    exactness, quality = max(matches)
    return quality, exactness


def _refusal(reason: str, offered: Mapping[str, str]) -> NotAcceptable:
    listed = ", ".join(f"{media_type} (format={name})" for name, media_type in offered.items())
    return NotAcceptable(f"{reason}; offered: {listed}", headers=VARY)
