"""POST /v1/scattering over real HTTP."""

import numpy as np
import pytest

from models.reflection.two_port.forward import scattering
from tests.models.reflection.sweep_records import debye, truths
from tests.service.sweeps.asking import columns, two_port_text

TRUTH = truths("two_port")
FREQUENCY = np.linspace(0.1e9, 6e9, 60)
SOIL = debye(FREQUENCY)


def ask(server, **request):
    answer = server.client.post("/v1/scattering", json=request)
    assert answer.status_code == 200, answer.text
    return answer.json()


def values(spectrum, name="permittivity"):
    real, loss = (
        np.array(spectrum[f"{part}_{name}"], dtype=float) for part in ("real", "imaginary")
    )
    return real - 1j * loss


@pytest.mark.parametrize("name", ["ptfe_20mm", "loam_30mm"])
@pytest.mark.parametrize("method", [None, "nicolson-ross-weir", "baker-jarvis-1990"])
def test_a_file_gives_its_permittivity_to_a_millionth(server, name, method):
    length = 0.02 if name == "ptfe_20mm" else 0.03
    answer = ask(server, sample={"touchstone": two_port_text(name)}, method=method,
                 line={"sample_length": length})  # fmt: skip
    np.testing.assert_allclose(values(answer["spectrum"]), TRUTH[name][1], rtol=1e-6)
    assert answer["method"] == method or method is None


def test_a_magnetic_sample_is_answered_with_its_permeability(server):
    s11, s21 = scattering(SOIL, 1.8 - 0.2j, FREQUENCY, 0.02)
    answer = ask(server, frequency=FREQUENCY.tolist(), line={"sample_length": 0.02},
                 sample={"s11": columns(s11), "s21": columns(s21)}, reflection_u=1e-4)  # fmt: skip
    assert answer["method"] == "nicolson-ross-weir"
    np.testing.assert_allclose(values(answer["spectrum"], "permeability"), 1.8 - 0.2j, rtol=1e-9)
    assert not next(c for c in answer["checks"] if c["code"] == "magnetic")["holds"]
    assert answer["units"]["real_permeability"] == "1"


def test_the_position_of_a_sample_is_told(server):
    s11, s21 = scattering(SOIL, 1.0, FREQUENCY, 0.02)
    one, other = (np.exp(-2j * np.pi * FREQUENCY * d / 299792458.0) for d in (0.012, 0.018))
    sample = {"s11": columns(s11 * one**2), "s22": columns(s11 * other**2),
              "s21": columns(s21 * one * other)}  # fmt: skip
    answer = ask(server, frequency=FREQUENCY.tolist(), sample=sample,
                 line={"sample_length": 0.02, "holder_length": 0.05})  # fmt: skip
    assert answer["position"]["air_before"] == pytest.approx(0.012, abs=1e-8)
    np.testing.assert_allclose(values(answer["spectrum"]), SOIL, rtol=1e-6)


def test_the_other_convention_is_said(server):
    s11, s21 = (np.conj(s) for s in scattering(SOIL, 1.0, FREQUENCY, 0.02))
    answer = ask(server, frequency=FREQUENCY.tolist(), line={"sample_length": 0.02},
                 sample={"s11": columns(s11), "s21": columns(s21)})  # fmt: skip
    assert answer["conjugated"]
    assert "conjugated" in {advisory["code"] for advisory in answer["advisories"]}
    np.testing.assert_allclose(values(answer["spectrum"]), SOIL, rtol=1e-9)


def test_uncertain_lengths_are_in_the_band(server):
    request = {"sample": {"touchstone": two_port_text("loam_30mm")}}
    exact = ask(server, **request, line={"sample_length": 0.03})["spectrum"]
    length = {"sample_length": 0.03, "sample_length_u": 3e-5}
    wider = ask(server, **request, line=length)["spectrum"]
    assert max(exact["real_permittivity_u_shared"]) == 0
    shared = np.array(wider["real_permittivity_u_shared"]) / np.array(wider["real_permittivity"])
    assert 1e-4 < np.median(shared) < 4e-3
