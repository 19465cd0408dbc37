"""Every refusal is problem+json with the id of its request."""

import logging

import pytest

from service.errors import PROBLEMS, Unprocessable, as_problem
from service.faults import Fault
from service.formats.errors import CellError, FormatError, HeaderError, RecordTooLong
from service.schemas.problem import MOST_FAULTS


def assert_problem(answer, status):
    assert answer.status_code == status
    assert answer.headers["content-type"] == "application/problem+json"
    body = answer.json()
    assert body["status"] == status
    assert body["request_id"] == answer.headers["x-request-id"]
    assert body["title"]
    assert body["detail"]
    assert isinstance(body["detail"], str)
    assert body["type"].removeprefix("/problems/") in PROBLEMS
    assert "Traceback" not in answer.text
    return body


def test_an_unknown_address_is_404(server):
    assert_problem(server.client.get("/nope"), 404)


def test_a_trailing_slash_is_404_and_no_redirect(server):
    assert_problem(server.client.get("/v1/mixing-models/"), 404)


def test_a_wrong_method_is_405_and_names_the_right_ones(server):
    answer = server.client.put("/v1/mixing-models")
    assert_problem(answer, 405)
    assert answer.headers["allow"] == "GET, HEAD"


def test_every_method_of_an_address_is_allowed(server):
    answer = server.client.patch("/v1/stations/north-1")
    assert_problem(answer, 405)
    assert answer.headers["allow"] == "DELETE, GET, HEAD, PUT"


def test_head_where_there_is_no_get_is_405(echo):
    answer = echo.head("/v1/estimates/echo")
    assert answer.status_code == 405
    assert answer.headers["allow"] == "POST"
    assert answer.content == b""


def test_nothing_acceptable_is_406_and_lists_what_is_offered(server):
    answer = server.client.get("/v1/quantities", headers={"Accept": "image/png"})
    assert "application/json" in assert_problem(answer, 406)["detail"]
    assert answer.headers["vary"] == "Accept"


def test_malformed_json_is_400(echo):
    answer = echo.post(
        "/v1/estimates/typed", content="{bad", headers={"Content-Type": "application/json"}
    )
    assert_problem(answer, 400)


def test_deeply_nested_json_is_400(echo):
    answer = echo.post(
        "/v1/estimates/typed", content="[" * 90_000, headers={"Content-Type": "application/json"}
    )
    assert_problem(answer, 400)


def test_a_wrong_value_is_422_and_names_its_place(echo):
    body = assert_problem(echo.post("/v1/estimates/typed", json={"number": "x"}), 422)
    assert body["errors"] == [
        {"detail": 'expected a whole number, found "x"', "pointer": "#/number"}
    ]


def test_a_wrong_query_parameter_is_422(echo):
    answer = echo.post("/v1/estimates/typed?factor=x", json={"number": 1})
    assert assert_problem(answer, 422)["errors"][0]["pointer"] == "?factor"


def test_what_the_science_refuses_is_422(echo):
    body = assert_problem(echo.get("/v1/estimates/unknown-name"), 422)
    assert body["detail"] == "no mixing model is called 'tarot'; choose one of topp-1980"
    body = assert_problem(echo.get("/v1/estimates/bad-parameter"), 422)
    assert body["errors"][0]["detail"] == "needs porosity (share of pores)"


def test_a_failure_is_500_with_its_id_in_the_log_and_nothing_inside_in_the_answer(echo, caplog):
    with caplog.at_level(logging.INFO):
        answer = echo.get("/v1/estimates/failing", headers={"X-Request-Id": "find-me"})
    assert_problem(answer, 500)
    assert "secret detail" not in answer.text
    logged = [r for r in caplog.records if r.name == "gleyline.failure"]
    assert [r.fields["request_id"] for r in logged] == ["find-me"]
    assert "secret detail" in str(logged[0].exc_info[1])
    assert not [r for r in caplog.records if r.name == "uvicorn.error"]


def test_every_type_of_problem_is_documented_at_its_own_address(server):
    listed = server.client.get("/problems").json()["problems"]
    assert {entry["type"] for entry in listed} == {f"/problems/{slug}" for slug in PROBLEMS}
    for entry in listed:
        assert server.client.get(entry["type"]).json() == entry
        assert entry["title"]
    assert_problem(server.client.get("/problems/nope"), 404)


def test_no_two_kinds_share_a_status():
    assert len({kind.status for kind in PROBLEMS.values()}) == len(PROBLEMS)


def test_a_long_list_of_errors_is_cut_and_counted():
    faults = [Fault("expected a number", f"#/{n}") for n in range(100_000)]
    body = Unprocessable("100 000 items", faults).document("id")
    assert len(body["errors"]) == MOST_FAULTS
    assert body["errors_not_shown"] == 100_000 - MOST_FAULTS


@pytest.mark.parametrize(
    ("error", "status"),
    [(FormatError("a header", "nothing"), 400), (HeaderError("a header", "nothing"), 422),
     (CellError("a number", "'x'", line=3, column="depth"), 422),
     (RecordTooLong("at most 9 bytes", "10"), 413)],
)  # fmt: skip
def test_what_is_wrong_with_a_table_keeps_its_words(error, status):
    problem = as_problem(error)
    assert problem.status == status
    assert problem.detail == str(error)


@pytest.mark.parametrize("error", [RuntimeError("x"), KeyError("x"), RecursionError()])
def test_what_nobody_expected_is_an_internal_error(error):
    assert as_problem(error).status == 500
