"""Phases in radians where degrees were asked for: refused where physics says so, else told."""

import numpy as np
import pytest

from models.reflection.line import cell, filled
from models.reflection.two_port.forward import scattering
from tests.models.reflection.sweep_records import debye
from tests.service.sweeps.asking import refused

FREQUENCY = np.linspace(50e6, 3e9, 60)
SOIL = debye(FREQUENCY)


def sent(values, *, radians):
    phase = np.angle(values)
    turned = phase if radians else np.degrees(phase)
    return {"magnitude": np.abs(values).tolist(), "degrees": turned.tolist()}


def filled_line(*, radians, **line):
    sweep = sent(filled.reflection(SOIL)[0], radians=radians)
    return "/v1/reflections", {"kind": "filled-line", "frequency": FREQUENCY.tolist(),
                               "sample": {"reflection": sweep}, "line": line}  # fmt: skip


def two_ports(*, radians, most=3e9):
    kept = most >= FREQUENCY
    s11, s21 = (part[kept] for part in scattering(SOIL, 1.0, FREQUENCY, 0.0022))
    sample = {"s11": sent(s11, radians=radians), "s21": sent(s21, radians=radians)}
    return "/v1/scattering", {"frequency": FREQUENCY[kept].tolist(), "sample": sample,
                              "line": {"sample_length": 0.0022}}  # fmt: skip


def short_cell(*, radians):
    read = cell.reflection(SOIL, FREQUENCY, 0.005, "short")[0]
    sample = {"short": {"reflection": sent(read, radians=radians)}}
    return "/v1/reflections", {"kind": "cell", "frequency": FREQUENCY.tolist(), "sample": sample,
                               "line": {"sample_length": 0.005}}  # fmt: skip


@pytest.mark.parametrize(
    ("asked", "expected", "place"),
    [(filled_line, "90 to 180 degrees", "#/sample/reflection/degrees"),
     (two_ports, "0.0022 m of air alone turn a wave by 7.925 degrees", "#/sample/s21/degrees")],
)  # fmt: skip
def test_radians_that_no_medium_can_have_as_degrees_are_refused(server, asked, expected, place):
    path, body = asked(radians=True)
    text, places = refused(server.client.post(path, json=body))
    assert "these look like radians" in text
    assert expected in text
    assert place in places
    path, body = asked(radians=False)
    assert server.client.post(path, json=body).status_code == 200


@pytest.mark.parametrize("asked", [
    lambda radians: two_ports(radians=radians, most=5e8), short_cell,
    lambda radians: filled_line(radians=radians, air_length=0.01),
], ids=["low", "cell", "air-before"])  # fmt: skip
def test_phases_within_pi_are_asked_about(server, asked):
    codes = {}
    for radians in (True, False):
        path, body = asked(radians=radians)
        answer = server.client.post(path, json=body)
        assert answer.status_code == 200, answer.text
        codes[radians] = {one["code"] for one in answer.json()["advisories"]}
    assert "phase-unit-suspected" in codes[True] - codes[False]


def test_a_shorted_cell_in_radians_does_not_pass_for_a_short(server):
    path, body = short_cell(radians=True)
    flags = server.client.post(path, json=body).json()["spectrum"]["flags"]
    assert all("not-shorted" in told for told in flags)
