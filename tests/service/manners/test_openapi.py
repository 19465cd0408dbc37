"""The description tells what is really answered."""

import json
import subprocess
import sys

import pytest

from service.app import create_api
from service.settings import Settings

DOCUMENT = create_api(Settings.model_construct()).openapi()
OPERATIONS = {
    f"{method} {path}": operation
    for path, methods in DOCUMENT["paths"].items()
    for method, operation in methods.items()
}


@pytest.fixture(params=OPERATIONS.values(), ids=OPERATIONS)
def operation(request):
    return request.param


def test_an_operation_has_a_name_a_tag_and_a_summary(operation):
    assert operation["operationId"].isidentifier()
    assert operation["tags"]
    assert operation["summary"]
    assert operation["tags"][0] in {tag["name"] for tag in DOCUMENT["tags"]}


def test_an_operation_shows_an_example(operation):
    (content, *_) = operation["responses"]["200"]["content"].values()
    assert "example" in content or "examples" in content


def test_an_operation_tells_its_problems(operation):
    refusals = {s: r for s, r in operation["responses"].items() if s.startswith(("4", "5"))}
    assert refusals
    for response in refusals.values():
        assert list(response["content"]) == ["application/problem+json"]


def test_names_of_operations_are_unique():
    names = [operation["operationId"] for operation in OPERATIONS.values()]
    assert len(set(names)) == len(names)


def test_it_is_openapi_3_1_without_answers_that_are_never_given():
    assert DOCUMENT["openapi"].startswith("3.1")
    assert "HTTPValidationError" not in json.dumps(DOCUMENT)


def test_every_reference_is_kept():
    text = json.dumps(DOCUMENT)
    for name in {part.partition('"')[0] for part in text.split("#/components/schemas/")[1:]}:
        assert name in DOCUMENT["components"]["schemas"]


def test_the_service_serves_what_the_command_prints(server):
    printed = subprocess.run(
        [sys.executable, "-m", "service.cli", "openapi"], capture_output=True, check=True
    )
    assert json.loads(printed.stdout) == server.client.get("/openapi.json").json()


def test_examples_of_catalogues_are_what_is_answered(server):
    for path, methods in DOCUMENT["paths"].items():
        if "{" not in path and path.startswith("/v1/") and "get" in methods:
            (content,) = methods["get"]["responses"]["200"]["content"].values()
            assert content["example"].keys() == server.client.get(path).json().keys()
