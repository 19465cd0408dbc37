"""Messages name what was most likely meant, in the words in which it was asked."""

import codecs
import json

import pytest

from service.formats import MEDIA_TYPES
from service.schemas.problem import MOST_FAULTS
from service.schemas.wording import COMMAND, QUERY

DOCUMENT = b'{"mixing_model": "topp-1980", "readings": [{"apparent_permittivity": 17}]}'
CSV = b"apparent_permittivity,temperature\n17,14\n"
JSON = "application/json"


def posted(server, body, media_type=JSON, query=""):
    headers = {"Content-Type": media_type}
    return server.client.post(f"/v1/estimates{query}", content=body, headers=headers)


def told(answer, status=422):
    assert answer.status_code == status, answer.text
    return answer.json()["detail"]


@pytest.mark.parametrize(
    ("kind", "body", "status", "words"),
    [
        ("csv", DOCUMENT, 422, "this looks like JSON: send it as application/json"),
        ("csv", b"[" + DOCUMENT + b"]", 422, "this looks like JSON"),
        ("ndjson", DOCUMENT, 422, "this looks like a whole request: send it as application/json"),
        ("ndjson", b'[{"apparent_permittivity":17}]', 422, "found a JSON array: send one object"),
        (None, CSV, 400, "looks like the header of a table: send it as text/csv"),
        (None, b'"Apparent_Permittivity";"note"\n17;2\n', 400, "send it as text/csv"),
        (None, b'{"apparent_permittivity":17}\n{"apparent_permittivity":18}\n', 400,
         "one object on each line is NDJSON: send it as application/x-ndjson"),
        (None, DOCUMENT.decode().encode("utf-16"), 400, "UTF-16 text: save the table as UTF-8"),
        (None, DOCUMENT.decode().encode("utf-16-le"), 400, "found UTF-16 text: save it as UTF-8"),
        (None, DOCUMENT.decode().encode("utf-16-be"), 400, "found UTF-16 text: save it as UTF-8"),
        (None, b"\x1f\x8b\x08\x00", 400, "say so with Content-Encoding: gzip"),
        (None, b'{"readings": [{"apparent_permittivity": nan}]}', 400, "send null where there"),
        (None, b'{"mixing_model": "crim"}', 422, 'expected an object such as {"readings": ['),
    ],
)  # fmt: skip
def test_a_body_of_another_kind_is_told_what_to_send(server, kind, body, status, words):
    media_type = JSON if kind is None else MEDIA_TYPES[kind]
    assert words in told(posted(server, body, media_type), status)


def test_a_broken_document_is_told_no_kind_it_is_not(server):
    detail = told(posted(server, DOCUMENT[:-1]), 400)
    assert "text/csv" not in detail
    assert "NDJSON" not in detail


def test_a_byte_order_mark_is_read_past(server):
    answers = [posted(server, body) for body in (DOCUMENT, codecs.BOM_UTF8 + DOCUMENT)]
    assert [answer.status_code for answer in answers] == [200, 200]
    assert answers[0].content == answers[1].content


@pytest.mark.parametrize("form", ["rows", "columns"])
@pytest.mark.parametrize("count", [3, 50, 400])
def test_all_that_is_wrong_is_counted(server, form, count):
    cells = ["wet"] * count + [17.0]
    readings = {"apparent_permittivity": cells}
    if form == "rows":
        readings = [{"apparent_permittivity": cell} for cell in cells]
    answer = posted(server, json.dumps({"readings": readings}).encode())
    assert told(answer).endswith(f"and {count - 1} more")
    listed = answer.json()["errors"]
    assert len(listed) == min(count, MOST_FAULTS)
    assert answer.json().get("errors_not_shown", 0) == count - len(listed)


@pytest.mark.parametrize(
    ("query", "pointer", "words"),
    [
        ("porosity=45", "?porosity", "send 0.45, or name the unit: units=porosity:%25"),
        ("porosity=0.4&porosity_u=2", "?porosity_u", "send 0.02"),
        ("bulk_density=1420", "?bulk_density", "units=bulk_density:kg/m3"),
        ("", "?porosity", "give porosity, bulk_density or texture"),
        ("texture=lome", "?texture", "did you mean loam?"),
        ("mixing_model=square-root", "?slope", "give slope=..."),
        ("units=porosityy:%25", "?units", '"porosityy" is no quantity with a unit; did you mean'),
        ("coverage_probability=95", "?coverage_probability", "for 95 % send 0.95"),
        ("propagation=mc", "?propagation", "expected 'first-order' or 'monte-carlo'"),
        ("assume_temperature=300", "?assume_temperature", "units=temperature:K"),
        ("budget=true", "?budget", "budget is answered in JSON alone"),
        ("texture=loam&columns=theta", "?columns", "did you mean water_content?"),
        ("texture=loam&columns=xyz", "?columns", "there are water_content, bulk_conductivity_25"),
        ("texture=loam&columns=", "?columns", "columns is empty: leave it out for all columns"),
    ],
)
def test_a_query_is_told_in_words_of_a_query(server, query, pointer, words):
    model = "" if "mixing_model" in query else "mixing_model=crim&"
    answer = posted(server, CSV, "text/csv", f"?{model}{query}")
    assert words in told(answer)
    assert answer.json()["errors"][0]["pointer"] == pointer
    assert '{"' not in answer.json()["detail"]


