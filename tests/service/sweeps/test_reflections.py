"""POST /v1/reflections over real HTTP: tips, lines, cells."""

import copy

import numpy as np
import pytest

from models.reflection.line import cell, filled
from models.reflection.sweep_flags import SWEEP_FLAGS
from tests.models.reflection.sweep_records import debye, tip_sweep, truths
from tests.service.sweeps.asking import STANDARDS, columns, tip_request

TRUTH = truths("tip")
FREQUENCY = np.linspace(0.1e9, 3e9, 40)
SOIL = debye(FREQUENCY)


def ask(server, **changes):
    answer = server.client.post("/v1/reflections", json=tip_request(**changes))
    assert answer.status_code == 200, answer.text
    return answer.json()


def permittivity(spectrum):
    real, loss = (np.array(spectrum[f"{part}_permittivity"], dtype=float)
                  for part in ("real", "imaginary"))  # fmt: skip
    return real - 1j * loss


def test_a_tip_with_four_liquids_gives_the_soil_to_a_thousandth_up_to_3_ghz(server):
    spectrum = ask(server)["spectrum"]
    frequency, truth = TRUTH["loam"]
    assert spectrum["frequency"] == frequency.tolist()
    away = np.abs(permittivity(spectrum) - truth) / np.abs(truth)
    assert away[frequency <= 3e9].max() < 1e-3


def test_complex_numbers_say_the_same_as_touchstone(server):
    frequency, _ = tip_sweep("loam")
    sweeps = {"sample": "loam", "short": "short", "air": "air", "water": "water25",
              "methanol": "methanol25"}  # fmt: skip
    read = {name: tip_sweep(stored)[1] for name, stored in sweeps.items()}
    standards = [
        {
            **{k: v for k, v in s.items() if k != "touchstone"},
            "reflection": columns(read[s["name"]]),
        }
        for s in STANDARDS
    ]
    polar = {"magnitude": np.abs(read["sample"]).tolist(),
             "degrees": np.degrees(np.angle(read["sample"])).tolist()}  # fmt: skip
    answer = ask(server, frequency=(frequency / 1e9).tolist(), units={"frequency": "GHz"},
                 standards=standards, sample={"reflection": polar})  # fmt: skip
    np.testing.assert_allclose(
        permittivity(answer["spectrum"]), permittivity(ask(server)["spectrum"]), rtol=1e-9
    )
    assert answer["units"]["frequency"] == "GHz"
    assert answer["spectrum"]["frequency"][0] == pytest.approx(0.15)


def test_several_samples_are_answered_in_their_shape(server):
    one = tip_request()["sample"]
    answer = ask(server, sample=[{**one, "name": "first"}, {**one, "name": "second"}])
    assert [sample["name"] for sample in answer["samples"]] == ["first", "second"]
    assert answer["samples"][0]["spectrum"] == answer["samples"][1]["spectrum"]
    assert answer["samples"][0]["spectrum"] == ask(server)["spectrum"]


def test_every_number_has_its_uncertainty_and_interval(server):
    answer = ask(server, reflection_u=5e-4)
    spectrum = answer["spectrum"]
    for name in ("real_permittivity", "imaginary_permittivity"):
        value, u, shared, lower, upper = (
            np.array(spectrum[name + suffix])
            for suffix in ("", "_u", "_u_shared", "_lower", "_upper")
        )
        assert np.all(u > 0)
        assert np.all(shared <= u)
        np.testing.assert_allclose(upper - value, 1.959964 * u, rtol=1e-6)
        np.testing.assert_allclose(value - lower, 1.959964 * u, rtol=1e-6)
    assert answer["noise"] == {"reflection_u": 5e-4, "source": "stated"}


def test_exact_standards_leave_only_the_noise(server):
    standards = copy.deepcopy(STANDARDS)
    for standard in standards[1:]:
        standard["relative_uncertainty"] = 0
    spectrum = ask(server, standards=standards, reflection_u=5e-4)["spectrum"]
    assert max(spectrum["real_permittivity_u_shared"]) == 0
    assert min(spectrum["real_permittivity_u"]) > 0


def test_a_medium_of_the_callers_own_serves_as_a_standard(server):
    frequency, water = TRUTH["water25"]
    own = {k: v for k, v in STANDARDS[2].items() if k != "temperature"}
    listed = {**own, "name": "our water", "real_permittivity": water.real.tolist(),
              "imaginary_permittivity": (-water.imag).tolist()}  # fmt: skip
    methanol = {**STANDARDS[3], "name": "drum 3",
                "relaxation": {"static_permittivity": 32.6, "infinite_permittivity": 5.6,
                               "relaxation_time": 50.0}}  # fmt: skip
    answer = ask(server, standards=[*STANDARDS[:2], listed, methanol])
    expected = permittivity(ask(server)["spectrum"])
    np.testing.assert_allclose(permittivity(answer["spectrum"]), expected, rtol=1e-6)
    assert frequency.size == len(answer["spectrum"]["frequency"])


