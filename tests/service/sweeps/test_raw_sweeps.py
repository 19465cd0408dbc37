"""A sweep as the raw record of a reading: water content with a band in one call."""

import copy

import numpy as np
import pytest

from tests.models.reflection.sweep_records import tip_text, truths
from tests.service.sweeps.asking import STANDARDS, refused, two_port_text

TIP, TWO = truths("tip"), truths("two_port")
SOIL = {"porosity": 0.45, "solid_permittivity": 4.7}


def request(**changes):
    return copy.deepcopy({
        "mixing_model": "crim",
        "soil": SOIL,
        "raw_records": {"reflection": {"standards": STANDARDS, "at_frequency": 0.9e9,
                                       "reflection_u": 5e-4}},
        "readings": [{"temperature": 25, "reflection": {"touchstone": tip_text("loam")}},
                     {"temperature": 25, "reflection": {"touchstone": tip_text("drysand")}}],
        **changes,
    })  # fmt: skip


def ask(server, body):
    return server.client.post("/v1/estimates", json=body)


def test_a_tip_sweep_becomes_water_content(server):
    answer = ask(server, request())
    assert answer.status_code == 200, answer.text
    loam, sand = answer.json()["estimates"]
    frequency, truth = TIP["loam"]
    eps = truth[frequency == 0.9e9][0]
    assert loam["real_permittivity"] == pytest.approx(eps.real, rel=1e-3)
    assert loam["imaginary_permittivity"] == pytest.approx(-eps.imag, rel=1e-2)
    assert loam["frequency"] == 0.9e9
    # the loam was made of 0.25 m3/m3 of water, the sand of 0.02 at a porosity of 0.40
    assert loam["water_content"] == pytest.approx(0.25, abs=0.002)
    assert loam["water_content_lower"] < 0.25 < loam["water_content_upper"]
    assert sand["water_content"] < 0.06


def test_the_uncertainty_of_the_sweep_is_in_the_band(server):
    narrow = ask(server, request()).json()["estimates"][0]
    body = request()
    body["raw_records"]["reflection"]["reflection_u"] = 2e-2
    wide = ask(server, body).json()["estimates"][0]
    assert wide["real_permittivity_u"] > 5 * narrow["real_permittivity_u"]
    assert wide["water_content_u"] > 1.2 * narrow["water_content_u"]


def test_readings_as_columns_are_answered_as_columns(server):
    rows = request()["readings"]
    body = request(readings={name: [row[name] for row in rows] for name in rows[0]})
    answer = ask(server, body).json()["estimates"]
    expected = ask(server, request()).json()["estimates"]
    assert answer["water_content"] == [row["water_content"] for row in expected]


def test_a_two_port_sweep_becomes_water_content(server):
    body = request(
        raw_records={"scattering": {"at_frequency": 1.0, "line": {"sample_length": 0.03}}},
        readings=[{"temperature": 22, "scattering": {"touchstone": two_port_text("loam_30mm")}}],
        units={"frequency": "GHz"},
    )
    answer = ask(server, body)
    assert answer.status_code == 200, answer.text
    (row,) = answer.json()["estimates"]
    frequency, truth = TWO["loam_30mm"]
    assert row["real_permittivity"] == pytest.approx(
        float(np.interp(1e9, frequency, truth.real)), rel=1e-4
    )
    assert row["frequency"] == pytest.approx(1.0)
    assert row["water_content"] == pytest.approx(0.25, abs=0.002)


def test_a_cell_becomes_water_content_like_a_tip(server):
    text = "# GHz S RI R 50\n" + "".join(f"{f} -0.5 0.0\n" for f in (0.5, 1.0, 1.5))
    body = request(
        raw_records={"reflection": {"kind": "filled-line", "at_frequency": 1e9}},
        readings=[{"temperature": 20, "reflection": {"touchstone": text}}],
    )
    answer = ask(server, body).json()
    # R = -0.5 from an air line: eps = (1.5 / 0.5)^2 = 9
    assert answer["estimates"][0]["real_permittivity"] == pytest.approx(9.0)
    told = answer["raw_records"]["reflection"]["advisories"]
    assert "no-uncertainty-stated" in {advisory["code"] for advisory in told}


def test_a_row_without_a_sweep_has_no_number(server):
    body = request()
    body["readings"].append({"temperature": 25})
    answer = ask(server, body).json()["estimates"]
    assert answer[2]["water_content"] is None
    assert answer[0]["water_content"] is not None


