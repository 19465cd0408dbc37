"""What all decisions have in common: shapes, cautions, sources, words."""

import re

import pytest

from models.decisions.advisories import DECISION_ADVISORIES
from models.decisions.crops import CROPS
from models.decisions.flags import DECISION_FLAGS
from models.decisions.terms import TERMS
from models.flags import FLAGS
from models.quantity import QUANTITIES
from service.examples import examples
from service.store.keys import KeyFile
from tests.service.decisions.asking import ask, codes
from tests.service.decisions.test_decisions_bad_input import FIELD, ONE, PLACE, SOIL, ZONE

CAUTIONS = {
    "root-zone": {"indirect-measurement", "refill-limits", "numbers-not-verdicts"},
    "leaching": {"indirect-measurement", "yield-guides", "leaching-drainage",
                 "numbers-not-verdicts"},
    "soil-state": {"indirect-measurement", "earthworks", "compaction-acceptance",
                   "numbers-not-verdicts"},
    "in-place-density": {"indirect-measurement", "earthworks", "compaction-acceptance",
                         "in-place-scope", "numbers-not-verdicts"},
}  # fmt: skip
BODIES = {"root-zone": (ZONE, "root_zones"), "leaching": (FIELD, "fields"),
          "soil-state": (SOIL, "soils"), "in-place-density": (PLACE, "places")}  # fmt: skip
VERDICTS = re.compile(r"\b(irrigate now|is safe|are safe|no risk|stable|you should)\b", re.I)


@pytest.fixture(params=BODIES)
def path(request):
    return request.param


def test_cautions_stand_with_every_answer(server, path):
    body, _ = BODIES[path]
    assert CAUTIONS[path] <= codes(ask(server, path, body))


def test_no_key_of_a_request_takes_cautions_away(server, path):
    body, _ = BODIES[path]
    for name in ("advisories", "quiet"):
        ask(server, path, {**body, name: False}, 422)
    assert CAUTIONS[path] <= codes(ask(server, f"{path}?advisories=false", body))


def test_an_answer_is_a_number_and_no_verdict(server, path):
    body, _ = BODIES[path]
    answer = ask(server, path, body)
    assert not VERDICTS.search(str({k: v for k, v in answer.items() if k != "advisories"}))


def test_one_item_and_a_list_of_it_are_answered_alike(server, path):
    body, noun = BODIES[path]
    first = body[noun][0] if isinstance(body[noun], list) else body[noun]
    first = {**first, "name": "first", "time": "2026-05-04T06:00:00Z"}
    one = ask(server, path, {**body, noun: first})
    several = ask(server, path, {**body, noun: [first, first]})
    assert several[noun] == [one[noun], one[noun]]
    assert one[noun]["name"] == "first"
    assert one[noun]["time"] == "2026-05-04T06:00:00Z"
    assert several["units"] == one["units"]


def test_every_number_of_a_row_has_its_uncertainty_and_its_unit(server, path):
    body, noun = BODIES[path]
    answer = ask(server, path, {**body, "coverage_probability": 0.9})
    row = answer[noun][0] if isinstance(answer[noun], list) else answer[noun]
    assert answer["coverage_probability"] == 0.9
    banded = [name for name in row if name in TERMS or name in QUANTITIES]
    for name in [name for name in banded if name != "time"]:
        assert {f"{name}_u", f"{name}_lower", f"{name}_upper"} <= row.keys()
        assert name in answer["units"]
    assert set(row["used"]["sources"]) <= row["used"].keys()
    assert set(row["used"]["sources"]) <= answer["units"].keys()


def test_what_was_used_gives_the_same_numbers_again(server, path):
    body, noun = BODIES[path]
    first = body[noun][0] if isinstance(body[noun], list) else body[noun]
    found = ask(server, path, {**body, noun: first})[noun]
    used = {name: value for name, value in found["used"].items() if name != "sources"}
    if "profile" in first:
        used["profile"] = first["profile"]
    again = ask(server, path, {**body, noun: used})[noun]
    for name, value in found.items():
        if isinstance(value, float):
            assert again[name] == pytest.approx(value, rel=1e-12)


def test_what_has_no_uncertainty_is_named(server, path):
    body, _ = BODIES[path]
    (said,) = (advisory["text"] for advisory in ask(server, path, body)["advisories"]
               if advisory["code"] == "no-uncertainty-stated")  # fmt: skip
    assert "_u beside the value" in said


def test_a_wider_coverage_has_a_wider_band(server):
    body = {"soils": {"water_content": 0.24, "water_content_u": 0.01, "bulk_density": 1.6}}
    narrow, wide = (ask(server, "soil-state", {**body, "coverage_probability": p})["soils"]
                    for p in (0.6827, 0.9545))  # fmt: skip
    for row, k in ((narrow, 1.0), (wide, 2.0)):
        half = (row["total_density_upper"] - row["total_density_lower"]) / 2
        assert half == pytest.approx(0.01 * k, rel=1e-3)


def test_the_other_method_answers_too(server):
    assert "conductivity-standard" in codes(ask(server, "in-place-density", ONE))


def test_crops_are_a_catalogue(server):
    answer = server.client.get("/v1/crops")
    assert [entry["name"] for entry in answer.json()["crops"]] == list(CROPS)
    again = server.client.get("/v1/crops", headers={"If-None-Match": answer.headers["etag"]})
    assert (again.status_code, again.content) == (304, b"")
    maize = server.client.get("/v1/crops/maize-grain").json()
    assert maize["root_depth"] == {"low": 1.0, "high": 1.7, "unit": "m"}
    assert (maize["salt_threshold"], maize["salt_slope"]) == (1.7, 0.12)
    assert maize["citations"]["salt"]["year"] == 1985
    assert server.client.get("/v1/crops/barley").json()["citations"]["water"] is None
    assert server.client.get("/v1/crops/alfalfa").json()["from_memory"] == [
        "root_depth", "salt_slope"]  # fmt: skip
    missing = server.client.get("/v1/crops/tomat")
    assert missing.status_code == 404
    assert missing.json()["detail"].endswith("did you mean tomato?")


def test_words_flags_and_advisories_are_in_their_catalogues(server):
    words = {entry["name"] for entry in server.client.get("/v1/quantities").json()["quantities"]}
    assert set(TERMS) <= words
    assert not set(TERMS) & set(QUANTITIES)
    told = {entry["name"] for entry in server.client.get("/v1/flags").json()["flags"]}
    assert set(DECISION_FLAGS) | set(DECISION_ADVISORIES) <= told
    assert not set(DECISION_FLAGS) & (set(FLAGS) | set(DECISION_ADVISORIES))


def test_a_key_that_reads_may_ask(start, tmp_path):
    secret = KeyFile(tmp_path / "keys.json").add("reader", ("read",))
    service = start()
    headers = {"Authorization": f"Bearer {secret}"}
    for path, (body, _) in BODIES.items():
        assert service.client.post(f"/v1/{path}", json=body).status_code == 401
        assert service.client.post(f"/v1/{path}", json=body, headers=headers).status_code == 200


def test_examples_of_decisions_are_of_invented_places():
    summaries = [example["summary"] for owner, _, example in examples() if owner in {
        "post_root_zone", "post_soil_state", "post_in_place_density", "post_leaching"}]  # fmt: skip
    assert len(summaries) >= 8
    assert sum("invented" in summary for summary in summaries) >= 3
