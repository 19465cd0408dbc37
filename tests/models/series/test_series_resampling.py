"""Bins over time: worked examples, laws, and random data beside a slow reference."""

import functools
import itertools
import operator

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from models.errors import ParameterError, ReadingError, UnknownName
from models.series import COVERAGE_RULE, MEAN_RULES, Bounds, resample, series
from tests.models.series import slow

HOUR, DAY = 3600.0, 86_400.0
T = np.array([0.0, 1, 2, 3, 9, 10]) * HOUR
THETA = np.array([0.30, 0.30, 0.29, 0.29, 0.20, 0.20])
NAMES = ("row_count", "count", "flagged_count", "flags", "coverage_fraction", "minimum", "maximum",
         "last", "last_seconds")  # fmt: skip


def random_rows(seed, n=400, span=5 * DAY):
    """Readings in no order, with bursts, holes, missing numbers, flags and three calibrations."""
    rng = np.random.default_rng(seed)
    seconds = np.unique(rng.uniform(-DAY / 2, span, n).round(1))
    seconds = seconds[(seconds < 1.3 * DAY) | (seconds > 2.6 * DAY)]
    value = rng.uniform(0.05, 0.45, seconds.size)
    value[rng.random(seconds.size) < 0.1] = np.nan
    u = rng.uniform(0.02, 0.03, seconds.size)
    shared = rng.uniform(0.0, 0.02, seconds.size)
    flags = rng.integers(0, 8, seconds.size) * (rng.random(seconds.size) < 0.2)
    sources = np.searchsorted([DAY, 3.4 * DAY], seconds)
    order = rng.permutation(seconds.size)
    return [column[order] for column in (seconds, value, u, shared, flags, sources)]


def as_series(columns):
    *numbers, flags, sources = columns
    return series(*numbers, flags=flags, sources=sources)


def test_a_plain_mean_counts_readings():
    """(0.30 + 0.30 + 0.29 + 0.29 + 0.20 + 0.20)/6 = 0.26333, computed apart."""
    found = resample(series(T, THETA), [0, DAY], step=HOUR, gap=3 * HOUR)
    assert_allclose(found.means["plain"].value, [0.26333], atol=5e-6)


def test_a_time_weighted_mean_leaves_out_the_gap():
    """Trapezoid excluding gaps above 3 h: 0.27125, computed apart."""
    found = resample(series(T, THETA), [0, DAY], step=HOUR, gap=3 * HOUR)
    assert_allclose(found.means["time-weighted"].value, [0.27125], atol=5e-6)


def test_a_time_weighted_mean_goes_through_what_is_no_gap():
    """Trapezoid through all of it: 0.25550, computed apart."""
    found = resample(series(T, THETA), [0, DAY], step=HOUR, gap=6 * HOUR)
    assert_allclose(found.means["time-weighted"].value, [0.25550], atol=5e-6)


def test_the_rest_of_the_worked_day():
    flags = [False, True, False, False, False, True]
    found = resample(series(T, THETA, flags=flags), [0, DAY], step=HOUR, gap=3 * HOUR)
    assert [found.row_count[0], found.count[0], found.flagged_count[0]] == [6, 6, 2]
    assert_allclose(found.coverage_fraction, [6 / 24])
    assert [found.minimum[0], found.maximum[0], found.last[0]] == [0.20, 0.30, 0.20]
    assert found.last_seconds[0] == 10 * HOUR


@pytest.mark.parametrize("seed", range(4))
@pytest.mark.parametrize(
    ("width", "step", "gap"),
    [(HOUR, 900.0, 7200.0), (DAY, 600.0, 1e4), (900.0, HOUR, 3 * HOUR), (7e4, HOUR, 1e9)],
)
def test_random_data_agree_with_a_slow_reference(seed, width, step, gap):
    columns = random_rows(seed)
    rows = list(zip(*(column.tolist() for column in columns), strict=True))
    edges = np.arange(0.0, 4.5 * DAY, width)
    found = resample(as_series(columns), edges, step=step, gap=gap)
    for place, (begin, end) in enumerate(itertools.pairwise(edges)):
        held = slow.bin_rows(rows, begin, end)
        numbers = [row for row in held if not np.isnan(row[1])]
        assert found.row_count[place] == len(held)
        assert found.count[place] == len(numbers)
        assert found.flagged_count[place] == sum(row[4] != 0 for row in held)
        assert found.flags[place] == functools.reduce(operator.or_, [row[4] for row in held], 0)
        told = slow.coverage(held, begin, end, step) if numbers else 0.0
        assert_allclose(found.coverage_fraction[place], told)
        values = [row[1] for row in numbers]
        expected = (min(values), max(values), values[-1]) if values else (np.nan,) * 3
        got = (found.minimum[place], found.maximum[place], found.last[place])
        assert_array_equal(got, expected)
        for rule, weighted in (
            ("plain", slow.plain_weights(rows, begin, end)),
            ("time-weighted", slow.time_weights(rows, begin, end, gap)),
        ):
            mean = found.means[rule]
            got = (mean.value[place], mean.standard_uncertainty[place], mean.shared[place])
            assert_allclose(got, slow.mean(weighted), rtol=1e-7, atol=1e-9)


