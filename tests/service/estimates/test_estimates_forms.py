"""The same readings in every form give the same numbers, row for row, column for column."""

import csv
import io
import json
import subprocess
import sys

import pytest

from tests.service.conftest import ROOT

WEEK = ROOT / "openapi_examples" / "farm_week.csv"
QUERY = {"mixing_model": "crim", "texture": "loam", "frequency": "0.8e9",
         "apparent_permittivity_u": "0.2"}  # fmt: skip
SETTINGS = {
    "mixing_model": "crim",
    "soil": {"texture": "loam"},
    "probe": {"frequency": 0.8e9, "apparent_permittivity_u": 0.2},
}
NUMBERS = ("water_content", "water_content_u", "water_content_u_shared", "water_content_lower",
           "water_content_upper", "conduction_correction")  # fmt: skip
TEXT_SENTINELS = {"", "NAN", "---", "N/A"}


def table(text):
    return list(csv.DictReader(io.StringIO(text)))


def number(cell):
    return None if cell in {"", None} else float(cell)


@pytest.fixture(scope="module")
def sent():
    return table(WEEK.read_text("utf-8"))


@pytest.fixture(scope="module")
def answered(server):
    answer = server.client.post(
        "/v1/estimates", params=QUERY, content=WEEK.read_bytes(),
        headers={"Content-Type": "text/csv"},
    )  # fmt: skip
    assert answer.status_code == 200, answer.text
    return answer


@pytest.fixture(scope="module")
def as_csv(answered):
    return table(answered.text)


def clean_rows(sent):
    """Rows that JSON can say: numbers or null, and nothing unreadable."""
    rows = []
    for row in sent:
        cells = {n: row[n] for n in ("apparent_permittivity", "temperature", "bulk_conductivity")}
        if "ERR 17" in cells.values():
            continue
        rows.append(
            {"time": row["time"], "depth": float(row["depth"])}
            | {n: None if c in TEXT_SENTINELS else float(c) for n, c in cells.items()}
        )
    return rows


def test_one_row_in_one_row_out_in_order(sent, as_csv, answered):
    assert len(as_csv) == len(sent)
    assert int(answered.headers["Row-Count"]) == len(sent)
    assert int(answered.headers["Flagged-Count"]) == sum(bool(row["flags"]) for row in as_csv)
    assert [row["time"] for row in as_csv] == [row["time"] for row in sent]


def test_the_callers_columns_pass_through_to_the_letter(answered):
    lines = WEEK.read_text("utf-8").splitlines()
    for before, after in zip(lines, answered.text.splitlines(), strict=True):
        assert after.startswith(before + ",")


def test_bad_cells_are_flagged_and_have_no_number(sent, as_csv):
    for before, after in zip(sent, as_csv, strict=True):
        flags = after["flags"].split(";")
        for name in ("apparent_permittivity", "temperature", "bulk_conductivity"):
            if before[name] == "ERR 17":
                assert f"unreadable:{name}" in flags
                assert not after["water_content"]
            if before[name] in TEXT_SENTINELS:
                assert f"missing:{name}" in flags
        if before["apparent_permittivity"] == "-9999":
            assert "out-of-gate:apparent_permittivity" in flags
        if after["flags"] == "":
            assert 0 < float(after["water_content_lower"]) < float(after["water_content"])


def test_the_cold_night_is_flagged_as_unfrozen_water_only(sent, as_csv):
    frozen = [a for b, a in zip(sent, as_csv, strict=True) if (number_or_none(b) or 1) < 0]
    assert frozen
    assert all("frozen" in row["flags"].split(";") for row in frozen)


def number_or_none(row):
    try:
        return float(row["temperature"])
    except ValueError:
        return None


def test_ndjson_gives_the_numbers_of_csv(server, as_csv):
    body = WEEK.with_suffix(".ndjson").read_bytes()
    answer = server.client.post(
        "/v1/estimates", params=QUERY, content=body,
        headers={"Content-Type": "application/x-ndjson"},
    )  # fmt: skip
    rows = [json.loads(line) for line in answer.text.splitlines()]
    assert len(rows) == len(as_csv)
    for row, cells in zip(rows, as_csv, strict=True):
        assert [row[n] for n in NUMBERS] == [number(cells[n]) for n in NUMBERS]
        assert ";".join(row["flags"]) == cells["flags"]


@pytest.mark.parametrize("shape", ["rows", "columns"])
def test_json_gives_the_numbers_of_csv(server, sent, as_csv, shape):
    rows = clean_rows(sent)
    readings = rows if shape == "rows" else {n: [row[n] for row in rows] for n in rows[0]}
    answer = server.client.post("/v1/estimates", json={**SETTINGS, "readings": readings}).json()
    found = answer["estimates"]
    if shape == "columns":
        found = [
            dict(zip(found, cells, strict=True)) for cells in zip(*found.values(), strict=True)
        ]
    kept = [cells for cells in as_csv if "unreadable" not in cells["flags"]]
    for row, cells in zip(found, kept, strict=True):
        assert [row[n] for n in NUMBERS] == [number(cells[n]) for n in NUMBERS]
        assert ";".join(row["flags"]) == cells["flags"]


