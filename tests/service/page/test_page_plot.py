"""Plots of one quantity over another keep gaps, bands and scales, and are safe to show."""

import re
from xml.etree import ElementTree

import numpy as np

from service.page.plot import MOST_MARKERS, Panel, Series, plot

SVG = "{http://www.w3.org/2000/svg}"
X = np.linspace(0.0, 10.0, 11)


def drawn(*panels, **said):
    text = plot(panels, title=said.pop("title", "Plot"), **said)
    return ElementTree.fromstring(text)  # noqa: S314 - our own


def lines(drawing):
    """The paths that are drawn as lines of a series."""
    return [p for p in drawing.iter(f"{SVG}path") if p.get("stroke-width") == "2"]


def test_a_gap_breaks_the_line():
    y = X.copy()
    y[5] = np.nan
    (line,) = lines(drawn(Panel("x", "y", [Series("one", X, y)])))
    assert line.get("d").count("M") == 2


def test_measured_points_are_markers_and_not_joined():
    drawing = drawn(Panel("x", "y", [Series("points", X, X, measured=True)]))
    assert lines(drawing) == []
    assert sum(p.get("transform") is not None for p in drawing.iter(f"{SVG}path")) == 11 + 1


def test_of_many_points_some_are_drawn_and_a_note_says_so():
    many = np.linspace(0, 1, 5000)
    drawing = drawn(Panel("x", "y", [Series("points", many, many, measured=True)]))
    marks = sum(p.get("transform") is not None for p in drawing.iter(f"{SVG}path"))
    assert marks == MOST_MARKERS + 1
    assert any(f"{MOST_MARKERS} evenly spaced" in (t.text or "") for t in drawing.iter())


def test_a_band_is_an_area_and_in_the_key():
    one = Series("one", X, X, lower=X - 1, upper=X + 1)
    drawing = drawn(Panel("x", "y", [one]))
    assert any(p.get("d").endswith("Z") for p in drawing.iter(f"{SVG}path") if p.get("d"))
    assert "band" in {t.text for t in drawing.iter(f"{SVG}text")}


def test_lines_are_told_apart_without_colour():
    drawing = drawn(Panel("x", "y", [Series(name, X, X) for name in "abcd"]))
    dashes = [line.get("stroke-dasharray") for line in lines(drawing)]
    assert len(set(dashes)) == 4


def test_one_scale_makes_circles_round():
    turn = np.linspace(0, 2 * np.pi, 40)
    circle = Series("circle", 50 + 3 * np.cos(turn), 3 * np.sin(turn))
    (line,) = lines(drawn(Panel("x", "y", [circle], one_scale=True)))
    numbers = np.array(re.findall(r"[-\d.]+", line.get("d")), float).reshape(-1, 2)
    across, up = np.ptp(numbers, axis=0)
    assert abs(across / up - 1) < 0.01


def test_scales_that_differ_too_much_stay_their_own_and_say_so():
    panel = Panel("x", "y", [Series("one", X, 1000 * X)], one_scale=True)
    words = [t.text for t in drawn(panel).iter(f"{SVG}text")]
    assert any("scales of their own" in word for word in words)


def test_a_logarithmic_axis_drops_what_has_no_logarithm():
    one = Series("one", X, X - 3)
    panel = Panel("x", "y", [one], x_logarithmic=True, y_logarithmic=True)
    (line,) = lines(drawn(panel))
    assert len(re.findall(r"[-\d.]+", line.get("d"))) == 2 * 7


def test_words_of_a_caller_are_words():
    drawing = drawn(Panel("x", "y", []), title="<script>", notes=["a & b"])
    assert drawing.find(f"{SVG}title").text == "<script>"
    assert any(t.text == "a & b" for t in drawing.iter(f"{SVG}text"))


def test_the_same_numbers_are_the_same_bytes():
    panel = Panel("x", "y", [Series("one", X, X)])
    assert plot([panel], title="t") == plot([panel], title="t")
