"""Ticks of a time axis at round local times, from seconds to centuries."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from datetime import datetime, timedelta
from zoneinfo import ZoneInfo

MINUTE, HOUR, DAY = 60.0, 3600.0, 86_400.0
_SHORT = (*(n * 1.0 for n in (1, 2, 5, 10, 15, 30)), *(n * MINUTE for n in (1, 2, 5, 10, 15, 30)),
          *(n * HOUR for n in (1, 2, 3, 6, 12)))  # fmt: skip
_DAYS = (1, 2, 7, 14)
_MONTHS = (1, 2, 3, 6)
_YEARS = (1, 2, 5, 10, 20, 50, 100, 200, 500, 1000)
_MONTH_NAMES = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")


@dataclass(frozen=True, slots=True)
class Tick:
    """One mark: its time, what stands under it, and what stands under that where it changes."""

    seconds: float
    label: str
    under: str = ""


def time_ticks(start: float, end: float, zone: ZoneInfo, most: int) -> tuple[Tick, ...]:
    """At most that many ticks (two at least) between two times, s since the epoch.

    Clock times and dates are those of the zone: where clocks change, ticks stay at round local
    times, and one that the clocks skip is left out.
    """
    first = datetime.fromtimestamp(start, zone).replace(tzinfo=None)
    last = datetime.fromtimestamp(end, zone).replace(tzinfo=None)
    span, most = end - start, max(most, 2)
    for step in _SHORT:
        if span / step <= most:
            form = "%H:%M:%S" if step < MINUTE else "%H:%M"
            told = [(when, when.strftime(form)) for when in _clock(first, last, step)]
            return _placed(told, zone, (start, end), date)
    for days in _DAYS:
        if span / (days * DAY) <= most:
            told = [(when, f"{when.day} {_month(when)}") for when in _dates(first, last, days)]
            return _placed(told, zone, (start, end), _year)
    for months in _MONTHS:
        if span / (months * 30.4 * DAY) <= most:
            told = [(when, _month(when)) for when in _firsts(first, last, months)]
            return _placed(told, zone, (start, end), _year)
    years = next((y for y in _YEARS if span / (y * 365.25 * DAY) <= most), _YEARS[-1])
    told = [(when, _year(when)) for when in _firsts(first, last, 12 * years)]
    return _placed(told, zone, (start, end), lambda _: "")


def date(when: datetime) -> str:
    """A date that cannot be read the wrong way round."""
    return f"{when.day} {_month(when)} {_year(when)}"


def _month(when: datetime) -> str:
    return _MONTH_NAMES[when.month - 1]


def _year(when: datetime) -> str:
    return f"{when.year:04d}"


def _clock(first: datetime, last: datetime, step: float) -> Iterator[datetime]:
    """Multiples of a step since the midnight before."""
    when = first.replace(hour=0, minute=0, second=0, microsecond=0)
    when += timedelta(seconds=step * ((first - when) // timedelta(seconds=step)))
    while when <= last:
        yield when
        when += timedelta(seconds=step)


def _dates(first: datetime, last: datetime, days: int) -> Iterator[datetime]:
    """Days, pairs of days within the month, or Mondays."""
    when = first.replace(hour=0, minute=0, second=0, microsecond=0)
    monday = datetime(2024, 1, 1)  # noqa: DTZ001 - local dates have no offset
    while when <= last:
        since = (when - monday).days if days > 2 else when.day - 1
        if since % days == 0 and not (days == 2 and when.day == 31):
            yield when
        when += timedelta(days=1)


def _firsts(first: datetime, last: datetime, months: int) -> Iterator[datetime]:
    """Firsts of months, counted in strides from the beginning of the calendar."""
    count = -(-(first.year * 12 + first.month - 1) // months) * months
    while count // 12 <= min(last.year, 9999):
        yield datetime(max(count // 12, 1), count % 12 + 1, 1)  # noqa: DTZ001 - local
        count += months


def _placed(
    told: list[tuple[datetime, str]],
    zone: ZoneInfo,
    span: tuple[float, float],
    under: Callable[[datetime], str],
) -> tuple[Tick, ...]:
    """Ticks within the span, with what changes under the first of each."""
    ticks: list[Tick] = []
    before = None
    for when, label in told:
        aware = when.replace(tzinfo=zone)
        seconds = aware.timestamp()
        back = datetime.fromtimestamp(seconds, zone).replace(tzinfo=None)
        if not span[0] <= seconds <= span[1] or back != when:
            continue
        below = under(when)
        ticks.append(Tick(seconds, label, below if below != before else ""))
        before = below
    return tuple(ticks)