def test_the_order_of_the_rows_does_not_matter_to_the_last_digit():
    columns = random_rows(3)
    turned = [column[::-1] for column in columns]
    edges = np.arange(0.0, 5 * DAY, HOUR)
    one, other = (
        resample(as_series(given), edges, step=900, gap=7200) for given in (columns, turned)
    )
    for name in NAMES:
        assert_array_equal(getattr(one, name), getattr(other, name))
    for rule in MEAN_RULES:
        for part in ("value", "standard_uncertainty", "shared", "lower", "upper"):
            assert_array_equal(getattr(one.means[rule], part), getattr(other.means[rule], part))


def test_a_bin_does_not_depend_on_the_bins_asked_beside_it():
    rows = as_series(random_rows(5))
    edges = np.arange(0.0, 4 * DAY, HOUR)
    whole = resample(rows, edges, step=900, gap=7200)
    page = resample(rows, edges[30:60], step=900, gap=7200)
    for name in NAMES:
        assert_array_equal(getattr(whole, name)[30:59], getattr(page, name))
    for rule in MEAN_RULES:
        whole_mean, page_mean = whole.means[rule], page.means[rule]
        assert_array_equal(whole_mean.value[30:59], page_mean.value)
        assert_array_equal(whole_mean.upper[30:59], page_mean.upper)


def test_time_weighted_means_of_hours_average_to_that_of_the_day():
    seconds = np.arange(0.0, DAY + 1, 420.0)
    rows = series(seconds, 0.2 + 0.1 * np.sin(seconds / 7000), 0.02, 0.01)
    hourly = resample(rows, np.arange(0, DAY + 1, HOUR), step=420, gap=HOUR)
    daily = resample(rows, [0, DAY], step=420, gap=HOUR)
    assert_allclose(
        hourly.means["time-weighted"].value[:-1].sum() / 23,
        resample(rows, [0, 23 * HOUR], step=420, gap=HOUR).means["time-weighted"].value[0],
    )
    assert hourly.count.sum() == daily.count[0]


def test_a_line_crosses_the_edges_of_bins():
    """One reading an hour, quarters of an hour asked: the line at 1/8, 3/8, 5/8, 7/8 of it."""
    found = resample(series([0, HOUR], [0.1, 0.3]), np.arange(5) * 900.0, step=HOUR, gap=HOUR)
    assert_allclose(found.means["time-weighted"].value, [0.125, 0.175, 0.225, 0.275])
    assert_array_equal(found.means["plain"].value, [0.1, np.nan, np.nan, np.nan])


def test_the_band_of_a_mean_does_not_shrink_below_what_is_shared():
    n = 288
    rows = series(np.arange(n) * 300.0, np.full(n, 0.25), np.hypot(0.01, 0.02), 0.02)
    found = resample(rows, [0, DAY], step=300, gap=900)
    u = np.hypot(0.02, 0.01 / np.sqrt(n))
    for mean in found.means.values():
        assert_allclose(mean.shared, 0.02)
        assert_allclose(mean.value - mean.lower, 1.959964 * mean.standard_uncertainty, rtol=1e-6)
    assert_allclose(found.means["plain"].standard_uncertainty, u)
    assert_allclose(found.means["time-weighted"].standard_uncertainty, u, rtol=1e-4)


def test_the_band_stays_within_what_is_possible():
    rows = series([0, 600, 1200], [0.0, 0.01, 0.02], 0.03, 0.02)
    mean = resample(rows, [0, HOUR], step=600, gap=900, bounds=Bounds(0.0, 0.45)).means["plain"]
    assert 0.0 <= mean.lower[0] < 0.01
    assert mean.value[0] < mean.upper[0] < mean.value[0] + 1.96 * mean.standard_uncertainty[0]