def test_the_hint_of_a_query_works_as_it_stands(server):
    answer = posted(server, CSV, "text/csv", "?mixing_model=crim&porosity=45&units=porosity:%25")
    assert answer.status_code == 200


def test_rods_without_a_length_are_asked_for_by_their_word(server):
    answer = posted(server, b"travel_time\n4\n", "text/csv", "?mixing_model=topp-1980")
    assert "give probe_length in m" in told(answer)


@pytest.mark.parametrize(
    ("sentence", "query", "command"),
    [
        ('"units": {"clay": "%"}', "units=clay:%25", "--units clay:%"),
        ('give "mixing_model": {"name": "crim", "nu": ...}', "give nu=...",
         "give --parameter nu=..."),
        ("give soil.bulk_density", "give bulk_density", "give --bulk-density"),
        ("Give assume.temperature.", "Give assume_temperature.", "Give --assume-temperature."),
        ("give station.zone", "give station.zone", "give station.zone"),
        ("send it as application/vnd.apache.parquet", "send it as application/vnd.apache.parquet",
         "say --read parquet"),
        ("or ask for application/x-ndjson", "or ask for application/x-ndjson",
         "or say --format ndjson"),
    ],
)  # fmt: skip
def test_a_sentence_is_put_into_another_manner(sentence, query, command):
    assert QUERY.text(sentence) == query
    assert COMMAND.text(sentence) == command


@pytest.mark.parametrize(
    ("pointer", "query", "command"),
    [
        ("#/soil/bulk_density", "?bulk_density", "--bulk-density"),
        ("#/propagation/method", "?propagation", "--propagation"),
        ("#/mixing_model/host", "?host", "--parameter host"),
        ("#/mixing_model", "?mixing_model", "--mixing-model"),
        ("#/units/clay", "?units", "--units"),
        ("?clay_u", "?clay_u", "--clay-u"),
        ("line 3, temperature", "line 3, temperature", "line 3, temperature"),
        ("#/readings", "#/readings", "#/readings"),
    ],
)
def test_a_place_is_put_into_another_manner(pointer, query, command):
    assert QUERY.place(pointer) == query
    assert COMMAND.place(pointer) == command


def test_flags_may_be_all_that_is_asked_for(server):
    query = "?mixing_model=topp-1980&columns="
    for columns, head in (("flags", "flags"), ("water_content,flags", "water_content,flags")):
        answer = posted(server, CSV, "text/csv", query + columns)
        assert answer.text.splitlines()[0] == f"apparent_permittivity,temperature,{head}"


@pytest.mark.parametrize(
    ("path", "words"),
    [
        ("/v1", "no operation has the address /v1, but /v1/"),
        ("/v1/", "no operation has the address /v1/, but /v1/"),
        ("/v1/estimates/", "no trailing slash: ask for /v1/estimates"),
        ("/v1/soils/loam/", "no trailing slash: ask for /v1/soils/loam"),
        ("/v1/mixing-models/Topp", "did you mean topp-1980?"),
        ("/v1/mixing-models/CRIM", "did you mean crim?"),
    ],
)
def test_an_address_is_told_what_is_near(server, path, words):
    assert words in told(server.client.get(path), 404)


def test_units_in_a_document_are_told_the_nearest_quantity(server):
    body = {"units": {"permitivity": "1"}, "readings": [{"apparent_permittivity": 17}]}
    answer = posted(server, json.dumps(body).encode())
    assert "did you mean real_permittivity?" in told(answer)
    assert answer.json()["errors"][0]["pointer"] == "#/units/permitivity"


def test_what_a_surface_conducts_has_one_unit(server):
    for name in ("rhoades-1976", "rhoades-1989", "mualem-friedman-1991"):
        entry = server.client.get(f"/v1/pore-water-models/{name}").json()
        (surface,) = [p for p in entry["parameters"] if p["name"] == "surface_conductivity"]
        assert surface["unit"] == "dS/m"
        assert " S/m" not in surface["meaning"]


def test_every_parameter_that_a_query_takes_is_described(server):
    described = {
        parameter["name"]
        for parameter in server.client.get("/openapi.json").json()["paths"]["/v1/estimates"][
            "post"
        ]["parameters"]
    }
    for model in server.client.get("/v1/mixing-models").json()["mixing_models"]:
        for parameter in model["parameters"]:
            if parameter["supplied"] or parameter["name"] in described:
                continue
            query = f"?mixing_model={model['name']}&texture=loam&{parameter['name']}=1"
            assert "unknown parameter" in told(posted(server, CSV, "text/csv", query))
    assert {"slope", "intercept", "constant", "linear", "host", "cementation_exponent"} <= described
