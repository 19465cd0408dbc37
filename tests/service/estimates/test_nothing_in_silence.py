"""What a request holds and nobody used, or nobody can use, is said: never lost in silence."""

import json

import pytest

from models.flags import FLAGS
from service.formats import MEDIA_TYPES
from service.formats.header import alone, likely, not_read
from service.formats.json.keys_twice import found_twice, lines_with_keys_twice

WORDS = "?mixing_model=crim&texture=loam&frequency=8e8"
READING = {"apparent_permittivity": 17.0, "temperature": 14.0}
CRIM = {"mixing_model": "crim", "soil": {"texture": "loam"}, "probe": {"frequency": 8e8}}


def posted(server, body, media_type="text/csv", query=WORDS):
    content = body if isinstance(body, bytes) else body.encode()
    headers = {"Content-Type": media_type}
    return server.client.post(f"/v1/estimates{query}", content=content, headers=headers)


def asked(server, readings, **more):
    """The answer in JSON, and the texts of its advisories by code."""
    answer = server.client.post("/v1/estimates", json={**CRIM, **more, "readings": readings})
    assert answer.status_code == 200, answer.text
    return answer.json(), {one["code"]: one["text"] for one in answer.json()["advisories"]}


def codes(answer):
    return answer.headers["advisories"].split(", ")


@pytest.mark.parametrize(
    ("written", "meant"),
    [
        ("bulk_conductivty", "bulk_conductivity"),
        ("EC", "bulk_conductivity"),
        ("apparent_permittivity_std", "apparent_permittivity_u"),
        ("temprature", "temperature"),
        ("soil_temp", "temperature"),
    ],
)
@pytest.mark.parametrize("form", ["csv", "ndjson"])
def test_a_column_that_is_nearly_ours_is_named(server, written, meant, form):
    names = ["apparent_permittivity", written]
    body = ",".join(names) + "\n17,1\n"
    if form == "ndjson":
        body = json.dumps(dict(zip(names, [17, 1], strict=True)))
    answer = posted(server, body, MEDIA_TYPES[form], "?mixing_model=topp-1980")
    assert answer.status_code == 200
    assert "name-not-known" in codes(answer)
    assert f"column '{written}' was not read" in answer.headers["remarks"]
    assert f"did you mean {meant}?" in answer.headers["remarks"].replace(" or travel_time", "")
    assert written in answer.text  # it passes through all the same


@pytest.mark.parametrize(
    "name",
    ["note", "station", "depth_cm", "z", "battery", "rain", "site", "time_utc", "apparent"],
)
def test_a_column_of_the_callers_own_is_not(server, name):
    answer = posted(server, f"apparent_permittivity,temperature,{name}\n17,14,1\n")
    assert "name-not-known" not in codes(answer)
    assert "remarks" not in answer.headers


def test_what_is_read_already_is_not_meant_as_well():
    assert not_read(["temperature", "air_temperature"], {"temperature"}) == []
    assert not_read(["air_temperature"], {"real_permittivity"}) == [
        ("air_temperature", ["temperature"])
    ]
    assert likely("Ka", ("temperature", "apparent_permittivity")) == ["apparent_permittivity"]
    assert alone(["temperature_u", "bulk_conductivity_u", "bulk_conductivity", "my_u"]) == [
        "temperature_u"
    ]


@pytest.mark.parametrize("form", ["rows", "columns", "many"])
def test_an_uncertainty_without_its_value_is_named(server, form):
    readings = [{**READING, "bulk_conductivity_u": 0.1}] * (100 if form == "many" else 1)
    if form == "columns":
        readings = {name: [value] for name, value in readings[0].items()}
    _, told = asked(server, readings)
    assert told["uncertainty-alone"].startswith("bulk_conductivity_u came without bulk_cond")
    answer = posted(server, "apparent_permittivity,bulk_conductivity_u\n17,1\n")
    assert "uncertainty-alone" in codes(answer)


TWICE = [
    b'{"readings": [{"apparent_permittivity":17,"apparent_permittivity":27,"temperature":14}]}',
    b'{"mixing_model":"crim","mixing_model":"topp-1980","readings":[{"apparent_permittivity":17}]}',
    b'{"soil":{"texture":"loam","texture":"sand"},"readings":[{"apparent_permittivity":17}]}',
    b'{"soil" :{"texture":"loam"}, "soil": 1, "readings":[{"apparent_permittivity":17}]}',
]


