"""POST /v1/scattering over real HTTP."""

import numpy as np
import pytest

from models.reflection.two_port.forward import scattering
from tests.models.reflection.sweep_records import debye, truths
from tests.service.sweeps.asking import columns, refused, two_port_text

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


def sweep(length=0.05, before=0.0, behind=0.0):
    """S-parameters of a holder with a sample of eps = 6 - 0.3j, and of s12 and s22 with them."""
    s11, s21 = scattering(np.full(FREQUENCY.size, 6 - 0.3j), 1.0, FREQUENCY, length)
    one, other = (np.exp(-2j * np.pi * FREQUENCY * d / 299792458.0) for d in (before, behind))
    return {"s11": columns(s11 * one**2), "s21": columns(s21 * one * other),
            "s12": columns(s21 * one * other), "s22": columns(s11 * other**2)}  # fmt: skip


def flagged(answer, flag):
    """Share of the points that carry a flag."""
    return np.mean([flag in flags for flags in answer["spectrum"]["flags"]])


# Two of the length that is there halve both constants: eps mu L^2 and mu / eps stay as read.
def test_a_length_that_is_too_long_gives_no_permittivity_and_names_the_right_one(server):
    answer = ask(server, frequency=FREQUENCY.tolist(), sample=sweep(0.05), reflection_u=5e-4,
                 line={"sample_length": 0.1})  # fmt: skip
    assert flagged(answer, "magnetic") == flagged(answer, "permeability-below-one") == 1
    assert set(answer["spectrum"]["real_permittivity"]) == {None}
    (told,) = [a["text"] for a in answer["advisories"] if a["code"] == "sample-length-suspected"]
    assert "with 0.05 m the permeability would be 1, 0.1 m was given" in told


def test_a_length_that_is_too_short_is_flagged_at_every_point(server):
    answer = ask(server, frequency=FREQUENCY.tolist(), sample=sweep(0.05), reflection_u=5e-4,
                 line={"sample_length": 0.005})  # fmt: skip
    assert flagged(answer, "magnetic") == 1
    right = ask(server, frequency=FREQUENCY.tolist(), sample=sweep(0.05), reflection_u=5e-4,
                line={"sample_length": 0.05})  # fmt: skip
    flags = {flag for point in right["spectrum"]["flags"] for flag in point}
    assert not flags & {"magnetic", "permeability-below-one", "not-symmetric", "not-reciprocal"}
    assert "sample-length-suspected" not in {a["code"] for a in right["advisories"]}


def test_a_position_that_the_reflections_contradict_is_flagged(server):
    line = {"sample_length": 0.05, "holder_length": 0.1}
    sample = sweep(0.05, 0.03, 0.02)
    for before, expected in ((0.03, 0), (0.01, 1)):
        answer = ask(server, frequency=FREQUENCY.tolist(), sample=sample, reflection_u=5e-4,
                     line={**line, "air_before": before})  # fmt: skip
        assert flagged(answer, "not-symmetric") == expected
        assert "sample-length-suspected" not in {a["code"] for a in answer["advisories"]}


def test_two_directions_that_differ_are_flagged(server):
    sample = sweep()
    sample["s12"] = {part: [0.5 * x for x in values] for part, values in sample["s12"].items()}
    answer = ask(server, frequency=FREQUENCY.tolist(), sample=sample, line={"sample_length": 0.05})
    assert flagged(answer, "not-reciprocal") == 1


def test_a_sample_that_lets_nothing_through_is_refused(server):
    nothing = columns(np.zeros(FREQUENCY.size, dtype=complex))
    sample = dict.fromkeys(("s11", "s21", "s12", "s22"), nothing)
    body = {"frequency": FREQUENCY.tolist(), "line": {"sample_length": 0.05}, "sample": sample}
    text, places = refused(server.client.post("/v1/scattering", json=body))
    assert "every s21 is 0" in text
    assert places == ["#/sample/s21"]