def test_convert_without_a_server_gives_the_same_bytes(answered, tmp_path):
    out = tmp_path / "out.csv"
    words = [f"--{name.replace('_', '-')}={text}" for name, text in QUERY.items()]
    ran = subprocess.run(
        [sys.executable, "-m", "service.cli", "convert", WEEK, "-o", out, *words],
        cwd=ROOT, capture_output=True, text=True, check=False,
    )  # fmt: skip
    assert ran.returncode == 0, ran.stderr
    assert out.read_bytes() == answered.content
    assert "1987 rows" in ran.stderr


def test_csv_can_be_answered_as_ndjson_and_json_as_csv(server, as_csv, sent):
    crossed = server.client.post(
        "/v1/estimates", params=QUERY, content=WEEK.read_bytes(),
        headers={"Content-Type": "text/csv", "Accept": "application/x-ndjson"},
    )  # fmt: skip
    assert crossed.headers["Content-Type"].startswith("application/x-ndjson")
    rows = [json.loads(line) for line in crossed.text.splitlines()]
    assert [row["water_content"] for row in rows] == [number(c["water_content"]) for c in as_csv]
    assert [row["note"] for row in rows] == [row["note"] for row in sent]
    request = {**SETTINGS, "readings": clean_rows(sent)[:5]}
    flat = server.client.post("/v1/estimates?format=csv", json=request)
    assert [r["water_content"] for r in table(flat.text)] == [
        c["water_content"] for c in as_csv[:5]
    ]


def test_other_units_change_the_words_and_not_the_water(server):
    plain = {**SETTINGS, "readings": [{"apparent_permittivity": 17.2, "temperature": 14.0}]}
    kelvin = {
        **SETTINGS,
        "soil": {"texture": "loam", "clay": 22.0},
        "units": {"temperature": "K", "clay": "%", "water_content": "%"},
        "readings": [{"apparent_permittivity": 17.2, "temperature": 287.15}],
    }
    plain["soil"] = {"texture": "loam", "clay": 0.22}
    one = server.client.post("/v1/estimates", json=plain).json()
    other = server.client.post("/v1/estimates", json=kelvin).json()
    assert other["units"]["water_content"] == "%"
    assert other["soil"]["clay"] == pytest.approx(22.0)
    for name in ("water_content", "water_content_u", "water_content_lower"):
        assert other["estimates"][0][name] == pytest.approx(100 * one["estimates"][0][name])


def test_an_answer_can_be_had_again_from_itself(server):
    request = {
        "soil": {"texture": "loam", "bulk_density": 1.42},
        "probe": {"frequency": 1e9, "apparent_permittivity_u": 0.3},
        "readings": [{"apparent_permittivity": 17.2, "temperature": 14.1}],
    }
    first = server.client.post("/v1/estimates", json=request).json()
    echoed = {n: first[n] for n in ("mixing_model", "soil", "probe", "coverage_probability")}
    again = server.client.post(
        "/v1/estimates", json={**echoed, "readings": request["readings"]}
    ).json()
    assert again["mixing_model"]["name"] == first["mixing_model"]["name"]
    for name, value in first["estimates"][0].items():
        assert again["estimates"][0][name] == pytest.approx(value, rel=1e-12)


def test_a_key_that_a_row_does_not_have_is_not_missing_from_it_in_any_form(server):
    rows = [
        {"apparent_permittivity": 17.2, "temperature": 14.0, "bulk_conductivity": 0.4},
        {"apparent_permittivity": 17.2, "temperature": 14.0},
        {"apparent_permittivity": 17.2},
        {"apparent_permittivity": 17.2, "temperature": None},
    ]
    lines = "".join(json.dumps(row) + "\n" for row in rows)
    as_lines = server.client.post(
        "/v1/estimates", params=QUERY, content=lines,
        headers={"Content-Type": "application/x-ndjson"},
    )  # fmt: skip
    as_json = server.client.post("/v1/estimates", json={**SETTINGS, "readings": rows}).json()
    flags = [row["flags"] for row in as_json["estimates"]]
    assert flags == [json.loads(line)["flags"] for line in as_lines.text.splitlines()]
    assert flags == [[], [], ["missing:temperature"], ["missing:temperature"]]


def test_the_largest_effect_of_temperature_is_named_where_asked(server):
    readings = [{"apparent_permittivity": 17.2, "temperature": 30.0, "bulk_conductivity": 0.4}]
    answer = server.client.post(
        "/v1/estimates", json={**SETTINGS, "explain": True, "readings": readings}
    ).json()
    told = answer["explanation"]
    assert set(told["effects"]) == {"free-water", "bound-water", "conduction"}
    assert told["effects"]["free-water"][0] < 0
    assert told["dominant"][0] in told["effects"]