@pytest.mark.parametrize("body", TWICE)
def test_a_key_twice_is_refused(server, body):
    answer = posted(server, body, "application/json", "")
    assert answer.status_code == 422
    assert "stands twice in an object" in answer.json()["detail"]
    assert answer.json()["detail"].endswith("send it once")


def test_both_values_of_a_key_are_told(server):
    assert "with 17 and 27" in posted(server, TWICE[0], "application/json", "").json()["detail"]


@pytest.mark.parametrize(
    "path", ["/v1/waveforms", "/v1/reflections", "/v1/scattering", "/v1/spectra"]
)
def test_a_key_twice_is_refused_wherever_a_document_is_taken(server, path):
    headers = {"Content-Type": "application/json"}
    answer = server.client.post(path, content=b'{"units":{},"units":{}}', headers=headers)
    assert answer.status_code == 422
    assert 'the key "units" stands twice' in answer.json()["detail"]


@pytest.mark.parametrize(
    ("line", "found"),
    [
        (b'{"a" :1,"b":1,"b":2}', True),  # as many keys without a blank as were read
        (b'{"a":[{"b":1},{"b":1,"b":2}]}', True),
        (b'{"a":[1,{"b":1,"b":2}]}', True),
        (b'{"a":"\\"b\\":","b":"x"}', False),
        (b'{"a":1,"A":2}', False),
    ],
)
def test_keys_are_counted_however_they_are_written(line, found):
    row = json.loads(line)
    assert (found_twice(line, row) is not None) is found
    assert lines_with_keys_twice([line, b'{"c":1}'], [row, {"c": 1}]) == ([0] if found else [])


def test_a_unit_twice_is_refused(server):
    answer = posted(
        server, "apparent_permittivity\n17\n",
        query="?units=bulk_conductivity:uS/cm,bulk_conductivity:S/m",
    )  # fmt: skip
    assert answer.status_code == 422
    assert "bulk_conductivity is given twice, as uS/cm and S/m" in answer.json()["detail"]


@pytest.mark.parametrize("given", [{"draws": 500}, {"seed": 3}, {"draws": 10_000, "seed": 1}])
def test_draws_that_were_not_made_are_told(server, given):
    _, told = asked(server, [READING], propagation=given)
    assert told["draws-not-made"].startswith(" and ".join(given))
    query = "".join(f"&{name}={value}" for name, value in given.items())
    answer = posted(server, "apparent_permittivity,temperature\n17,14\n", query=WORDS + query)
    assert "draws-not-made" in codes(answer)


def test_draws_that_were_made_and_answers_sent_back_are_told_nothing(server):
    asked_for = {"method": "monte-carlo", "draws": 500}
    assert "draws-not-made" not in asked(server, [READING], propagation=asked_for)[1]
    first, _ = asked(server, [READING])
    assert "draws-not-made" not in asked(server, [READING], propagation=first["propagation"])[1]


@pytest.mark.parametrize("cell", ["-0.3", "abc", "300"])
def test_an_uncertainty_that_cannot_be_used_does_not_blame_the_value(server, cell):
    body = f"apparent_permittivity,apparent_permittivity_u,temperature\n17,{cell},14\n17,.3,14\n"
    answer = posted(server, body)
    rows = answer.text.splitlines()
    assert rows[1].endswith(",,unusable-uncertainty")
    assert rows[2].endswith(",")
    assert "uncertainty-not-used" in codes(answer)
    assert "1 values of apparent_permittivity_u cannot be used" in answer.headers["remarks"]
    assert not FLAGS["unusable-uncertainty"].names_quantity


def test_of_a_temperature_too(server):
    body = "apparent_permittivity,temperature,temperature_u\n17,14,-1\n"
    assert posted(server, body).text.splitlines()[1].endswith(",unusable-uncertainty")
    needless = posted(server, body, query="?mixing_model=topp-1980").text.splitlines()[1]
    assert needless.endswith(",unusable-uncertainty")
    assert ",,,," not in needless  # the model does not need the temperature


