"""Touchstone 1.1 and 2.0, in every unit and format; read as scikit-rf reads them."""

import io

import numpy as np
import pytest
import skrf

from service.formats.errors import FormatError
from service.formats.networks.touchstone import read
from tests.models.reflection.sweep_records import RECORDS

VALUES = np.array([0.5 + 0.25j, -0.1 + 0.9j, -0.75 - 0.2j])


def one_port(unit="GHz", form="RI", scale=1.0, tail=""):
    parts = {
        "RI": (VALUES.real, VALUES.imag),
        "MA": (np.abs(VALUES), np.degrees(np.angle(VALUES))),
        "DB": (20 * np.log10(np.abs(VALUES)), np.degrees(np.angle(VALUES))),
    }[form]
    rows = [
        f"{k * scale:.9g} {a:.12f} {b:.12f}{tail}"
        for k, (a, b) in enumerate(zip(*parts, strict=True), 1)
    ]
    return f"! invented\n# {unit} S {form} R 50\n" + "\n".join(rows) + "\n"


@pytest.mark.parametrize(("unit", "scale"), [("Hz", 1e9), ("kHz", 1e6), ("MHz", 1e3), ("GHz", 1)])
@pytest.mark.parametrize("form", ["RI", "MA", "DB"])
def test_every_unit_and_format_is_read(unit, scale, form):
    found = read(one_port(unit, form, scale), 1)
    np.testing.assert_allclose(found.frequency, [1e9, 2e9, 3e9], rtol=1e-9)
    np.testing.assert_allclose(found.parameters[:, 0, 0], VALUES, rtol=1e-9)
    assert found.references == (50.0,)


def test_an_empty_option_line_means_gigahertz_magnitude_and_degrees():
    found = read("#\n1 0.5 90\n", 1)
    assert found.frequency[0] == 1e9
    assert found.parameters[0, 0, 0] == pytest.approx(0.5j, abs=1e-15)


def test_comments_stand_anywhere_and_words_come_in_any_order_and_case():
    text = "! a\n\n# r 75 ri s mhz ! b\n! c\n100 .1 .2 ! d\n# GHz S DB R 50\n200 .3 .4\n"
    found = read(text, 1)
    np.testing.assert_allclose(found.frequency, [1e8, 2e8])
    assert found.references == (75.0,)


@pytest.mark.parametrize("name", ["ptfe_20mm", "loam_30mm", "drysand_50mm"])
def test_two_ports_are_read_as_scikit_rf_reads_them(name):
    path = RECORDS / "two_port" / f"{name}.s2p"
    oracle = skrf.Network(str(path))
    found = read(path.read_text("utf-8"), 2)
    np.testing.assert_allclose(found.frequency, oracle.f, rtol=1e-12)
    np.testing.assert_allclose(found.parameters, oracle.s, rtol=1e-12, atol=1e-15)


TWO = """[Version] 2.0
# MHz S RI R 50
[Number of Ports] 2
[Two-Port Data Order] {order}
[Number of Frequencies] 2
[Reference] 50
 75
[Begin Information]
  anything at all 1 2 3
[End Information]
[Network Data]
100 .11 0 .21 0
    .12 0 .22 0
200 .11 1 .21 1 .12 1 .22 1
[Noise Data]
4 5 6
[End]
"""


@pytest.mark.parametrize(("order", "s21"), [("21_12", 0.21), ("12_21", 0.12)])
def test_version_2_says_in_which_order_its_numbers_stand(order, s21):
    found = read(TWO.format(order=order), 2)
    assert found.parameters[0, 1, 0] == pytest.approx(s21)
    np.testing.assert_allclose(found.frequency, [1e8, 2e8])


