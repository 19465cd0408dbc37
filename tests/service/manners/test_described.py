"""Requests made up from the OpenAPI description, with a key set, get the answers it describes."""

import logging

import schemathesis
from hypothesis import HealthCheck, given, settings
from schemathesis.checks import not_a_server_error
from schemathesis.core.failures import FailureGroup
from schemathesis.specs.openapi.checks import (
    content_type_conformance,
    response_schema_conformance,
    status_code_conformance,
)

from service.app import create_api, surrounded
from service.settings import Settings
from service.store.keys import KeyFile

EXAMPLES = 6
CHECKS = (not_a_server_error, status_code_conformance, content_type_conformance,
          response_schema_conformance)  # fmt: skip
TABLES = ("text/csv", "application/x-ndjson", "application/vnd.apache.parquet",
          "application/vnd.apache.arrow.stream", "application/senml+json")  # fmt: skip
"""Bodies that the description knows only as text: what is made up for them is rarely one."""


def check(operation):
    """Make up a few requests of one operation and look at their answers."""

    @settings(max_examples=EXAMPLES, deadline=None, derandomize=True, database=None,
              suppress_health_check=list(HealthCheck))  # fmt: skip
    @given(case=operation.as_strategy())
    def answered(case):
        if case.media_type not in TABLES:
            case.call_and_validate(checks=CHECKS)

    answered()


def test_what_is_described_is_what_is_answered(tmp_path, caplog):
    caplog.set_level(logging.ERROR)
    secret = KeyFile(tmp_path / "keys.json").add("made-up", ("read", "write", "manage"))
    chosen = Settings(data=tmp_path, requests_per_minute=1_000_000)
    schema = schemathesis.openapi.from_asgi("/openapi.json", surrounded(create_api(chosen), chosen))
    schema.config.update(headers={"Authorization": f"Bearer {secret}"})
    failed = {}
    for found in schema.get_all_operations():
        operation = found.ok()
        try:
            check(operation)
        except FailureGroup as failure:
            failed[operation.label] = [str(one) for one in failure.exceptions]

    assert failed == {}