def changed(steps, value):
    body = request()
    place = body
    for step in steps[:-1]:
        place = place[step]
    if value is None:
        place.pop(steps[-1])
    else:
        place[steps[-1]] = value
    return body


@pytest.mark.parametrize(
    ("steps", "value", "sentence", "pointer"),
    [
        (("raw_records",), None, "give raw_records.reflection", "#/raw_records/reflection"),
        (("raw_records", "reflection", "at_frequency"), None, "at_frequency is missing",
         "#/raw_records/reflection/at_frequency"),
        (("raw_records", "reflection", "at_frequency"), 9e9, "the sweeps span",
         "#/raw_records/reflection/at_frequency"),
        (("raw_records", "reflection", "at_frequency"), True, "at_frequency is missing",
         "#/raw_records/reflection/at_frequency"),
        (("raw_records", "reflection", "standards", 2, "temperature"), None,
         "temperature is missing", "#/raw_records/reflection/standards/2/temperature"),
        (("raw_records", "reflection", "standrds"), [], "did you mean standards?",
         "#/raw_records/reflection/standrds"),
        (("raw_records", "reflection", "sample"), {}, "stands in the readings",
         "#/raw_records/reflection/sample"),
        (("readings", 1, "reflection", "touchstone"), "# GHz S RI R 50\n1 2\n",
         "expected 3 numbers", "#/readings/1/reflection/touchstone"),
        (("readings", 1, "reflection"), 7, "expected an object", "#/readings/1/reflection"),
    ],
)  # fmt: skip
def test_what_cannot_be_used_is_named_where_it_stands(server, steps, value, sentence, pointer):
    text, places = refused(ask(server, changed(steps, value)))
    assert sentence in text
    assert pointer in places


def mirrored(text, factor=1.0):
    """A Touchstone text in real and imaginary parts with every reflection conjugated."""
    lines = []
    for line in text.splitlines():
        if line.startswith(("!", "#")) or not line.strip():
            lines.append(line)
            continue
        frequency, real, imaginary = line.split()
        lines.append(f"{frequency} {factor * float(real)!r} {-factor * float(imaginary)!r}")
    return "\n".join(lines)


def of_records(answer):
    """What the answer says of its raw records."""
    said = answer["advisories"]
    return [one["text"] for one in said if one["code"] == "raw-record-flags"]


def test_standards_that_were_mistaken_are_told_beside_the_estimate(server):
    body = request()
    standards = [one for one in body["raw_records"]["reflection"]["standards"]
                 if one["name"] != "methanol"]  # fmt: skip
    short, air, water = standards
    air["touchstone"], water["touchstone"] = water["touchstone"], air["touchstone"]
    body["raw_records"]["reflection"]["standards"] = [short, air, water]
    told = " ".join(of_records(ask(server, body).json()))
    assert "flagged port-not-passive where they were read, 2 in all" in told
    assert "#/readings/0/reflection, #/readings/1/reflection" in told
    assert not of_records(ask(server, request()).json())


def test_a_sample_conjugated_alone_is_told_as_its_sweep_is_flagged(server):
    body = request()
    body["readings"][0]["reflection"]["touchstone"] = mirrored(tip_text("loam"))
    answer = ask(server, body).json()
    row = answer["estimates"][0]
    assert row["water_content"] is None
    assert not any(flag.startswith("missing:") for flag in row["flags"])
    assert "above-water where they were read, 1 in all (#/readings/0/reflection)" in " ".join(
        of_records(answer)
    )


# From an air line R = 0.5 is eps = (0.5 / 1.5)^2 = 0.11, and R = -1 has no permittivity.
@pytest.mark.parametrize(
    ("read", "flagged", "own"),
    [("0.5", "out-of-gate:real_permittivity", "below-vacuum"), ("-1.0", "no-solution", "no-root")],
)
def test_a_sweep_that_gives_no_permittivity_is_not_missing_from_its_row(server, read, flagged, own):
    text = "# GHz S RI R 50\n" + "".join(f"{f} {read} 0.0\n" for f in (0.5, 1.0, 1.5))
    body = request(
        raw_records={"reflection": {"kind": "filled-line", "at_frequency": 1e9}},
        readings=[{"temperature": 20, "reflection": {"touchstone": text}}],
    )
    answer = ask(server, body).json()
    row = answer["estimates"][0]
    assert row["water_content"] is None
    assert flagged in row["flags"]
    assert not any(flag.startswith("missing:") for flag in row["flags"])
    assert f"flagged {own} where" in " ".join(of_records(answer))


