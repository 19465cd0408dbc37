"""The chart: bands, flags and gaps are in it, lines differ without colour, same bytes each time."""

from xml.etree import ElementTree
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from models.errors import ParameterError
from service.page.axes import Axis
from service.page.chart import Line, Panel, lines_by_depth, time_chart
from service.page.chart_lines import look_of
from service.page.chart_rows import drawn

SVG = "{http://www.w3.org/2000/svg}"
DAY = 86_400.0
START = 1_775_433_600.0  # 2026-04-06T00:00:00Z
UTC = ZoneInfo("UTC")


def line(name="0.15 m", n=96, *, days=1.0, level=0.25, flagged=(), missing=()):
    seconds = START + np.arange(n) * days * DAY / n
    value = level + 0.02 * np.sin(np.arange(n) / 15)
    value[list(missing)] = np.nan
    marks = np.zeros(n, dtype=bool)
    marks[list(flagged)] = True
    return Line(name, seconds, value, value - 0.04, value + 0.04, marks)


def chart(*lines, days=1.0, title="Station north-1", zone=UTC, gap=2700.0, **more):
    panels = [Panel("Water content", "m³/m³", lines)]
    return time_chart(panels, title=title, span=(START, START + days * DAY), zone=zone, gap=gap,
                      **more)  # fmt: skip


def root(text):
    return ElementTree.fromstring(text)  # noqa: S314 - our own


def words(text):
    return [element.text for element in root(text).iter(SVG + "text")]


def test_it_has_title_units_zone_and_names():
    told = words(chart(line("0.15 m"), line("0.35 m"), zone=ZoneInfo("Europe/Berlin"),
                       notes=["Bands hold the truth with a probability of 95 %."]))  # fmt: skip
    assert {"Station north-1", "Water content, m³/m³", "0.15 m", "0.35 m", "band", "flagged",
            "gap", "Bands hold the truth with a probability of 95 %.",
            "Hatched: no number for more than 45 min."} <= set(told)  # fmt: skip
    assert "6 Apr 2026 02:00 to 7 Apr 2026 02:00, time zone Europe/Berlin" in told


def test_the_same_input_gives_the_same_bytes_in_any_order():
    one = line(flagged=[3, 50], missing=[20])
    order = np.random.default_rng(1).permutation(96)
    other = Line(one.name, *(part[order] for part in (one.seconds, one.value, one.lower,
                                                      one.upper, one.flagged)))  # fmt: skip
    assert chart(one) == chart(one) == chart(other)


def test_no_name_brings_markup_with_it():
    nasty = "</text><script>alert(1)</script>"
    text = chart(line(nasty), title=nasty, notes=[nasty])
    assert "<script" not in text
    assert nasty in words(text)
    assert not any(tag in text for tag in ("onload", "href", "foreignObject", "<style"))


def test_lines_differ_without_colour():
    looks = [look_of(place) for place in range(30)]
    assert len({(look.dash, look.shape) for look in looks}) == 30
    assert len({(look.colour, look.dash, look.shape) for look in map(look_of, range(280))}) == 280


def test_a_line_looks_the_same_in_every_panel():
    panels = [Panel("a", "", [line("x"), line("y")]), Panel("b", "", [line("y")])]
    text = time_chart(panels, title="t", span=(START, START + DAY), zone=UTC, gap=2700)
    dashed = [path for path in root(text).iter(SVG + "path") if path.get("stroke-width") == "1.8"]
    assert [path.get("stroke") for path in dashed] == [
        look_of(0).colour, look_of(1).colour, look_of(1).colour]  # fmt: skip


def test_a_gap_breaks_the_line_and_is_hatched():
    whole, broken = line(), line(missing=range(40, 60))
    axis = Axis(START, START + DAY, 0.0, 800.0)
    assert np.isfinite(drawn(whole, axis, 2700.0).value).all()
    held = drawn(broken, axis, 2700.0)
    assert np.isnan(held.value).sum() == 1
    assert_array_equal(held.gaps.duration, [21 * 900.0])
    hatched = [r for r in root(chart(broken)).iter(SVG + "rect") if r.get("fill") == "url(#gap)"]
    assert len(hatched) == 2  # the gap, and the sample in the key