def test_version_2_is_read_as_scikit_rf_reads_it():
    text = TWO.format(order="21_12").replace(" 75\n", " 50\n")
    for part in ("[Noise Data]\n4 5 6\n", "[Begin Information]\n  anything at all 1 2 3\n",
                 "[End Information]\n"):  # fmt: skip
        text = text.replace(part, "")
    file = io.StringIO(text)
    file.name = "invented.ts"
    np.testing.assert_allclose(read(text, 2).parameters, skrf.Network(file).s, atol=1e-15)


@pytest.mark.parametrize("form", ["Lower", "Upper"])
def test_half_a_matrix_is_enough_for_a_reciprocal_sample(form):
    text = (
        "[Version] 2.0\n# GHz S RI\n[Number of Ports] 2\n[Two-Port Data Order] 21_12\n"
        f"[Matrix Format] {form}\n[Network Data]\n1 .11 0 .21 0 .22 0\n[End]\n"
    )
    found = read(text, 2).parameters[0]
    np.testing.assert_allclose(found.real, [[0.11, 0.21], [0.21, 0.22]])


def test_noise_data_of_version_1_are_left_alone():
    text = "# GHz S RI R 50\n1 1 0 2 0 3 0 4 0\n2 1 0 2 0 3 0 4 0\n1 .5 .1 20 .3\n2 .6 .1 21 .3\n"
    assert read(text, 2).frequency.size == 2


@pytest.mark.parametrize(
    ("text", "ports", "sentence"),
    [
        ("", 1, "option line that starts with #, found none"),
        ("1 0.5 0\n", 1, "option line that starts with #"),
        ("# GHz S RI R 50\n", 1, "expected lines of 3 numbers, found no line of numbers at all"),
        ("# GHz S RI R 50\n1 0.5\n", 1, "line 2: expected 3 numbers, found 2"),
        ("# GHz S RI R 50\n1 .1 0 .2 0 .2 0 .1 0\n", 1, "line 2: expected 3 numbers, found 9"),
        ("# GHz S RI R 50\n1 0.5 0\n", 2, "line 2: expected 9 numbers, found 3"),
        ("# GHz S RI R 50\n1 a 0\n", 1, "line 2: expected numbers, found '1 a 0'"),
        ("# GHz S RI R 50\n1 nan 0\n", 1, "line 2: expected finite numbers"),
        ("# GHz S RI R 50\n2 .5 0\n1 .5 0\n", 1, "line 3: expected frequencies that rise"),
        ("# GHz Z RI R 50\n1 .5 0\n", 1, "line 1: expected S-parameters, found Z-parameters"),
        ("# THz S RI R 50\n1 .5 0\n", 1, "line 1: expected a unit, S, a format and R"),
        ("# GHz S RI R x\n1 .5 0\n", 1, "line 1: expected an impedance"),
        ("[Version] 3.0\n", 1, "line 1: expected one of 2.0, 2.1"),
        ("[Version] 2.0\n# GHz S RI\n[Number of Ports] 4\n", 1, "a file of 1 port"),
        ("[Version] 2.0\n# GHz S RI\n[Number of Ports] two\n", 1, "expected a whole number"),
        ("[Version] 2.0\n# GHz S RI\n[Mixed-Mode Order] S2,1\n", 1, "single-ended ports"),
        ("[Version] 2.0\n# GHz S RI\n[Number of Frequencies] 3\n1 .5 0\n", 1,
         "line 3: expected 3 frequencies, as announced here, found 1"),
        ("[Version] 2.0\n# GHz S RI\n[Network Data]\n1 .5 0\n", 1, "the file may be cut off"),
        ("[Version] 2.0\n# GHz S RI\n[Impedance] 50\n1 .5 0\n[End]\n", 1,
         "line 3: expected a keyword of Touchstone 2.0, found '[impedance]'"),
    ],
)  # fmt: skip
def test_what_is_no_such_file_says_where_and_how_to_mend_it(text, ports, sentence):
    with pytest.raises(FormatError) as caught:
        read(text, ports)
    assert sentence in str(caught.value)
