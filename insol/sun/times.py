"""A period as intervals: aligned to its clock, cut by its window and where the sun rises and sets."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import UTC, date, datetime, timedelta

import numpy as np
from numpy.typing import NDArray

from insol.checks import read_only
from insol.errors import PeriodError
from insol.study.days import dates_between, parse_days
from insol.study.description import Period, Site
from insol.study.zones import zone_of
from insol.sun.clock import day_bounds, marks_of, window_of
from insol.sun.position import SunTrack
from insol.sun.seasons import instant_of_longitude

SEARCH_S = 600.0
"""Rise and set are looked for between samples this far apart [s], and at every noon and midnight."""


@dataclass(frozen=True)
class Intervals:
    """Intervals of one period with the sun up, in order of time.

    Attributes
    ----------
    period : its name
    start, end : (m,) int64, unix seconds
    day : (m,) int32, ordinal (of `datetime.date`) of the day in the period's clock
    resolved_days : the days that the period names, with sun or without
    notes : what was taken for granted, a line each
    """

    period: str
    start: NDArray[np.int64]
    end: NDArray[np.int64]
    day: NDArray[np.int32]
    resolved_days: tuple[date, ...]
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        n = len(self.start)
        for name, dtype in (("start", np.int64), ("end", np.int64), ("day", np.int32)):
            object.__setattr__(self, name, read_only(getattr(self, name), dtype, (n,), name))

    @property
    def middle(self) -> NDArray[np.float64]:
        """The instant (m,) that stands for each interval, unix seconds."""
        return (self.start + self.end) / 2.0

    @property
    def minutes(self) -> NDArray[np.float64]:
        """Length (m,) of each interval [min]."""
        return (self.end - self.start) / 60.0


def days_of(period: Period, site: Site) -> tuple[tuple[date, ...], tuple[str, ...]]:
    """The days that a period names at a site, and what was taken for granted in it."""
    named = parse_days(period.days, period.year)
    if named.longitude_deg is None:
        assert named.first is not None and named.last is not None
        return dates_between(named.first, named.last), ()
    instant = instant_of_longitude(named.longitude_deg, period.year)
    moment = datetime.fromtimestamp(instant, tz=zone_of(site.time_zone))
    note = f"{period.days} {period.year} is {moment:%Y-%m-%d %H:%M} on the site's clock"
    return (moment.date(),), (note,)


def span_of(periods: Iterable[Period], site: Site) -> tuple[float, float]:
    """First and last unix second that the periods can touch, in any clock."""
    days = [day for period in periods for day in days_of(period, site)[0]]
    return _utc(min(days) - timedelta(days=2)), _utc(max(days) + timedelta(days=3))


def intervals_of(period: Period, site: Site, track: SunTrack) -> Intervals:
    """The intervals of a period in which the sun is up.

    They begin and end where the period's clock shows a multiple of the step, at the window's ends,
    and where the sun passes the period's lowest altitude; so their lengths add up to the time with
    the sun up in the window.

    Raises
    ------
    PeriodError
        The sun is not up in it.
    """
    days, notes = days_of(period, site)
    crossings = altitude_crossings(track, period.lowest_altitude_deg, _utc(days[0]), _utc(days[-1]))
    starts, ends, ordinals = [], [], []
    for day in days:
        bounds = _marks_with_cuts(day, period, site, track, crossings)
        starts.append(bounds[:-1])
        ends.append(bounds[1:])
        ordinals.append(np.full(max(len(bounds) - 1, 0), day.toordinal()))
    start, end, ordinal = (np.concatenate(column) for column in (starts, ends, ordinals))
    up = (end > start) & (track.altitude((start + end) / 2.0) > period.lowest_altitude_deg)
    if not up.any():
        raise PeriodError(_no_sun(period, days, track), where=f'period "{period.name}"')
    return Intervals(period.name, start[up], end[up], ordinal[up], days, notes)


def altitude_crossings(track: SunTrack, altitude_deg: float, first: float, last: float) -> NDArray[np.float64]:
    """Instants (c,) at which the sun passes an altitude, from two days before `first` to two after `last`."""
    first, last = max(first - 2 * 86400.0, track.first), min(last + 2 * 86400.0, track.last)
    samples = np.arange(first, last, SEARCH_S)
    noons = np.arange(first, last, 43200.0)
    noons = noons - (track.hour_angle(noons) % 180.0) / 360.0 * 86400.0
    samples = np.unique(np.concatenate([samples, noons[(noons > first) & (noons < last)]]))
    above = track.altitude(samples) > altitude_deg
    where = np.flatnonzero(above[1:] != above[:-1])
    low, high, before = samples[where], samples[where + 1], above[where]
    while len(low) and (high - low).max() > 0.01:
        middle = (low + high) / 2
        same = (track.altitude(middle) > altitude_deg) == before
        low, high = np.where(same, middle, low), np.where(same, high, middle)
    return (low + high) / 2


def _marks_with_cuts(
    day: date, period: Period, site: Site, track: SunTrack, crossings: NDArray[np.float64]
) -> NDArray[np.int64]:
    """Bounds of a day's intervals within the window, whole seconds, ascending."""
    begin, end = day_bounds(day, period.clock, site, track)
    if period.start is not None or period.end is not None:
        from_, to = window_of(day, period.start, period.end, period.clock, site, track)
        begin, end = max(begin, from_), min(end, to)
    marks = marks_of(day, period.step_min * 60.0, period.clock, site, track)
    cuts = crossings[np.searchsorted(crossings, begin) : np.searchsorted(crossings, end)]
    inside = marks[(marks > begin) & (marks < end)]
    return np.unique(np.round(np.concatenate([[begin], inside, cuts, [end]])).astype(np.int64))


def _no_sun(period: Period, days: tuple[date, ...], track: SunTrack) -> str:
    when = days[0].isoformat() if len(days) == 1 else f"{days[0].isoformat()} to {days[-1].isoformat()}"
    noon = _utc(days[0]) + 43200.0 - track.site.longitude * 240.0
    highest = float(track.altitude(noon - float(track.hour_angle(noon)) * 240.0))
    window = f", {period.start or '00:00'} to {period.end or '24:00'} {period.clock} time"
    said = window if period.start or period.end else ""
    limit = f" above {period.lowest_altitude_deg:g} degrees" if period.lowest_altitude_deg else ""
    return f"the sun is not up{limit} on {when}{said}; at noon of the first day it stands at {highest:.1f} degrees"


def _utc(day: date) -> float:
    return datetime(day.year, day.month, day.day, tzinfo=UTC).timestamp()
