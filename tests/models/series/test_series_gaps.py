"""Gaps, the usual step, and the latest row of each key."""

import numpy as np
import pytest
from numpy.testing import assert_array_equal

from models.errors import ParameterError, ReadingError
from models.series import find_gaps, latest, series, usual_step

HOURS = series(np.array([3.0, 0, 1, 2, 9, 10]) * 3600, np.ones(6))


def test_a_gap_is_between_the_numbers_beside_it():
    found = find_gaps(HOURS, 3 * 3600)
    assert_array_equal([found.start, found.end, found.duration], [[10800], [32400], [21600]])


def test_a_gap_of_just_the_limit_is_none():
    assert find_gaps(HOURS, 6 * 3600).start.size == 0


def test_a_row_without_a_number_does_not_end_a_gap():
    found = find_gaps(series([0, 50, 100], [0.2, np.nan, 0.2]), 60)
    assert_array_equal([found.start, found.end], [[0], [100]])


def test_what_is_missing_at_the_ends_of_the_time_asked_for_is_a_gap():
    found = find_gaps(HOURS, 4 * 3600, start=-18000, end=90000)
    assert_array_equal(found.start, [-18000, 10800, 36000])
    assert_array_equal(found.end, [0, 32400, 90000])


def test_no_reading_at_all_is_one_gap_where_a_time_was_asked_for():
    nothing = series([], [])
    assert find_gaps(nothing, 60).start.size == 0
    found = find_gaps(nothing, 60, start=0, end=100)
    assert_array_equal([found.start, found.end], [[0], [100]])


def test_gaps_and_covered_time_add_up_to_the_time_asked_for():
    rng = np.random.default_rng(4)
    rows = series(rng.uniform(0, 1000, 100), np.ones(100))
    found = find_gaps(rows, 15, start=0, end=1000)
    joined = np.diff(np.concatenate([[0], rows.seconds, [1000]]))
    assert np.isclose(found.duration.sum() + joined[joined <= 15].sum(), 1000)


@pytest.mark.parametrize("limit", [0, -1, np.nan])
def test_refuses_a_limit_that_is_none(limit):
    with pytest.raises(ParameterError, match="gap limit above 0"):
        find_gaps(HOURS, limit)


def test_the_usual_step_is_the_one_most_intervals_have():
    assert usual_step(HOURS) == 3600
    assert usual_step(series([0, 0, 300, 600, 5000], np.ones(5))) == 300
    assert np.isnan(usual_step(series([0], [1.0])))


def test_the_latest_row_of_each_key_is_found_in_any_order():
    keys = np.array(["b", "a", "b", "a", "c"])
    seconds = np.array([5, 9, 7, 2, 1])
    found = latest(keys, seconds)
    assert found.key.tolist() == ["a", "b", "c"]
    assert found.row.tolist() == [1, 2, 4]


def test_the_latest_of_some_rows_skips_the_others():
    found = latest([0.15, 0.15, 0.35], [1, 2, 3], among=[True, False, False])
    assert found.key.tolist() == [0.15]
    assert found.row.tolist() == [0]


def test_the_latest_of_nothing_is_nothing():
    assert latest([], []).row.size == 0


def test_the_latest_agrees_with_a_dictionary():
    rng = np.random.default_rng(8)
    keys, seconds = rng.integers(0, 50, 5000), rng.permutation(5000)
    newest = {}
    for row in range(5000):
        if seconds[row] > seconds[newest.get(keys[row], row)] or keys[row] not in newest:
            newest[keys[row]] = row
    found = latest(keys, seconds)
    assert dict(zip(found.key, found.row, strict=True)) == newest


def test_refuses_columns_of_unequal_length():
    with pytest.raises(ReadingError, match="equal length"):
        latest([1, 2], [1])
