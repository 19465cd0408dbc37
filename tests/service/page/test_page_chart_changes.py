"""What a chart must not hide: lone readings, days without a number, doubt, a new calibration."""

from dataclasses import replace

import numpy as np

from service.page.axes import Axis
from service.page.chart import Change, Panel, time_chart
from service.page.chart_rows import drawn
from tests.service.page.test_page_chart import DAY, START, SVG, UTC, chart, line, root, words

AXIS = Axis(START, START + 7 * DAY, 66.0, 810.0)


def markers(text, fill):
    """Markers of the first line inside the panel: those of the key are none of them."""
    panel = next(one for one in root(text).iter(SVG + "g") if one.get("clip-path"))
    return [path for group in panel.iter(SVG + "g") if group.get("fill") == fill
            and group.get("stroke") == "#0b62a4" for path in group]  # fmt: skip


def test_few_readings_have_a_marker_each_wherever_they_lie():
    for first in np.linspace(0.0, 0.2, 9):
        few = line(n=3)
        few = replace(few, seconds=START + (first + np.array([0.0, 0.3, 0.6])) * DAY)
        assert len(markers(chart(few, gap=DAY), "#0b62a4")) == 3


def test_a_lone_reading_beside_a_dense_line_has_a_marker():
    dense = line(n=96)
    lone = replace(
        dense, seconds=np.where(np.arange(96) == 50, dense.seconds, dense.seconds + 2 * DAY)
    )
    found = drawn(lone, Axis(START, START + DAY, 66.0, 810.0), 2700.0)
    assert found.count == 1
    assert len(markers(chart(lone), "#0b62a4")) == 1


def test_a_line_has_a_gap_of_its_own_beside_a_slower_one():
    """A week of quarter-hours without its third day, beside a reading by hand each day."""
    quarters = line(n=672, days=7.0, missing=range(192, 288))
    quarters = replace(quarters, gap=2700.0)
    by_hand = replace(line("0.35 m", n=7, days=7.0), gap=3 * DAY)
    found = drawn(quarters, AXIS, 3 * DAY)
    assert found.gaps.duration.max() > 0.9 * DAY
    assert np.isnan(found.value).sum() == 1
    assert not np.isnan(drawn(by_hand, AXIS, 2700.0).value).any()
    text = chart(quarters, by_hand, days=7.0)
    assert "Hatched: no number for more than 45 min to 3 d, line by line." in words(text)


def test_markers_among_flagged_readings_are_hollow():
    sound, doubtful = line(), line(flagged=range(96))
    assert markers(chart(sound), "#0b62a4")
    assert not markers(chart(sound), "#ffffff")
    assert not markers(chart(doubtful), "#0b62a4")
    assert markers(chart(doubtful), "#ffffff")


def test_a_pixel_of_several_readings_is_hollow_only_where_all_are_flagged():
    crowded = line(n=5000, flagged=range(0, 5000, 2))
    axis = Axis(START, START + DAY, 66.0, 810.0)
    assert not drawn(crowded, axis, 2700.0).doubtful.any()
    half = line(n=5000, flagged=range(2500))
    found = drawn(half, axis, 2700.0)
    assert 0.4 < found.doubtful.mean() < 0.6


def test_a_change_has_a_rule_and_a_word_in_the_time_it_lies_in():
    panels = [Panel("Water content", "m3/m3", [line()]), Panel("Salt", "dS/m", [line()])]
    changes = [Change(START + 0.4 * DAY, "0.15 m: loam-2"), Change(START + 3 * DAY, "later")]
    text = time_chart(panels, title="t", span=(START, START + DAY), zone=UTC, gap=2700.0,
                      changes=changes)  # fmt: skip
    rules = [one for one in root(text).iter(SVG + "line") if one.get("stroke-dasharray") == "2 2"]
    assert len(rules) == 2
    assert len({one.get("x1") for one in rules}) == 1
    assert words(text).count("0.15 m: loam-2") == 1
    assert "later" not in words(text)
