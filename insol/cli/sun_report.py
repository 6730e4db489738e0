"""What `insol check` says of the site, of the sun in each period, and of what a run will cost."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from datetime import UTC, date, datetime

import numpy as np

from insol.cli.layout import count, large, metres, table
from insol.errors import PeriodError
from insol.faces.model import MEASURED, Faces
from insol.study.description import Period, Site, Study
from insol.study.zones import zone_of
from insol.sun.clock import clock_texts, offset_s, standard_offset_s
from insol.sun.position import SunTrack
from insol.sun.times import Intervals, intervals_of
from insol.visibility.plan import PeriodPlan, distinct

ODD_CLOCK_H = 3.5
"""Civil clocks keep within this of the mean sun, China's far west included."""

SECONDS_PER_DEGREE = 240.0
"""In which the mean sun's hour angle grows by a degree."""


def site_lines(study: Study) -> list[str]:
    """Where on earth, on which clock, and how the model lies."""
    site = study.site
    latitude = f"{abs(site.latitude):.5g}° {'N' if site.latitude >= 0 else 'S'}"
    longitude = f"{abs(site.longitude):.6g}° {'E' if site.longitude >= 0 else 'W'}"
    rows = [
        ("place", f"{latitude}, {longitude}, {metres(site.elevation_m)} m above sea level"),
        ("clock", f"{site.time_zone}, {_offsets(site, study.periods[0].year)}"),
        ("north", f"the model's +y points to {site.north_deg % 360:g}° clockwise from true north"),
    ]
    return ["", "Site", table(rows)]


def _offsets(site: Site, year: int) -> str:
    """The zone's offsets from UTC in a year."""
    zone = zone_of(site.time_zone)
    offsets = sorted({offset_s(zone, datetime(year, month, 1, tzinfo=UTC).timestamp()) for month in range(1, 13)})
    words = [f"UTC{'-' if offset < 0 else '+'}{int(abs(offset)) // 3600:02d}:{int(abs(offset)) // 60 % 60:02d}"
             for offset in offsets]  # fmt: skip
    return words[0] if len(words) == 1 else f"{words[0]}, in summer {words[-1]}"


def site_doubts(study: Study) -> list[str]:
    """Whether clock and place can belong together."""
    site = study.site
    doubts = []
    clock = standard_offset_s(zone_of(site.time_zone), study.periods[0].year) / 3600.0
    apart = (clock - site.longitude / 15.0 + 12.0) % 24.0 - 12.0
    if abs(apart) > ODD_CLOCK_H:
        doubts.append(
            f'time_zone "{site.time_zone}" is {abs(apart):.1f} h {"ahead of" if apart > 0 else "behind"} the sun at '
            f"longitude {site.longitude:g}: is the sign of the longitude right, and the zone?"
        )
    if site.latitude == 0 and site.longitude == 0:
        doubts.append("latitude and longitude are both 0: a place in the Gulf of Guinea")
    return doubts


def periods_lines(study: Study, plans: Sequence[PeriodPlan], track: SunTrack) -> list[str]:
    """Sunrise, noon and sunset of each period's day, or of its shortest and longest day."""
    rows = [("period", "day", "sunrise", "noon", "sunset", "clock", "sun up")]
    for plan in plans:
        whole = whole_days(plan, study.site, track)
        days = days_to_show(whole)
        hours = f"{plan.intervals.minutes.sum() / 60:,.2f} h"
        number = "" if plan.day_count == 1 else f" on {count(plan.day_count, 'day')}"
        for nth, day in enumerate(days):
            name, total = (plan.period.name, hours + number) if nth == 0 else ("", "")
            rows.append((name, *sun_of_day(day, whole, plan.period, study.site, track), plan.period.clock, total))
    note = "  sun up: hours of the period with the sun's centre above the horizon, within its window and low-sun limit"
    return ["", "Sun", table(rows, right=(3,)), note]


def whole_days(plan: PeriodPlan, site: Site, track: SunTrack) -> Intervals:
    """The period's days from sunrise to sunset, whatever its window and low-sun limit."""
    unlimited = replace(plan.period, start=None, end=None, lowest_altitude_deg=0.0, step_min=60)
    try:
        return intervals_of(unlimited, site, track)
    except PeriodError:
        return plan.intervals


def days_to_show(whole: Intervals) -> list[int]:
    """The day of a one-day period; of others the one with the least sun and the one with the most."""
    days, index = np.unique(whole.day, return_inverse=True)
    hours = np.bincount(index, whole.minutes)
    chosen = [int(days[np.argmin(hours)]), int(days[np.argmax(hours)])]
    return sorted(set(chosen))


def sun_of_day(day: int, whole: Intervals, period: Period, site: Site, track: SunTrack) -> tuple[str, str, str, str]:
    """Date, sunrise, altitude at noon, and sunset of one day on the period's clock."""
    mine = whole.day == day
    starts, ends = whole.start[mine].astype(float), whole.end[mine].astype(float)
    gap = np.flatnonzero(starts[1:] > ends[:-1])
    # A sun that is still up at midnight sets before it rises.
    rise, set_ = (starts[gap[0] + 1], ends[gap[0]]) if len(gap) else (starts[0], ends[-1])
    noon = (starts[0] + ends[-1]) / 2.0
    for _ in range(2):
        noon -= float(track.hour_angle(noon)) * SECONDS_PER_DEGREE
    begin, end = (text[11:16] for text in clock_texts(np.array([rise, set_]), period.clock, site, track))
    if begin == end == "00:00":
        begin, end = "up", "all day"
    return date.fromordinal(day).isoformat(), begin, f"{float(track.altitude(noon)):.1f}°", end


def cost_lines(plans: Sequence[PeriodPlan], faces: Faces) -> list[str]:
    """How many rays a run will cast at most."""
    measured = int((faces.status == MEASURED).sum())
    each = float(sum(question.rays_per_receptor for question in distinct(plans)))
    return ["", f"A run casts about {large(measured * each)} rays: {measured:,} faces, some {each:,.0f} each."]
