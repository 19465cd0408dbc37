"""A table whose rows name their soil and probe: each is answered as if it had come alone."""

import csv
import io
import json
import subprocess
import sys

import polars as pl
import pytest

from service.formats import MEDIA_TYPES
from tests.service.conftest import ROOT, command

SOILS = {
    "north": {"texture": "loam", "bulk_density": 1.42, "clay": 0.2, "mixing_model": "crim"},
    "bog": {"texture": "peat"},
    "sand": {"texture": "sand", "mixing_model": "topp-1980"},
}
PROBES = {"rod": {"frequency": 1e9, "apparent_permittivity_u": 0.3}, "cap": {"frequency": 7e7}}
ROWS = [
    ("1", "north", "rod", 17.2, 14.0, 0.6),
    ("2", "bog", "rod", 40.0, 12.0, 0.4),
    ("3", "", "", 17.2, 14.0, 0.6),
    ("4", "norht", "rod", 17.0, 14.0, 0.6),
    ("5", "sand", "cap", 9.0, 20.0, 0.1),
    ("6", "north", "cap", 17.2, 14.0, 0.6),
    ("7", "bog", "", 40.0, 12.0, 0.4),
    ("8", "north", "rod", 22.0, 9.0, 0.9),
]
NAMES = ("id", "soil", "probe", "apparent_permittivity", "temperature", "bulk_conductivity")
UNKNOWN = 3
"""The row that names what is not stored."""


@pytest.fixture(scope="module")
def stored(tmp_path_factory):
    """A service that knows three soils and two probes."""
    with command(tmp_path_factory.mktemp("named")) as service:
        for path, documents in (("soils", SOILS), ("probes", PROBES)):
            for name, body in documents.items():
                address = f"/v1/{path}/{name}"
                answer = service.client.put(address, json=body, headers={"If-None-Match": "*"})
                assert answer.status_code in {200, 201}, answer.text
        yield service


def table(rows=ROWS, names=NAMES):
    lines = [",".join(names), *(",".join(map(str, row)) for row in rows)]
    return "\n".join(lines).encode() + b"\n"


def post(service, body, kind="csv", query=""):
    headers = {"Content-Type": MEDIA_TYPES[kind]}
    return service.client.post(f"/v1/estimates{query}", content=body, headers=headers)


def rows_in(text):
    return list(csv.DictReader(io.StringIO(text)))


def alone(service, row):
    """The estimate of a row as a JSON request of its own."""
    _, soil, probe, *numbers = row
    named = {kind: name for kind, name in (("soil", soil), ("probe", probe)) if name}
    reading = dict(zip(NAMES[3:], numbers, strict=True))
    answer = service.client.post("/v1/estimates", json={**named, "readings": [reading]})
    assert answer.status_code == 200, answer.text
    return answer.json()["estimates"][0]


def test_each_row_has_the_estimate_of_its_own_soil_and_probe(stored):
    answer = post(stored, table())
    assert answer.status_code == 200, answer.text
    told = rows_in(answer.text)
    assert [row["id"] for row in told] == [row[0] for row in ROWS]
    for place, (row, sent) in enumerate(zip(told, ROWS, strict=True)):
        if place == UNKNOWN:
            continue
        for name, value in alone(stored, sent).items():
            if name == "flags":
                assert row["flags"] == ";".join(value)
            else:
                assert (float(row[name]) if row[name] else None) == value, (place, name)


def test_a_name_that_is_not_stored_is_flagged_and_told(stored):
    answer = post(stored, table())
    row = rows_in(answer.text)[UNKNOWN]
    assert row["flags"] == "not-estimated"
    assert row["water_content"] == row["pore_water_conductivity"] == ""
    told = answer.headers["not-estimated"]
    assert f"line {UNKNOWN + 2}" in told
    assert "norht" in told
    assert "did you mean north?" in told
    assert answer.headers["row-count"] == str(len(ROWS))


def test_strictness_refuses_it_by_line_and_name(stored):
    answer = post(stored, table(), query="?strict=true")
    assert answer.status_code == 422
    (fault,) = answer.json()["errors"]
    assert f"line {UNKNOWN + 2} (row {UNKNOWN + 1}), column soil" in fault["detail"]
    assert "norht" in fault["detail"]


