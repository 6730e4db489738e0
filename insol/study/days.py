"""How a period names its days, and its times of day: read without any astronomy."""

from __future__ import annotations

import re
from calendar import isleap
from dataclasses import dataclass
from datetime import date, timedelta

from insol.errors import PeriodError, did_you_mean

SEASONS = {
    "march-equinox": 0.0,
    "june-solstice": 90.0,
    "september-equinox": 180.0,
    "december-solstice": 270.0,
    "equinox": 0.0,
    "solstice": 90.0,
}
"""Named days and the ecliptic longitude of the sun that makes them [deg]."""

ALLOWED = (
    'allowed: a day "03-21", a span "10-01/03-31", "year", "march-equinox", "june-solstice", '
    '"september-equinox", "december-solstice"'
)
MONTH_DAY = re.compile(r"(\d{2})-(\d{2})")
CLOCK_TIME = re.compile(r"(\d{2}):(\d{2})")


@dataclass(frozen=True)
class NamedDays:
    """Days of a year as they are written: a first and a last day, or a longitude of the sun."""

    first: date | None
    last: date | None
    longitude_deg: float | None


def parse_days(text: str, year: int) -> NamedDays:
    """What a period's `days` mean in a year, as far as the calendar tells.

    Raises
    ------
    PeriodError
        No such form, or no such day in that year.
    """
    if text == "year":
        return NamedDays(date(year, 1, 1), date(year, 12, 31), None)
    if text in SEASONS:
        return NamedDays(None, None, SEASONS[text])
    ends = text.split("/")
    if not 1 <= len(ends) <= 2 or not all(MONTH_DAY.fullmatch(end) for end in ends):
        raise PeriodError(f'"{text}" names no days; {ALLOWED}', hint=did_you_mean(text, [*SEASONS, "year"]))
    first = _day_of(ends[0], year)
    last = _day_of(ends[-1], year)
    if last < first:  # over the turn of the year
        last = _day_of(ends[-1], year + 1)
    return NamedDays(first, last, None)


def check_days(text: str, year: int) -> None:
    """Raise PeriodError where `parse_days` would."""
    parse_days(text, year)


def dates_between(first: date, last: date) -> tuple[date, ...]:
    """Every date from the first to the last."""
    return tuple(first + timedelta(days=n) for n in range((last - first).days + 1))


def clock_minutes(text: str) -> int:
    """Minutes after midnight of "HH:MM"; "24:00" is the end of the day.

    >>> clock_minutes("09:30")
    570
    """
    found = CLOCK_TIME.fullmatch(text)
    if found:
        minutes = int(found[1]) * 60 + int(found[2])
        if int(found[2]) < 60 and minutes <= 24 * 60:
            return minutes
    raise PeriodError(f'"{text}" is no time of day; allowed: "00:00" to "24:00"')


def _day_of(text: str, year: int) -> date:
    month, day = (int(number) for number in text.split("-"))
    try:
        return date(year, month, day)
    except ValueError:
        why = f"{year} is no leap year" if (month, day) == (2, 29) and not isleap(year) else "no such day"
        raise PeriodError(f'"{text}" is not a day of {year}: {why}', hint='write month and day, "03-21"') from None