def test_salt_water_is_a_standard_by_its_conductivity(server):
    salt = {"name": "saline", "temperature": 25, "conductivity_25": 10.67,
            "touchstone": (STANDARDS[2]["touchstone"])}  # fmt: skip
    answer = server.client.post(
        "/v1/reflections",
        json=tip_request(standards=[*STANDARDS[:2], salt, STANDARDS[3]]),
    )
    assert answer.status_code == 200
    assert not next(c for c in answer.json()["checks"] if c["code"] == "standards-inconsistent")[
        "holds"
    ]


def test_repeats_stand_in_for_a_stated_noise(server):
    text = tip_request()["sample"]["touchstone"]
    answer = ask(server, sample={"touchstone": [text, text, text]}, reflection_u=5e-4)
    assert answer["spectrum"]["real_permittivity"][5] == pytest.approx(
        ask(server)["spectrum"]["real_permittivity"][5], rel=1e-9
    )


def test_radii_bring_the_practice_checks(server):
    radii = {"inner_radius": 0.456e-3, "outer_radius": 1.49e-3}
    sample = {**tip_request()["sample"], "grain_size": 1e-3, "thickness": 0.02}
    answer = ask(server, aperture=radii, sample=sample)
    checks = {check["code"]: check for check in answer["checks"]}
    assert not checks["grain-size"]["holds"]
    assert checks["grain-size"]["value"] == pytest.approx(1.034, abs=1e-3)
    assert checks["grain-size"]["limit"] == 50
    assert not checks["air-gap"]["holds"]
    assert answer["aperture"]["capacitance"] == pytest.approx(2.2717e-14, rel=1e-4)
    for check in answer["checks"]:
        assert check["code"] in SWEEP_FLAGS
        assert ("text" in check) == (not check["holds"])


def test_a_limit_withholds_numbers_with_a_flag(server):
    answer = ask(server, reflection_u=5e-4, largest_relative_uncertainty=0.008)
    spectrum = answer["spectrum"]
    for value, flags in zip(spectrum["real_permittivity"], spectrum["flags"], strict=True):
        assert (value is None) == ("too-uncertain" in flags)
    assert any(value is None for value in spectrum["real_permittivity"])


def test_what_was_not_stated_is_said(server):
    three = ask(server, standards=STANDARDS[:3])
    assert three["noise"]["source"] == "not known"
    assert "no-uncertainty-stated" in {a["code"] for a in three["advisories"]}
    assert three["aperture"]["model"] == "capacitive"
    assert ask(server)["aperture"]["model"] == "fitted"


def test_a_spectrum_can_be_sent_on(server):
    spectrum = ask(server, reflection_u=5e-4)["spectrum"]
    names = ("frequency", "real_permittivity", "imaginary_permittivity")
    answer = server.client.post(
        "/v1/spectra",
        json={"spectrum": {name: spectrum[name] for name in names}, "model": {"terms": ["debye"]}},
    )
    assert answer.status_code == 200, answer.text


@pytest.mark.parametrize("ends", [("short",), ("open",), ("short", "open")])
def test_a_cell_gives_its_permittivity(server, ends):
    sample = {
        end: {"reflection": columns(cell.reflection(SOIL, FREQUENCY, 0.03, end)[0])} for end in ends
    }
    request = {"kind": "cell", "frequency": FREQUENCY.tolist(), "sample": sample,
               "line": {"sample_length": 0.03}, "reflection_u": 1e-3}  # fmt: skip
    answer = server.client.post("/v1/reflections", json=request)
    assert answer.status_code == 200, answer.text
    np.testing.assert_allclose(permittivity(answer.json()["spectrum"]), SOIL, rtol=1e-8)


def test_a_filled_line_gives_its_permittivity(server):
    request = {"kind": "filled-line", "frequency": FREQUENCY.tolist(),
               "sample": {"reflection": columns(filled.reflection(SOIL)[0])},
               "line": {"sample_length": 1.0}}  # fmt: skip
    answer = server.client.post("/v1/reflections", json=request).json()
    np.testing.assert_allclose(permittivity(answer["spectrum"]), SOIL, rtol=1e-9)
    assert answer["noise"]["source"] == "not known"
