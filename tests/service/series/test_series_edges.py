"""Bins in local time: days of 23, 24 and 25 hours, skipped midnights, odd offsets."""

from datetime import UTC, datetime

import numpy as np
import pytest

from models.errors import ParameterError
from service.stations.series_edges import EVERY, bin_edges, zone_of

HOUR = 3600.0


def at(*when, zone="UTC"):
    return datetime(*when, tzinfo=zone_of(zone)).timestamp()


def utc(seconds):
    return [datetime.fromtimestamp(s, UTC).strftime("%m-%d %H:%M") for s in seconds]


def test_the_day_the_clocks_go_forward_has_23_hours():
    """Berlin, 2026-03-29: CET (+01:00) to CEST (+02:00) at 01:00 UTC."""
    edges = bin_edges(at(2026, 3, 28, 12), at(2026, 3, 30, 12), "1d", zone_of("Europe/Berlin"))
    assert utc(edges) == ["03-27 23:00", "03-28 23:00", "03-29 22:00", "03-30 22:00"]
    assert (np.diff(edges) / HOUR).tolist() == [24, 23, 24]


def test_the_day_the_clocks_go_back_has_25_hours():
    """Berlin, 2026-10-25: CEST to CET at 01:00 UTC."""
    edges = bin_edges(at(2026, 10, 25), at(2026, 10, 25, 23), "1d", zone_of("Europe/Berlin"))
    assert (np.diff(edges) / HOUR).tolist() == [25]
    hours = bin_edges(edges[0], edges[-1], "1h", zone_of("Europe/Berlin"))
    assert hours.size == 26
    assert set(np.diff(hours)) == {HOUR}


def test_whole_bins_hold_what_was_asked():
    zone = zone_of("UTC")
    edges = bin_edges(at(2026, 5, 4, 6, 7), at(2026, 5, 4, 7, 0, 1), "15m", zone)
    assert utc(edges[[0, -1]]) == ["05-04 06:00", "05-04 07:15"]
    assert bin_edges(at(2026, 5, 4), at(2026, 5, 5), "1d", zone).size == 2


@pytest.mark.parametrize("every", EVERY)
@pytest.mark.parametrize(
    "name",
    [
        "UTC",
        "Asia/Kathmandu",
        "America/St_Johns",
        "America/Havana",
        "Australia/Lord_Howe",
        "Asia/Beirut",
        "Pacific/Apia",
    ],
)
def test_bins_rise_hold_the_time_and_start_days_at_midnight(name, every):
    zone = zone_of(name)
    start, end = at(2009, 10, 25, 3, 21), at(2009, 11, 4, 4)
    edges = bin_edges(start, end, every, zone)
    assert np.all(np.diff(edges) > 0)
    assert np.diff(edges).max() <= EVERY[every] + (HOUR if every == "1d" else 0)
    assert edges[0] <= start < edges[1]
    assert edges[-2] < end <= edges[-1]
    if every == "1d":
        local = [datetime.fromtimestamp(s, zone) for s in edges]
        assert {(when.hour, when.minute) for when in local} == {(0, 0)}


def test_bins_do_not_depend_on_where_the_question_starts():
    zone = zone_of("Australia/Lord_Howe")
    whole = bin_edges(at(2026, 4, 1), at(2026, 4, 9), "1h", zone)
    part = bin_edges(at(2026, 4, 5, 20, 40), at(2026, 4, 6, 3), "1h", zone)
    assert set(part) <= set(whole)


def test_a_skipped_midnight_begins_the_day_with_what_follows():
    """Beirut, 2022-03-27: 00:00 (+02:00) was 01:00 (+03:00)."""
    edges = bin_edges(at(2022, 3, 27, 5), at(2022, 3, 27, 6), "1d", zone_of("Asia/Beirut"))
    assert utc(edges) == ["03-26 22:00", "03-27 21:00"]


def test_a_skipped_day_is_no_bin():
    """Apia had no 2011-12-30."""
    zone = zone_of("Pacific/Apia")
    edges = bin_edges(at(2011, 12, 29, 12), at(2011, 12, 31, 23), "1d", zone)
    days = [datetime.fromtimestamp(s, zone).day for s in edges[:-1]]
    assert 30 not in days
    assert len(days) == len(set(days))


@pytest.mark.parametrize(
    "name",
    ["Mars/Base", "", "../../etc/passwd", "/etc/passwd", "Europe", "Europe/Berlin\0", "x" * 5000],
)
def test_refuses_a_zone_that_is_none(name):
    with pytest.raises(ParameterError, match="IANA time zone"):
        zone_of(name)


@pytest.mark.parametrize(("start", "end", "every", "said"), [
    (0, 0, "1h", "end after the start"), (5, 1, "1h", "end after"), (0, 1e18, "1d", "end after"),
    (float("nan"), 1, "1d", "end after"), (0, 1, "5m", "one of 15m, 1h, 1d"),
])  # fmt: skip
def test_refuses_what_makes_no_bins(start, end, every, said):
    with pytest.raises(ParameterError, match=said):
        bin_edges(start, end, every, zone_of("UTC"))
