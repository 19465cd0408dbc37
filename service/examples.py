"""The published examples: requests that are answered just so, shown in the OpenAPI description."""

import json
from collections.abc import Iterator
from importlib.resources import files
from typing import Any


def examples() -> Iterator[tuple[str, str, dict[str, Any]]]:
    """Operation id, name and content of every example, in the order of their names."""
    folder = files("openapi_examples")
    for entry in sorted(folder.iterdir(), key=lambda entry: entry.name):
        operation, _, rest = entry.name.partition(".")
        name, _, suffix = rest.partition(".")
        if suffix == "json":
            yield operation, name, json.loads(entry.read_text("utf-8"))


def first_lines(name: str, count: int = 4) -> str:
    """The beginning of a file of the examples."""
    text = (files("openapi_examples") / name).read_text("utf-8")
    return "".join(text.splitlines(keepends=True)[:count])


def show(operation: dict[str, Any], name: str, example: dict[str, Any]) -> None:
    """Put one example where the description of its operation shows it."""
    request, answer = example["request"], example["response"]
    if "json" in request:
        body = operation["requestBody"]["content"]["application/json"]
        _add(body, name, example["summary"], request["json"])
    elif "file" in request:
        media_type = request["headers"]["Content-Type"]
        content = operation["requestBody"]["content"]
        content[media_type] = dict(content[media_type])
        _add(content[media_type], name, example["summary"], first_lines(request["file"]))
    if answer.get("json") and answer["status"] == 200:
        content = operation["responses"]["200"].setdefault("content", {})
        body = content.setdefault("application/json", {})
        _add(body, name, f"{example['summary']} (in part)", answer["json"])


def _add(content: dict[str, Any], name: str, summary: str, value: Any) -> None:
    content.setdefault("examples", {})[name] = {"summary": summary, "value": value}