def test_an_unflagged_row_without_a_number_counts_as_a_row_only():
    found = resample(series([0, 60], [np.nan, 0.2]), [0, HOUR], step=60, gap=600)
    assert [found.row_count[0], found.count[0], found.flagged_count[0]] == [2, 1, 0]


def test_flags_of_a_bin_are_all_that_its_rows_carry():
    flags = np.array([1, 4, 0, 1 << 40], dtype=np.uint64)
    found = resample(series([0, 1, 2, HOUR], [1, 2, 3, np.nan], flags=flags),
                     [0, HOUR, 2 * HOUR, 3 * HOUR], step=60, gap=600)  # fmt: skip
    assert found.flags.tolist() == [5, 1 << 40, 0]
    assert found.flagged_count.tolist() == [2, 1, 0]


def test_a_bin_holds_its_start_and_not_its_end():
    found = resample(series([0, HOUR, 2 * HOUR], [1, 2, 3]), [0, HOUR, 2 * HOUR], step=60, gap=60)
    assert found.count.tolist() == [1, 1]
    assert found.last.tolist() == [1, 2]


@pytest.mark.parametrize(("seconds", "expected"), [
    (np.arange(12) * 300.0, 1.0),
    (np.arange(12) * 300.0 + 299.0, 1.0),  # a logger that starts late
    (np.arange(12) * 300.0 + np.tile([0.0, 140.0], 6), 1.0),  # one that wavers
    (np.arange(100) * 0.5, 1 / 12),  # a burst
    (np.arange(6) * 300.0, 0.5),
    (np.arange(12) * 150.0, 7 / 12),  # twice as often, half of the time
    ([], 0.0),
])  # fmt: skip
def test_coverage_counts_steps_not_readings(seconds, expected):
    found = resample(series(seconds, np.ones(len(seconds))), [0, HOUR], step=300, gap=900)
    assert_allclose(found.coverage_fraction, [expected])
    assert COVERAGE_RULE.key == "distinct-steps"


def test_days_of_23_and_25_hours_expect_as_many():
    edges = np.cumsum([0.0, 23 * HOUR, 25 * HOUR])
    rows = series(np.arange(48) * HOUR, np.linspace(0.2, 0.3, 48))
    found = resample(rows, edges, step=HOUR, gap=3 * HOUR)
    assert found.count.tolist() == [23, 25]
    assert_allclose(found.coverage_fraction, [1.0, 1.0])


def test_nothing_read_is_no_number_and_no_error():
    found = resample(series([], []), [0, HOUR, 2 * HOUR], step=60, gap=60)
    assert found.count.tolist() == [0, 0]
    for column in (found.minimum, found.last, *(mean.upper for mean in found.means.values())):
        assert np.isnan(column).all()


def test_rows_without_numbers_make_no_mean():
    found = resample(series([0, 1], [np.nan, np.nan], np.nan, np.nan), [0, HOUR], step=60, gap=60)
    assert np.isnan(found.means["plain"].value).all()
    assert found.row_count.tolist() == [2]


def test_only_the_rules_that_were_named_are_reckoned():
    found = resample(series(T, THETA), [0, DAY], step=HOUR, gap=HOUR, rules=["plain"])
    assert list(found.means) == ["plain"]
    with pytest.raises(UnknownName, match="plain, time-weighted"):
        resample(series(T, THETA), [0, DAY], step=HOUR, gap=HOUR, rules=["mode"])


@pytest.mark.parametrize("edges", [[0], [1, 0], [0, 0], [0, np.nan], [[0, 1]]])
def test_refuses_edges_that_do_not_rise(edges):
    with pytest.raises(ParameterError, match="edges that rise"):
        resample(series(T, THETA), edges, step=HOUR, gap=HOUR)


@pytest.mark.parametrize(
    ("step", "gap", "name"), [(0, 1, "step"), (1, -1, "gap"), (np.nan, 1, "step")]
)
def test_refuses_a_step_or_a_gap_that_is_none(step, gap, name):
    with pytest.raises(ParameterError, match=f"takes {name} above 0"):
        resample(series(T, THETA), [0, DAY], step=step, gap=gap)


@pytest.mark.parametrize(
    "columns", [([0, 1], [0.1]), ([0, np.nan], [0.1, 0.2]), ([[0, 1]], [[0.1, 0.2]])]
)
def test_refuses_columns_that_do_not_fit(columns):
    with pytest.raises(ReadingError):
        series(*columns)
