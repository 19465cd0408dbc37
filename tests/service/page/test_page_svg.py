"""The SVG writer and its axes: well-formed whatever the text, round ticks, broken curves."""

import math
from xml.etree import ElementTree

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from service.page.axes import Axis, axis_for, round_values
from service.page.svg import SHAPES, Drawing, runs

NAMESPACE = "{http://www.w3.org/2000/svg}"


def root(drawing):
    return ElementTree.fromstring(str(drawing))  # noqa: S314 - our own


def elements(drawing, name):
    return list(root(drawing).iter(NAMESPACE + name))


@given(st.text())
def test_any_text_comes_out_as_text(words):
    drawing = Drawing(100, 50, title=words, description=words)
    drawing.text(1, 2, words, fill=words)
    drawing.clip(words, 0, 0, 1, 1)
    assert {child.tag for child in root(drawing).iter()} <= {
        NAMESPACE + tag for tag in ("svg", "title", "desc", "rect", "text", "clipPath")
    }


def test_a_script_in_a_name_stays_a_name():
    drawing = Drawing(100, 50, title="t")
    drawing.text(0, 0, "</text><script>alert(1)</script>")
    assert "<script" not in str(drawing)
    assert elements(drawing, "text")[0].text == "</text><script>alert(1)</script>"


def test_a_curve_is_broken_where_there_is_no_number():
    drawing = Drawing(100, 50, title="t")
    drawing.curve(np.arange(5.0), np.array([1.0, 2.0, np.nan, 3.0, 4.0]))
    assert elements(drawing, "path")[0].get("d") == "M0 1L1 2M3 3L4 4"


def test_an_area_goes_there_on_top_and_back_below():
    drawing = Drawing(100, 50, title="t")
    drawing.area(np.array([0.0, 1]), np.array([5.0, 6]), np.array([1.0, 2]), fill="red")
    assert elements(drawing, "path")[0].get("d") == "M0 1L1 2L1 6L0 5Z"


def test_nothing_known_draws_nothing():
    drawing = Drawing(100, 50, title="t")
    nothing = np.full(3, np.nan)
    drawing.curve(nothing, nothing)
    drawing.area(nothing, nothing, nothing)
    drawing.markers("circle", nothing, nothing)
    assert elements(drawing, "path") == []


@pytest.mark.parametrize("shape", SHAPES)
def test_every_marker_stands_at_each_known_point(shape):
    drawing = Drawing(100, 50, title="t")
    drawing.markers(shape, np.array([1.0, np.nan, 3.0]), np.array([1.0, 2.0, 4.25]), fill="red")
    places = [path.get("transform") for path in elements(drawing, "path")]
    assert places == ["translate(1 1)", "translate(3 4.2)"]


def test_runs_are_where_every_column_holds_numbers():
    a = np.array([1.0, np.nan, 1, 1, 1, np.nan])
    b = np.array([1.0, 1, 1, np.inf, 1, 1])
    assert [(run.start, run.stop) for run in runs(a, b)] == [(0, 1), (2, 3), (4, 5)]


def test_an_axis_lays_its_ends_on_its_pixels():
    axis = Axis(0.1, 0.5, 300.0, 100.0)
    assert_allclose(axis.place(np.array([0.1, 0.3, 0.5])), [300, 200, 100])
    log = Axis(1e6, 1e10, 0.0, 400.0, logarithmic=True)
    assert_allclose(log.place(np.array([1e6, 1e8, 1e10, -1.0, 0.0])), [0, 200, 400, np.nan, np.nan])


@pytest.mark.parametrize(("low", "high", "labels"), [
    (0.0, 1.0, "0.0 0.2 0.4 0.6 0.8 1.0"),
    (-0.11, 0.11, "-0.10 -0.05 0.00 0.05 0.10"),
    (0.213, 0.389, "0.25 0.30 0.35"),
    (0.0, 60000.0, "0 10000 20000 30000 40000 50000 60000"),
])  # fmt: skip
def test_ticks_stand_at_round_values(low, high, labels):
    assert " ".join(label for _, label in round_values(low, high)) == labels


@given(st.floats(-1e6, 1e6), st.floats(1e-9, 1e6))
def test_ticks_lie_on_the_axis_and_are_told_apart(low, width):
    high = low + width
    if not high - low > 1e-9 * max(abs(low), 1.0):
        return
    ticks = round_values(low, high)
    assert 1 <= len(ticks) <= 8
    slack = 1e-6 * (high - low)
    assert all(low - slack <= value <= high + slack for value, _ in ticks)
    for value, label in ticks:
        assert math.isclose(float(label), value, rel_tol=1e-5, abs_tol=1e-5 * width)


def test_ticks_of_a_logarithmic_axis_are_decades():
    ticks = Axis(3e5, 2e10, 0, 100, logarithmic=True).ticks()
    assert [value for value, _ in ticks] == [1e6, 1e7, 1e8, 1e9, 1e10]


@pytest.mark.parametrize("values", [[0.2, 0.3], [0.2], [0.0], [-5.0, 5.0], [], [np.nan], [1e9]])
def test_an_axis_holds_all_values_with_room(values):
    axis = axis_for(np.array(values, dtype=float), 100.0, 0.0)
    assert axis.low < axis.high
    known = [value for value in values if np.isfinite(value)]
    assert all(axis.low < value < axis.high for value in known)


def test_an_axis_does_not_go_below_its_floor_without_need():
    assert axis_for(np.array([0.001, 0.4]), 1.0, 0.0, floor=0.0).low == 0.0
    assert axis_for(np.array([-0.1, 0.4]), 1.0, 0.0, floor=0.0).low == -0.1
    assert axis_for(np.array([0.0, 5.0, 50.0]), 1.0, 0.0, logarithmic=True).low > 0
