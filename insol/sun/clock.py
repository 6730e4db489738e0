"""Clocks: the civil one with its summer time, the zone's standard time, true solar time."""

from __future__ import annotations

from datetime import UTC, date, datetime, timedelta, tzinfo

import numpy as np
from numpy.typing import NDArray

from insol.study.days import clock_minutes
from insol.study.description import Clock, Site
from insol.study.zones import zone_of
from insol.sun.position import DEG_PER_S, SunTrack

DAY_S = 86400.0


def offset_s(zone: tzinfo, unix: float) -> float:
    """The zone's offset from UTC at an instant [s], summer time included."""
    offset = datetime.fromtimestamp(unix, tz=UTC).astimezone(zone).utcoffset()
    assert offset is not None
    return offset.total_seconds()


def standard_offset_s(zone: tzinfo, year: int) -> float:
    """The zone's offset without summer time [s]: the smallest of the year's twelve months."""
    return min(offset_s(zone, datetime(year, month, 1, tzinfo=UTC).timestamp()) for month in range(1, 13))


def instant_of(day: date, minutes: float, clock: Clock, site: Site, track: SunTrack | None) -> float:
    """Unix seconds at which a clock shows `minutes` after midnight of a day.

    A civil time that a change of the clock leaves out is counted on from before the change, so that
    a day that begins with it begins at the change; of a time shown twice the first is meant.
    `minutes` may be 1440: the end of the day.
    """
    zone = zone_of(site.time_zone)
    if clock == "local":
        if minutes >= 1440:
            day, minutes = day + timedelta(days=1), minutes - 1440
        wall = datetime(day.year, day.month, day.day, tzinfo=zone) + timedelta(minutes=minutes)
        return wall.timestamp()
    midnight = datetime(day.year, day.month, day.day, tzinfo=UTC).timestamp()
    if clock == "standard":
        return midnight + minutes * 60.0 - standard_offset_s(zone, day.year)
    if track is None:
        raise ValueError("true solar time needs the sun's track")
    return _solar_instant(midnight + minutes * 60.0, site.longitude, track)


def _solar_instant(as_if_utc: float, longitude_deg: float, track: SunTrack) -> float:
    """The instant at which true solar time reads what UTC reads at `as_if_utc`."""
    unix = as_if_utc - longitude_deg / DEG_PER_S
    for _ in range(4):  # the equation of time changes by half a minute a day: each turn gains four digits
        ahead = float(track.equation_of_time_min(unix)) * 60.0
        unix = as_if_utc - longitude_deg / DEG_PER_S - ahead
    return unix


def day_bounds(day: date, clock: Clock, site: Site, track: SunTrack | None) -> tuple[float, float]:
    """Begin and end of a day [unix s]; a civil day may have 23 or 25 hours."""
    return instant_of(day, 0, clock, site, track), instant_of(day, 1440, clock, site, track)


def window_of(
    day: date, start: str | None, end: str | None, clock: Clock, site: Site, track: SunTrack | None
) -> tuple[float, float]:
    """Begin and end of a clock window on a day [unix s]."""
    first = instant_of(day, clock_minutes(start or "00:00"), clock, site, track)
    last = instant_of(day, clock_minutes(end or "24:00"), clock, site, track)
    return first, last


def marks_of(day: date, step_s: float, clock: Clock, site: Site, track: SunTrack | None) -> NDArray[np.float64]:
    """The instants (m,) at which a clock shows multiples of the step on a day, its begin and end included."""
    begin, end = day_bounds(day, clock, site, track)
    if clock == "solar":
        assert track is not None
        midnight = datetime(day.year, day.month, day.day, tzinfo=UTC).timestamp()
        shown = midnight + np.arange(0, DAY_S + 1, step_s)
        mean = shown - site.longitude / DEG_PER_S
        return mean - track.equation_of_time_min(mean) * 60.0
    zone = zone_of(site.time_zone)
    if clock == "standard":
        return np.arange(begin, end + 1, step_s)
    before, after = offset_s(zone, begin), offset_s(zone, end - 1)
    if before == after:
        return np.append(np.arange(begin, end, step_s), end)
    change = _change_between(zone, begin, end)
    pieces = [_aligned(begin, change, before, step_s), _aligned(change, end, after, step_s)]
    return np.unique(np.concatenate([[begin, change, end], *pieces]))


def _aligned(first: float, last: float, offset: float, step_s: float) -> NDArray[np.float64]:
    low = np.ceil((first + offset) / step_s) * step_s - offset
    return np.arange(low, last, step_s)


def _change_between(zone: tzinfo, first: float, last: float) -> float:
    """The instant at which the zone's offset changes, to a second."""
    before = offset_s(zone, first)
    while last - first > 1:
        middle = (first + last) // 2
        first, last = (middle, last) if offset_s(zone, middle) == before else (first, middle)
    return last


def clock_texts(unix: NDArray[np.float64], clock: Clock, site: Site, track: SunTrack) -> list[str]:
    """What a clock shows at each instant: "2025-03-21 09:15:00", to the nearest second."""
    if not len(unix):
        return []
    shown = np.round(unix + clock_lead_s(unix, clock, site, track)).astype("datetime64[s]")
    return [text.replace("T", " ") for text in np.datetime_as_string(shown).tolist()]


def clock_lead_s(unix: NDArray[np.float64], clock: Clock, site: Site, track: SunTrack) -> NDArray[np.float64]:
    """How far a clock is ahead of UTC at each instant (m,) [s]."""
    zone = zone_of(site.time_zone)
    if clock == "solar":
        return site.longitude / DEG_PER_S + track.equation_of_time_min(unix) * 60.0
    if clock == "standard":
        year = datetime.fromtimestamp(float(unix[0]), tz=zone).year
        return np.full(len(unix), standard_offset_s(zone, year))
    # Zones change their offset at whole minutes.
    minutes, number = np.unique(np.floor(unix / 60.0), return_inverse=True)
    return np.array([offset_s(zone, minute * 60.0) for minute in minutes])[number.reshape(-1)]