def test_a_sweep_less_certain_than_asked_for_is_told_with_its_reason(server):
    body = request()
    body["raw_records"]["reflection"]["largest_relative_uncertainty"] = 1e-6
    answer = ask(server, body).json()
    assert answer["estimates"][0]["flags"] == ["no-permittivity", "raw-record-flagged"]
    assert "flagged too-uncertain where" in " ".join(of_records(answer))


def test_conjugated_sweeps_are_told_beside_the_estimate(server):
    body = request()
    for one in (*body["raw_records"]["reflection"]["standards"],
                *(row["reflection"] for row in body["readings"])):  # fmt: skip
        one["touchstone"] = mirrored(one["touchstone"])
    answer = ask(server, body).json()
    assert answer["estimates"][0]["water_content"] == pytest.approx(0.25, abs=0.002)
    assert "flagged conjugated where they were read, 2 in all" in " ".join(of_records(answer))
    every = ask(server, {**body, "mixing_model": "all"}).json()
    assert "flagged conjugated where they were read, 2 in all" in " ".join(of_records(every))


def of_two_ports(**changes):
    return request(**{
        "raw_records": {"scattering": {"at_frequency": 1e9, "line": {"sample_length": 0.03}}},
        "readings": [{"temperature": 22, "scattering": {"touchstone": two_port_text("loam_30mm")}}],
        **changes,
    })  # fmt: skip


def codes(answer):
    assert answer.status_code == 200, answer.text
    return {one["code"] for one in answer.json()["advisories"]}


def test_what_is_said_of_sweeps_is_said_beside_the_estimate(server):
    body = request()
    body["raw_records"]["reflection"]["standards"] = STANDARDS[:3]
    assert "aperture-not-told" in codes(ask(server, body))
    assert "aperture-not-told" not in codes(ask(server, request()))
    wrong = {"scattering": {"at_frequency": 1e9, "line": {"sample_length": 0.02}}}
    answer = ask(server, of_two_ports(raw_records=wrong))
    assert "sample-length-suspected" in codes(answer)
    assert "raw-record-flagged" in answer.json()["estimates"][0]["flags"]
    right = ask(server, of_two_ports())
    assert "sample-length-suspected" not in codes(right)
    assert right.json()["estimates"][0]["flags"] == []


def test_a_file_of_another_reference_is_told_beside_the_estimate(server):
    body = of_two_ports()
    sweep = body["readings"][0]["scattering"]
    sweep["touchstone"] = sweep["touchstone"].replace("R 50", "R 75")
    assert "renormalised" in codes(ask(server, body))


def test_lengths_of_raw_records_come_in_the_units_of_the_request(server):
    plain = ask(server, of_two_ports()).json()["estimates"][0]
    units = {"sample_length": "mm", "grain_size": "mm", "frequency": "GHz"}
    body = of_two_ports(units=units)
    body["raw_records"]["scattering"] = {"at_frequency": 1.0, "line": {"sample_length": 30.0}}
    body["readings"][0]["scattering"]["grain_size"] = 0.2
    answer = ask(server, body)
    assert answer.status_code == 200, answer.text
    found = answer.json()["estimates"][0]["real_permittivity"]
    assert found == pytest.approx(plain["real_permittivity"], rel=1e-9)
    text, places = refused(ask(server, of_two_ports(units={"sample_lenght": "mm"})))
    assert "did you mean sample_length?" in text
    assert places == ["#/units/sample_lenght"]


def test_an_open_cell_that_is_shorted_is_named_in_its_reading(server):
    f = np.linspace(0.05e9, 2e9, 40)
    way = np.tan(2 * np.pi * f * 0.01 * 3 / 299792458.0) / 3
    read = (1j * way - 1) / (1j * way + 1)
    sweep = {"reflection": {"real": read.real.tolist(), "imaginary": read.imag.tolist()}}
    body = request(
        raw_records={"reflection": {"kind": "cell", "at_frequency": 1e9, "frequency": f.tolist(),
                                    "line": {"sample_length": 0.01}}},
        readings=[{"temperature": 20, "reflection": {"open": sweep}}],
    )  # fmt: skip
    text, places = refused(ask(server, body))
    assert "this is a shorted end" in text
    assert places == ["#/readings/0/reflection/open"]