def test_one_missing_reading_is_no_gap():
    assert (
        drawn(line(missing=[40]), Axis(START, START + DAY, 0.0, 800.0), 2700.0).gaps.start.size == 0
    )


def test_flagged_readings_are_ringed_and_ticked_with_a_number_or_without():
    held = drawn(line(flagged=[10, 40], missing=[40]), Axis(START, START + DAY, 0.0, 800.0), 2700.0)
    assert_array_equal(held.flagged, START + np.array([10, 40]) * 900.0)
    assert_array_equal(held.flagged_seconds, [START + 9000.0])
    assert (held.count, held.flagged_count) == (96, 2)


def test_what_lies_outside_the_time_shown_is_not_drawn():
    held = drawn(line(days=2.0), Axis(START, START + DAY, 0.0, 800.0), 2700.0)
    assert held.count == 49
    assert held.seconds.max() <= START + DAY


def test_a_year_is_drawn_by_the_pixel_and_loses_no_extreme():
    dense = line(n=105_120, days=365.0)
    dense.value[777], dense.value[55_555] = 0.05, 0.45
    axis = Axis(START, START + 365 * DAY, 66.0, 810.0)
    held = drawn(dense, axis, 3600.0)
    assert held.seconds.size <= 744
    assert (held.lowest.min(), held.highest.max()) == (0.05, 0.45)
    assert_allclose(np.nanmean(held.value), dense.value.mean(), atol=1e-4)
    assert np.all(held.lowest <= held.value)
    assert np.all(held.value <= held.highest)
    assert len(chart(dense, days=365.0)) < 200_000


def test_a_gap_in_a_year_breaks_the_line_where_it_is():
    holed = line(n=105_120, days=365.0, missing=range(30_000, 34_000))
    held = drawn(holed, Axis(START, START + 365 * DAY, 66.0, 810.0), 3600.0)
    place = np.flatnonzero(np.isnan(held.value))
    assert place.size == 1
    assert held.seconds[place[0] - 1] < holed.seconds[30_001] + DAY
    assert held.seconds[place[0] + 1] > holed.seconds[33_999] - DAY


def test_bands_that_dwarf_the_values_are_cut_and_said_to_be():
    wide = line()
    wide = Line(wide.name, wide.seconds, wide.value, wide.lower, wide.value + 300.0, wide.flagged)
    assert "Bands that reach further than a panel are cut at its edge." in words(chart(wide))
    assert "Bands that reach further than a panel are cut at its edge." not in words(chart(line()))


@pytest.mark.parametrize("lines", [(), (line(n=1),), (line(missing=range(96)),), (line(n=0),)])
def test_little_or_nothing_to_draw_is_still_a_chart(lines):
    told = words(chart(*lines))
    assert ("no number in this time" in told) == (
        not lines or not np.isfinite(lines[0].value).any()
    )


def test_it_describes_itself_in_words():
    described = root(chart(line(flagged=[3]))).find(SVG + "desc").text
    assert "Water content, 0.15 m: 0.23 to 0.27 m³/m³; 96 readings, 1 flagged, 0 gaps." in described


def test_depths_become_lines_from_the_top_down():
    depth, seconds = np.array([0.6, 0.15, 0.6]), np.array([1.0, 2.0, 3.0])
    lines = lines_by_depth(
        depth, seconds, [seconds, seconds - 1, seconds + 1], [True, False, False]
    )
    assert [one.name for one in lines] == ["0.15 m", "0.60 m"]
    assert_array_equal(lines[1].seconds, [1, 3])
    assert_array_equal(lines[1].flagged, [True, False])


@pytest.mark.parametrize(("span", "gap", "said"), [
    ((1.0, 1.0), 60.0, "end after"), ((2.0, 1.0), 60.0, "end after"),
    ((0.0, 1e18), 60.0, "end after"),
    ((0.0, 1.0), 0.0, "gap above 0"),
])  # fmt: skip
def test_refuses_a_time_that_is_none(span, gap, said):
    with pytest.raises(ParameterError, match=said):
        time_chart([], title="t", span=span, zone=UTC, gap=gap)
