"""The house holds: one direction, numbers only below, small rooms, no stray words."""

import ast
import re
import subprocess
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
ALLOWED = {"models", "numpy", "scipy"}
STANDARD = {"abc", "collections", "dataclasses", "enum", "functools", "importlib", "itertools",
            "math", "string", "types", "typing"}  # fmt: skip
TOP = {"README.md", "DEVELOPERS.md", "pyproject.toml", "service", "models", "tests", "Dockerfile",
       "openapi_examples"}  # fmt: skip
SOURCES = sorted([*(ROOT / "models").rglob("*.py"), *(ROOT / "service").rglob("*.py")])
LONGEST, MOST_FILES = 250, 15


def name(path):
    return str(path.relative_to(ROOT))


@pytest.mark.parametrize("module", sorted((ROOT / "models").rglob("*.py")), ids=name)
def test_models_import_only_numbers(module):
    nodes = list(ast.walk(ast.parse(module.read_text("utf-8"))))
    plain = {alias.name for node in nodes if isinstance(node, ast.Import) for alias in node.names}
    dotted = {node.module for node in nodes if isinstance(node, ast.ImportFrom) and node.module}
    imported = {module_name.partition(".")[0] for module_name in plain | dotted}
    assert imported <= ALLOWED | STANDARD


@pytest.mark.parametrize("path", SOURCES, ids=name)
def test_a_room_is_small_and_says_what_it_is(path):
    text = path.read_text("utf-8")
    assert len(text.splitlines()) <= LONGEST
    assert ast.get_docstring(ast.parse(text))


def test_folders_are_small():
    folders = {path.parent for path in SOURCES}
    crowded = {name(f): len(list(f.glob("*.py"))) for f in folders}
    assert {f: n for f, n in crowded.items() if n > MOST_FILES} == {}


def test_the_top_level_holds_what_it_should():
    listed = subprocess.run(["git", "ls-files"], cwd=ROOT, capture_output=True, text=True,
                            check=False).stdout.split("\n")  # fmt: skip
    top = {entry.partition("/")[0] for entry in listed if entry and not entry.startswith(".")}
    assert top <= TOP


def test_nothing_is_put_off_or_hidden():
    words = re.compile(
        r"TO" r"DO|FIX" r"ME|XX" r"X|NotImplemented" r"Error|mark\.sk" r"ip|x" r"fail\("
    )
    files = [*SOURCES, *(ROOT / "tests").rglob("*.py")]
    assert [name(path) for path in files if words.search(path.read_text("utf-8"))] == []
