"""The examples we publish are requests we answer, exactly so; the files are what they claim."""

import json

import pytest

from service.demo.tables import farm_csv, farm_ndjson
from service.examples import examples
from tests.service.conftest import ROOT

FOLDER = ROOT / "openapi_examples"
EXAMPLES = list(examples())


def shown_in(shown, answer):
    """Whether everything the example shows is in the answer; numbers to the digits shown."""
    if isinstance(shown, dict):
        return all(name in answer and shown_in(v, answer[name]) for name, v in shown.items())
    if isinstance(shown, list):
        return len(shown) == len(answer) and all(map(shown_in, shown, answer))
    if isinstance(shown, float):
        return answer == pytest.approx(shown, abs=1e-8)
    return shown == answer


NAMES = [f"{operation}.{name}" for operation, name, _ in EXAMPLES]


@pytest.mark.parametrize("example", [example for _, _, example in EXAMPLES], ids=NAMES)
def test_an_example_is_answered_as_shown(server, example):
    request, expected = example["request"], example["response"]
    for earlier in example.get("before", ()):
        server.client.request(earlier["method"], earlier["path"], json=earlier["json"])
    body = {"json": request["json"]} if "json" in request else {}
    if "file" in request:
        body = {"content": (FOLDER / request["file"]).read_bytes()}
    answer = server.client.request(
        request["method"], request["path"], headers=request.get("headers"), **body
    )
    assert answer.status_code == expected["status"], answer.text
    assert shown_in(expected.get("json", {}), answer.json() if "json" in expected else {})
    for header, value in expected.get("headers", {}).items():
        assert answer.headers[header] == value


def test_every_operation_has_an_example(server):
    document = server.client.get("/openapi.json").json()
    known = {operation for operation, _, _ in EXAMPLES}
    for methods in document["paths"].values():
        for operation in methods.values():
            assert operation["operationId"] in known


def test_examples_are_shown_in_the_description(server):
    content = server.client.get("/openapi.json").json()["paths"]["/v1/estimates"]["post"]
    shown = content["requestBody"]["content"]
    assert "rows" in shown["application/json"]["examples"]
    assert "farm_week_csv" in shown["text/csv"]["examples"]


def test_the_farm_week_is_the_invented_one_of_the_demonstration():
    assert (FOLDER / "farm_week.csv").read_text("utf-8") == farm_csv()
    assert (FOLDER / "farm_week.ndjson").read_text("utf-8") == farm_ndjson()


def test_examples_are_neatly_written():
    for path in FOLDER.glob("*.json"):
        text = path.read_text("utf-8")
        assert text == json.dumps(json.loads(text), indent=2) + "\n"