def test_strict_reading_names_the_column_of_the_uncertainty(server):
    body = "apparent_permittivity,apparent_permittivity_u,temperature\n17,abc,14\n"
    answer = posted(server, body, query=f"{WORDS}&strict=true")
    assert answer.status_code == 422
    assert (
        "column apparent_permittivity_u: expected a number, found 'abc'"
        in (answer.json()["detail"])
    )


@pytest.mark.parametrize("model", ["crim", "topp-1980"])
def test_a_row_that_cannot_be_split_is_said_to_be_that_alone(server, model):
    head = "apparent_permittivity,temperature\n"
    answer = posted(
        server, head + "17,14\n17,2,14,1\n", query=f"?mixing_model={model}&texture=loam"
    )
    assert answer.text.splitlines()[2].endswith(",unreadable-row")
    assert (
        "line 3: expected 2 cells, as many as the header has, found 4 cells"
        in (answer.headers["remarks"])
    )
    lines = b'{"apparent_permittivity":17,"temperature":14}\n[1]\nnull\n{bad\n'
    answer = posted(server, lines, MEDIA_TYPES["ndjson"], f"?mixing_model={model}&texture=loam")
    rows = [json.loads(line) for line in answer.text.splitlines()]
    assert [row["flags"] for row in rows[1:]] == [["unreadable-row"]] * 3


def test_a_spreadsheets_word_for_nothing_is_missing(server):
    answer = posted(
        server, "apparent_permittivity,temperature\n17,#N/A\n", query="?mixing_model=topp-1980"
    )
    assert answer.text.splitlines()[1].endswith(",missing:temperature")


def test_rods_tell_which_times_are_possible(server):
    table = "travel_time,temperature\n4e-9,14\n.9,14\n40,14\n2,14\n"
    told = posted(server, table, query=f"{WORDS}&probe_length=0.15").headers["remarks"]
    assert "impossible in ns and possible in s, such as 4e-09" in told
    assert "units=travel_time:s" in told
    assert "3 travel times such as 4e-09 ns are impossible: along rods of 0.15 m" in told
    assert "possible in ps" not in told
    readings = {"travel_time": [0.9, 2.0], "temperature": [14.0, 14.0]}
    _, said = asked(server, readings, probe={"probe_length": 0.15})
    assert "unit-suspected" not in said
    assert "travel-time-impossible" in said


def test_headers_hold_words_of_any_table(server):
    names = ["apparent_permittivity", *(f"temperatur\u00e9{i}" for i in range(9))]
    answer = posted(server, ",".join(names) + "\n" + ",".join("1" * 10) + "\n")
    assert answer.status_code == 200
    assert "and 4 more" in answer.headers["remarks"]
    assert answer.headers["remarks"].isascii()
    assert len(answer.headers["remarks"]) < 2000


@pytest.mark.parametrize(("units", "scale"), [({}, 1.0), ({"water_content": "%"}, 100.0)])
def test_what_is_told_beside_the_water_content_is_in_its_unit(server, units, scale):
    reading = {**READING, "bulk_conductivity": 0.8}
    answer, _ = asked(server, [reading], units=units)
    (row,) = answer["estimates"]
    assert answer["units"]["conduction_correction"] == answer["units"]["water_content"]
    plain, _ = asked(server, [reading])
    for name in ("water_content", "conduction_correction"):
        assert row[name] == pytest.approx(scale * plain["estimates"][0][name], rel=1e-12)
    own, _ = asked(server, [reading], units={**units, "conduction_correction": "m3/m3"})
    assert own["estimates"][0]["conduction_correction"] == pytest.approx(
        plain["estimates"][0]["conduction_correction"], rel=1e-12
    )


def test_the_spread_between_models_is_in_the_unit_of_the_water_content(server):
    document = {"mixing_model": "all", "units": {"water_content": "%"}}
    answer, _ = asked(server, [READING], **document)
    assert answer["units"]["model_spread"] == "%"
    assert answer["estimates"][0]["model_spread"] > 0.1  # 0.001 to 0.1 as a fraction


def test_a_document_answered_as_a_table_has_its_remarks_in_a_header(server):
    readings = [{**READING, "temperature_u": -1.0}]
    headers = {"Accept": "text/csv"}
    document = {**CRIM, "readings": readings}
    answer = server.client.post("/v1/estimates", json=document, headers=headers)
    assert "1 values of temperature_u cannot be used, such as -1" in answer.headers["remarks"]
