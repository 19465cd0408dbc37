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
    shown = {"summary": example["summary"]}
    if "json" in request:
        content = operation["requestBody"]["content"]["application/json"]
        content.setdefault("examples", {})[name] = {**shown, "value": request["json"]}
    elif "file" in request:
        media_type = request["headers"]["Content-Type"]
        content = operation["requestBody"]["content"][media_type] = dict(
            operation["requestBody"]["content"][media_type]
        )
        content["examples"] = {name: {**shown, "value": first_lines(request["file"])}}
    elif answer.get("json"):
        content = operation["responses"]["200"].setdefault("content", {})
        json_content = content.setdefault("application/json", {})
        json_content["examples"] = {name: {**shown, "value": answer["json"]}}
