"""Lengths of sweeps in the unit a request names, hints where it was another, and doubts told."""

import copy

import numpy as np
import pytest

from tests.models.reflection.sweep_records import tip_sweep, tip_text
from tests.service.sweeps.asking import STANDARDS, columns, refused, tip_request, two_port_text

FILE = {"touchstone": two_port_text("ptfe_20mm")}
FREQUENCY, LOAM = tip_sweep("loam")
LINE = {"sample_length": 0.02, "sample_length_u": 2e-5}


def scattering(**changes):
    return {"sample": FILE, "line": LINE, **changes}


def test_lengths_come_in_the_units_a_request_names(server):
    plain = server.client.post("/v1/scattering", json=scattering()).json()
    units = {"sample_length": "mm"}
    scaled = {"sample_length": 20.0, "sample_length_u": 0.02}
    found = server.client.post("/v1/scattering", json=scattering(line=scaled, units=units))
    assert found.status_code == 200, found.text
    for name in ("real_permittivity", "real_permittivity_u"):
        assert found.json()["spectrum"][name] == pytest.approx(plain["spectrum"][name])
    radii = {"inner_radius": 0.456, "outer_radius": 1.49, "model": "aperture-field"}
    body = tip_request(aperture=radii, units=dict.fromkeys(("inner_radius", "outer_radius"), "mm"))
    tip = server.client.post("/v1/reflections", json=body)
    assert tip.status_code == 200, tip.text
    assert tip.json()["aperture"]["inner_radius"] == pytest.approx(0.456e-3)


@pytest.mark.parametrize(("changes", "sentence", "place"), [
    ({"line": {"sample_length": 20}}, "in mm? send 0.02", "#/line/sample_length"),
    ({"line": {"sample_length": 2}}, "in cm? send 0.02", "#/line/sample_length"),
    ({"units": {"sample_lenght": "mm"}}, "did you mean sample_length?", "#/units/sample_lenght"),
    ({"units": {"sample_length": "GHz"}}, "it takes m, cm, mm", "#/units/sample_length"),
    ({"line": {"sample_lenght": 0.02}}, "did you mean sample_length?", "#/line/sample_lenght"),
])  # fmt: skip
def test_another_unit_is_named_with_the_number_to_send(server, changes, sentence, place):
    text, places = refused(server.client.post("/v1/scattering", json=scattering(**changes)))
    assert sentence in text
    assert place in places


def test_a_temperature_in_kelvin_is_told_what_to_send(server):
    standards = copy.deepcopy(STANDARDS)
    standards[2]["temperature"] = 298.15
    text, _ = refused(server.client.post("/v1/reflections", json=tip_request(standards=standards)))
    assert "expected temperature from -40 to 60 Cel, found 298.15" in text
    assert 'looks like K; send 25, or name the unit: "units": {"temperature": "K"}' in text


def checks_of(answer):
    assert answer.status_code == 200, answer.text
    return {check["code"]: check for check in answer.json()["checks"]}


def test_standards_that_were_exchanged_are_told_with_the_number(server):
    standards = copy.deepcopy(STANDARDS[:3])
    standards[1]["touchstone"], standards[2]["touchstone"] = tip_text("water25"), tip_text("air")
    answer = server.client.post("/v1/reflections", json=tip_request(standards=standards))
    check = checks_of(answer)["port-not-passive"]
    assert check["holds"] is False
    assert check["value"] > check["limit"] == 1.0
    assert all("port-not-passive" in flags for flags in answer.json()["spectrum"]["flags"])


def test_a_sample_of_noise_is_told_with_the_number(server):
    noise = np.random.default_rng(8).uniform(-1, 1, (2, LOAM.size))
    sample = {
        "frequency": FREQUENCY.tolist(),
        "reflection": columns(0.4 * (noise[0] + 1j * noise[1])),
    }
    checks = checks_of(server.client.post("/v1/reflections", json=tip_request(sample=sample)))
    assert checks["rises-with-frequency"]["holds"] is False
    assert checks["rises-with-frequency"]["value"] > 0.1


@pytest.mark.parametrize("size", [5.0, 2.1])
def test_a_reflection_far_above_one_is_refused_with_the_number(server, size):
    sample = {"frequency": FREQUENCY.tolist(),
              "reflection": columns(size * np.exp(1j * np.angle(LOAM)))}  # fmt: skip
    text, places = refused(server.client.post("/v1/reflections", json=tip_request(sample=sample)))
    assert f"about 1 at most, found {size:g}" in text
    assert "#/sample/reflection" in places


def test_a_check_without_a_number_neither_holds_nor_fails(server):
    answer = server.client.post("/v1/reflections", json=tip_request())
    for check in answer.json()["checks"]:
        assert (check["holds"] is None) <= (check["value"] is None)
