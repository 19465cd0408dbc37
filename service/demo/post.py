"""Posting readings over HTTP, with nothing but the standard library, and reading the answer."""

import json
import urllib.request
from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True, slots=True)
class Posted:
    """What came back: one row per reading."""

    rows: list[dict[str, Any]]
    flagged: int
    model: str
    advisories: list[str]


def post_json(address: str, document: dict[str, Any]) -> Posted:
    """A JSON request; columns are turned into rows."""
    body, _ = _post(f"{address}/v1/estimates", "application/json", json.dumps(document))
    answer = json.loads(body)
    rows = answer["estimates"]
    if isinstance(rows, dict):
        rows = [dict(zip(rows, cells, strict=True)) for cells in zip(*rows.values(), strict=True)]
    flagged = sum(bool(row["flags"]) for row in rows)
    texts = [said["text"] for said in answer["advisories"]]
    return Posted(rows, flagged, answer["mixing_model"]["name"], texts)


def post_table(address: str, query: str, media_type: str, table: str) -> Posted:
    """A table; the answer is asked for as NDJSON, whatever the table is."""
    body, headers = _post(f"{address}/v1/estimates?{query}&format=ndjson", media_type, table)
    rows = [json.loads(line) for line in body.splitlines()]
    return Posted(rows, int(headers["Flagged-Count"]), headers["Mixing-Model"], [])


def _post(url: str, media_type: str, text: str) -> tuple[bytes, Any]:
    request = urllib.request.Request(  # noqa: S310 - always http, always this machine
        url, text.encode(), {"Content-Type": media_type}, method="POST"
    )
    with urllib.request.urlopen(request, timeout=30) as answer:  # noqa: S310
        return answer.read(), answer.headers