@pytest.mark.parametrize("kept", [ROWS[:1], ROWS[1:2], ROWS[2:3], ROWS[3:4], ROWS[4:5], ROWS[5:]],
                         ids=lambda rows: rows[0][1] or "none")  # fmt: skip
def test_the_columns_are_the_same_whatever_the_rows_name(stored, kept):
    header = post(stored, table()).text.partition("\n")[0]
    assert post(stored, table(kept)).text.partition("\n")[0] == header


def test_every_format_gives_the_same_numbers(stored):
    frame = pl.DataFrame(ROWS, NAMES, orient="row")
    arrow, parquet = io.BytesIO(), io.BytesIO()
    frame.write_ipc_stream(arrow, compat_level=pl.CompatLevel.oldest())
    frame.write_parquet(parquet)
    sent = {"csv": table(), "ndjson": frame.write_ndjson().encode(), "arrow": arrow.getvalue(),
            "parquet": parquet.getvalue()}  # fmt: skip
    answers = {kind: post(stored, body, kind, "?format=csv") for kind, body in sent.items()}
    numbers = [
        [(row["id"], row["water_content"], row["pore_water_conductivity_upper"], row["flags"])
         for row in rows_in(answer.text)]
        for answer in answers.values()
    ]  # fmt: skip
    assert numbers[0][0][1]
    assert all(rows == numbers[0] for rows in numbers)


def test_what_the_request_says_beats_the_model_of_a_stored_soil(stored):
    told = rows_in(post(stored, table(ROWS[:1]), query="?mixing_model=topp-1980").text)
    row = alone(stored, ("", "", "rod", *ROWS[0][3:]))
    answer = stored.client.post("/v1/estimates", json={
        "mixing_model": "topp-1980", "soil": "north", "probe": "rod",
        "readings": [dict(zip(NAMES[3:], ROWS[0][3:], strict=True))],
    })  # fmt: skip
    assert float(told[0]["water_content"]) == answer.json()["estimates"][0]["water_content"]
    assert set(row) <= {*told[0], "flags"}


def test_a_misspelt_model_refuses_the_table_and_not_its_rows(stored):
    answer = post(stored, table(), query="?mixing_model=crimm")
    assert answer.status_code == 422
    assert "did you mean crim?" in answer.text


def test_a_line_without_the_key_has_what_the_request_describes(stored):
    reading = {"apparent_permittivity": 17.2, "temperature": 14.0, "bulk_conductivity": 0.6}
    lines = [{"soil": "north", **reading}, reading, {**reading, "soil": None}]
    body = "\n".join(map(json.dumps, lines)).encode()
    told = [json.loads(line) for line in post(stored, body, "ndjson").text.splitlines()]
    north = alone(stored, ("", "north", "", 17.2, 14.0, 0.6))
    assert told[0]["water_content"] == north["water_content"]
    assert told[1]["water_content"] == told[2]["water_content"] != told[0]["water_content"]


def test_many_rows_keep_their_order(stored):
    rows = [(str(i), *ROWS[i % 3][1:]) for i in range(40_000)]
    told = rows_in(post(stored, table(rows)).text)
    assert [row["id"] for row in told] == [row[0] for row in rows]
    assert len({(i % 3, row["water_content"]) for i, row in enumerate(told)}) == 3


def test_convert_answers_the_same_bytes(stored, tmp_path):
    source, data = tmp_path / "rows.csv", stored.log.parent
    source.write_bytes(table())
    done = subprocess.run(
        [sys.executable, "-m", "service.cli", "convert", str(source), "--data", str(data)],
        cwd=ROOT, capture_output=True, check=True,
    )  # fmt: skip
    assert done.stdout == post(stored, table()).content
    assert b"norht" in done.stderr


def test_stored_numbers_are_told_in_the_units_of_the_request(stored):
    reading = [dict(zip(NAMES[3:], ROWS[0][3:], strict=True))]
    plain = {"soil": "north", "probe": "rod", "readings": reading}
    answers = [
        stored.client.post("/v1/estimates", json=document).json()
        for document in (plain, {**plain, "units": {"bulk_density": "kg/m3", "frequency": "MHz"}})
    ]
    assert answers[1]["soil"]["bulk_density"] == pytest.approx(1420.0, rel=1e-12)
    assert answers[1]["probe"]["frequency"] == pytest.approx(1000.0, rel=1e-12)
    first, second = (answer["estimates"][0]["water_content"] for answer in answers)
    assert second == pytest.approx(first, rel=1e-9)
