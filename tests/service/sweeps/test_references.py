"""Sweeps that refer to another impedance than the line, or than one another: scikit-rf rewrites."""

import numpy as np
import pytest
import skrf

from tests.models.reflection.sweep_records import tip_text, truths
from tests.service.sweeps.asking import STANDARDS, columns, refused, tip_request, two_port_text

LOAM = truths("two_port")["loam_30mm"][1]
LINE = {"sample_length": 0.03}


def rewritten(text, ports, impedance):
    """A Touchstone text in 50 ohm as scikit-rf refers it to another impedance, in its own R."""
    network = _network(text, ports)
    network.renormalize(impedance)
    s = network.s.swapaxes(1, 2).reshape(len(network.f), -1)
    cells = np.column_stack([network.f, s.view(float)])
    rows = "\n".join(" ".join(f"{cell:.17g}" for cell in row) for row in cells)
    return f"# Hz S RI R {impedance:g}\n{rows}\n"


def _network(text, ports):
    rows = np.array([[float(cell) for cell in line.split()] for line in text.splitlines()
                     if line and line[0] not in "!#"])  # fmt: skip
    s = (rows[:, 1::2] + 1j * rows[:, 2::2]).reshape(-1, ports, ports).swapaxes(1, 2)
    return skrf.Network(f=rows[:, 0], s=s, z0=50.0, f_unit="Hz")


def answered(server, path, body):
    answer = server.client.post(path, json=body)
    assert answer.status_code == 200, answer.text
    return answer.json()


def permittivity(spectrum):
    return np.array(spectrum["real_permittivity"], dtype=float) - 1j * np.array(
        spectrum["imaginary_permittivity"], dtype=float
    )


def said(answer):
    return {one["code"]: one["text"] for one in answer["advisories"]}


def test_a_two_port_file_in_75_ohm_gives_the_same_permittivity(server):
    text = rewritten(two_port_text("loam_30mm"), 2, 75.0)
    body = {"sample": {"touchstone": text}, "line": LINE}
    answer = answered(server, "/v1/scattering", body)
    np.testing.assert_allclose(permittivity(answer["spectrum"]), LOAM, rtol=1e-6)
    assert "refer to 75 Ohm" in said(answer)["renormalised"]
    assert "brought to 50 Ohm" in said(answer)["renormalised"]


def test_a_line_of_75_ohm_takes_a_file_in_75_ohm_as_it_is(server):
    text = two_port_text("loam_30mm").replace("R 50", "R 75")
    body = {"sample": {"touchstone": text}, "line": {**LINE, "impedance": 75}}
    answer = answered(server, "/v1/scattering", body)
    np.testing.assert_allclose(permittivity(answer["spectrum"]), LOAM, rtol=1e-6)
    assert "renormalised" not in said(answer)


def version_2(text, references):
    rows = [line for line in text.splitlines() if line and line[0] not in "!#"]
    return "\n".join(["[Version] 2.0", "# Hz S RI", "[Number of Ports] 2",
                      f"[Reference] {references}", "[Network Data]", *rows, "[End]"])  # fmt: skip


def test_ports_of_unlike_references_are_brought_to_the_line(server):
    network = _network(two_port_text("loam_30mm"), 2)
    network.renormalize([50.0, 75.0])
    s = network.s.swapaxes(1, 2).reshape(len(network.f), -1)
    text = "\n".join(" ".join(f"{cell:.17g}" for cell in row)
                     for row in np.column_stack([network.f, s.view(float)]))  # fmt: skip
    body = {"sample": {"touchstone": version_2(text, "50 75")}, "line": LINE}
    answer = answered(server, "/v1/scattering", body)
    np.testing.assert_allclose(permittivity(answer["spectrum"]), LOAM, rtol=1e-6)
    assert "refer to 50 and 75 Ohm" in said(answer)["renormalised"]


@pytest.mark.parametrize(
    ("references", "sentence"), [("50", "2 impedances after [Reference]"), ("50 -75", "above 0")]
)
def test_references_that_cannot_be_are_named_with_their_line(server, references, sentence):
    body = {"sample": {"touchstone": version_2(two_port_text("loam_30mm"), references)},
            "line": LINE}  # fmt: skip
    text, places = refused(server.client.post("/v1/scattering", json=body))
    assert sentence in text
    assert "line 4" in text
    assert places == ["#/sample/touchstone"]


def test_a_tip_does_not_care_for_the_reference_that_all_its_files_share(server):
    here = answered(server, "/v1/reflections", tip_request())
    texts = {one["name"]: rewritten(one["touchstone"], 1, 75.0) for one in STANDARDS}
    body = tip_request(sample={"touchstone": rewritten(tip_text("loam"), 1, 75.0)})
    for one in body["standards"]:
        one["touchstone"] = texts[one["name"]]
    there = answered(server, "/v1/reflections", body)
    np.testing.assert_allclose(
        permittivity(there["spectrum"]), permittivity(here["spectrum"]), rtol=1e-4
    )
    assert "renormalised" not in said(there)


def test_a_tip_brings_a_sample_of_another_reference_to_its_standards(server):
    here = answered(server, "/v1/reflections", tip_request())
    body = tip_request(sample={"touchstone": rewritten(tip_text("loam"), 1, 75.0)})
    there = answered(server, "/v1/reflections", body)
    np.testing.assert_allclose(
        permittivity(there["spectrum"]), permittivity(here["spectrum"]), rtol=1e-4
    )
    assert "4 in all" in said(there)["renormalised"]


def test_stated_noise_follows_a_sweep_to_another_impedance(server):
    """In 75 ohm a loam reflects more: the same noise says less of it than in 50 ohm."""
    reads = np.array([-0.5 + 0.05j, -0.52 + 0.04j, -0.53 + 0.03j])
    text = "".join(f"{n} {r.real} {r.imag}\n" for n, r in enumerate(reads, 1))
    widths = {}
    for impedance in (50, 75):
        file = f"# GHz S RI R {impedance}\n{text}"
        body = {"kind": "filled-line", "sample": {"touchstone": file}, "reflection_u": 1e-3}
        widths[impedance] = answered(server, "/v1/reflections", body)["spectrum"]
    # eps = ((1 - r) / (1 + r))^2; in 75 ohm eps = (z0 / z)^2 with z = 75 (1 + r) / (1 - r)
    slope = np.abs(4 * (1 - reads) / (1 + reads) ** 3)
    for impedance, spectrum in widths.items():
        expected = slope * (50 / impedance) ** 2 * 1e-3
        np.testing.assert_allclose(spectrum["real_permittivity_u"], expected, rtol=1e-6)


def test_numbers_are_taken_as_referring_to_the_line(server):
    frequency, s = numbers_of("loam_30mm")
    body = {"frequency": frequency.tolist(), "line": {**LINE, "impedance": 75},
            "sample": {name: columns(part) for name, part in s.items()}}  # fmt: skip
    answer = answered(server, "/v1/scattering", body)
    np.testing.assert_allclose(permittivity(answer["spectrum"]), LOAM, rtol=1e-6)
    assert "renormalised" not in said(answer)


def numbers_of(name):
    network = _network(two_port_text(name), 2)
    return network.f, {"s11": network.s[:, 0, 0], "s21": network.s[:, 1, 0]}
