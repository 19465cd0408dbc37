"""Ticks of a time axis: round local times, from seconds to centuries, whatever the clocks do."""

import itertools
from datetime import datetime
from zoneinfo import ZoneInfo

import pytest

from service.page.time_axis import date, time_ticks

BERLIN, UTC = ZoneInfo("Europe/Berlin"), ZoneInfo("UTC")


def at(*when, zone=UTC):
    return datetime(*when, tzinfo=zone).timestamp()


def labels(ticks):
    return [tick.label for tick in ticks]


def test_hours_with_the_date_under_the_first_of_each_day():
    ticks = time_ticks(at(2026, 5, 4, 10), at(2026, 5, 5, 10), UTC, 13)
    assert labels(ticks) == ["10:00", "12:00", "14:00", "16:00", "18:00", "20:00", "22:00",
                             "00:00", "02:00", "04:00", "06:00", "08:00", "10:00"]  # fmt: skip
    assert [t.under for t in ticks if t.under] == ["4 May 2026", "5 May 2026"]
    assert ticks[7].under == "5 May 2026"


def test_days_with_the_year_under_them():
    ticks = time_ticks(at(2026, 12, 28), at(2027, 1, 3), UTC, 8)
    assert labels(ticks)[:2] == ["28 Dec", "29 Dec"]
    assert [(t.label, t.under) for t in ticks if t.under] == [("28 Dec", "2026"), ("1 Jan", "2027")]


def test_months_and_years():
    assert labels(time_ticks(at(2026, 4, 6), at(2027, 4, 6), UTC, 13))[:2] == ["May", "Jun"]
    assert labels(time_ticks(at(2020, 1, 1), at(2026, 1, 1), UTC, 8)) == [
        "2020", "2021", "2022", "2023", "2024", "2025", "2026"]  # fmt: skip
    assert labels(time_ticks(at(1903, 1, 1), at(2026, 1, 1), UTC, 8)) == [
        "1920", "1940", "1960", "1980", "2000", "2020"]  # fmt: skip


def test_seconds_are_told():
    ticks = time_ticks(at(2026, 1, 1), at(2026, 1, 1, 0, 0, 30), UTC, 6)
    assert labels(ticks) == [
        f"00:00:{second:02d}" for second in range(0, 31, 5)]  # fmt: skip


def test_an_hour_the_clocks_skip_has_no_tick():
    """Berlin, 2026-03-29: 02:00 was 03:00."""
    ticks = time_ticks(at(2026, 3, 29, 0, zone=BERLIN), at(2026, 3, 29, 6, zone=BERLIN), BERLIN, 8)
    assert labels(ticks) == ["00:00", "01:00", "03:00", "04:00", "05:00", "06:00"]
    assert len({b.seconds - a.seconds for a, b in itertools.pairwise(ticks)}) == 1


def test_ticks_are_local_after_the_clocks_go_back():
    ticks = time_ticks(at(2026, 10, 24, zone=BERLIN), at(2026, 10, 28, zone=BERLIN), BERLIN, 5)
    for tick in ticks:
        local = datetime.fromtimestamp(tick.seconds, BERLIN)
        assert (local.hour, f"{local.day} Oct") == (0, tick.label)


@pytest.mark.parametrize("span", [1.0, 59.0, 600.0, 5e3, 4e4, 2e5, 9e5, 3e6, 2e7, 9e7, 9e8, 5e10])
@pytest.mark.parametrize("zone", ["UTC", "Asia/Kathmandu", "Australia/Lord_Howe", "Pacific/Apia"])
def test_ticks_rise_lie_in_the_span_and_are_not_too_many(span, zone):
    start = at(2011, 12, 29, 7, 3, 11)
    ticks = time_ticks(start, start + span, ZoneInfo(zone), 13)
    seconds = [tick.seconds for tick in ticks]
    assert seconds == sorted(set(seconds))
    assert all(start <= s <= start + span for s in seconds)
    assert 1 <= len(ticks) <= 16


def test_the_ends_of_the_calendar_have_ticks():
    assert time_ticks(at(9970, 1, 1), at(9979, 1, 1), UTC, 10)
    assert time_ticks(at(12, 1, 1), at(9979, 1, 1), UTC, 10)


def test_a_date_cannot_be_read_the_wrong_way_round():
    assert date(datetime(2026, 4, 6, tzinfo=UTC)) == "6 Apr 2026"
