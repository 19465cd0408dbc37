"""Answers from the store, page by page: media type, entity tag, link to what follows."""

from collections.abc import Callable, Sequence
from dataclasses import replace
from urllib.parse import urlencode

import anyio.to_thread
from fastapi import Request, Response

from service.answers.columns import APPENDED
from service.errors import Unprocessable
from service.faults import Fault, hint, shown
from service.negotiate import VARY, choose
from service.routes.etag import matches
from service.stations.ask.answers import JSON, OFFERED, encoded
from service.stations.ask.asked import Asked
from service.stations.ask.questions import Page, Scene, scene_of, tag_of

MOST_TOLD = 5
"""Reasons in a header; of the others it says how many there are."""
KEYS = frozenset({"time", "end", "probe", "depth", "age_seconds", "flags"})
"""Columns that an answer has whatever is asked for."""


async def answered(
    request: Request, name: str, asked: Asked, question: Callable[[Scene, Asked], Page], key: str
) -> Response:
    """The answer to a question about a station; 304 where the caller has it already.

    key: under which JSON holds the rows.

    A table that names no limit holds all rows an answer may; where rows are left, `Truncated` and
    the link to them are among its headers.
    """
    media_type = choose(request.headers.get("accept"), request.query_params.get("format"), OFFERED)

    def work() -> Response:
        scene = scene_of(request.app.state.shelf, name, asked)
        told = f"{request.url.path}?{request.url.query} {media_type}"
        tag = tag_of(scene, asked, told)
        headers = {**VARY, "Store-Revision": str(scene.revision), "Cache-Control": "no-cache"}
        if tag is not None:
            headers["ETag"] = tag
            if matches(", ".join(request.headers.getlist("if-none-match")), tag):
                return Response(None, 304, headers)
        most = request.app.state.settings.page_rows
        whole = media_type != JSON and not asked.limited
        page = _with_columns(question(scene, replace(asked, limit=most) if whole else asked), asked)
        headers["Row-Count"] = str(page.frame.height)
        rest = dict(page.rest)
        if media_type != JSON and page.found is not None and page.found.troubles:
            headers["Not-Estimated"] = _in_header(page.found.troubles)
        if page.after is not None:
            rest["next"] = next_of(request, page.after)
            headers["Link"] = f'<{rest["next"]}>; rel="next"'
            headers["Truncated"] = "true"
        return Response(
            encoded(page.frame, media_type, key, rest, asked.shape), 200, headers, media_type
        )

    return await anyio.to_thread.run_sync(work)


def _with_columns(page: Page, asked: Asked) -> Page:
    """The page with the columns asked for beside its keys; raises Unprocessable for others."""
    if asked.columns is None:
        return page
    there = page.frame.columns
    known = APPENDED.union(there)
    faults = [
        Fault(f"no answer has a column {shown(name)}{hint(name, known)}", "?columns")
        for name in asked.columns
        if name not in known and there
    ]
    if faults:
        raise Unprocessable("columns names what no answer has", faults)
    kept = [name for name in there if name in KEYS or name in asked.columns]
    return replace(page, frame=page.frame.select(kept))


def _in_header(troubles: Sequence[str]) -> str:
    """Why rows were not estimated, as far as a header can say it."""
    several = list(dict.fromkeys(troubles))
    told = [text[:200] for text in several[:MOST_TOLD]]
    if len(several) > MOST_TOLD:
        told.append(f"and {len(several) - MOST_TOLD} more")
    return "; ".join(told).encode("ascii", "backslashreplace").decode()


def next_of(request: Request, after: str) -> str:
    """The address of the next page: the same question, from there."""
    pairs = [pair for pair in request.query_params.multi_items() if pair[0] != "after"]
    return f"{request.url.path}?{urlencode([*pairs, ('after', after)])}"
