"""Stored soils and probes by name, in JSON, in the query of a table and on the command line."""

import subprocess
import sys

import pytest

from tests.service.conftest import ROOT, command

SOIL = {"title": "Topsoil", "texture": "loam", "bulk_density": 1.42, "mixing_model": "topp-1980"}
READING = {"apparent_permittivity": 17.2, "temperature": 14.1}
CSV = b"apparent_permittivity,temperature\n17.2,14.1\n"


@pytest.fixture(scope="module")
def stored(tmp_path_factory):
    folder = tmp_path_factory.mktemp("stored")
    with command(folder) as service:
        for path, body in (("soils/field-loam", SOIL), ("probes/rod-1", {"frequency": 1e9})):
            assert service.client.put(f"/v1/{path}", json=body).status_code == 201
        yield service, folder


def table(client, query):
    return client.post(f"/v1/estimates{query}", content=CSV, headers={"Content-Type": "text/csv"})


def test_a_name_stands_for_its_description(stored):
    client = stored[0].client
    named = client.post(
        "/v1/estimates", json={"soil": "field-loam", "probe": "rod-1", "readings": [READING]}
    ).json()
    inline = client.post(
        "/v1/estimates",
        json={
            "mixing_model": "topp-1980", "soil": {"texture": "loam", "bulk_density": 1.42},
            "probe": {"frequency": 1e9}, "readings": [READING],
        },
    ).json()  # fmt: skip
    assert named == inline


def test_what_the_request_says_beats_the_stored_model(stored):
    request = {"soil": "field-loam", "mixing_model": "crim", "readings": [READING]}
    answer = stored[0].client.post("/v1/estimates", json=request).json()
    assert answer["mixing_model"]["name"] == "crim"


def test_an_unknown_name_is_answered_with_the_nearest(stored):
    request = {"soil": "field-lom", "readings": [READING]}
    answer = stored[0].client.post("/v1/estimates", json=request)
    assert answer.status_code == 422
    assert answer.json()["errors"] == [
        {
            "detail": 'there is no stored soil "field-lom"; did you mean field-loam?',
            "pointer": "#/soil",
        }
    ]


def test_a_table_names_them_in_its_query(stored):
    client = stored[0].client
    named = table(client, "?soil=field-loam&probe=rod-1")
    query = "?mixing_model=topp-1980&texture=loam&bulk_density=1.42&frequency=1e9"
    assert named.status_code == 200, named.text
    assert named.content == table(client, query).content


def test_named_and_described_at_once_is_refused(stored):
    answer = table(stored[0].client, "?soil=field-loam&clay=0.2")
    assert answer.status_code == 422
    assert answer.json()["errors"][0]["pointer"] == "?clay"


def test_the_command_looks_them_up_in_the_store(stored, tmp_path):
    (tmp_path / "t.csv").write_bytes(CSV)
    ran = subprocess.run(
        [sys.executable, "-m", "service.cli", "convert", str(tmp_path / "t.csv"),
         "--soil", "field-loam", "--probe", "rod-1", "--data", str(stored[1])],
        cwd=ROOT, capture_output=True, check=False,
    )  # fmt: skip
    assert ran.returncode == 0, ran.stderr
    assert ran.stdout == table(stored[0].client, "?soil=field-loam&probe=rod-1").content
