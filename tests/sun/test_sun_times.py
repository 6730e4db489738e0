"""Clocks, days, windows and intervals; the track against pvlib's own positions."""

from __future__ import annotations

from dataclasses import replace
from datetime import date

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from insol.errors import PeriodError
from insol.study.description import Clock, Period, Site
from insol.sun.clock import clock_texts, day_bounds
from insol.sun.position import sun_track
from insol.sun.times import Intervals, intervals_of, span_of

BERLIN = Site(latitude=52.5, longitude=13.4, time_zone="Europe/Berlin", elevation_m=34)


def intervals(site: Site, **period: object) -> Intervals:
    made = Period(**{"name": "p", "days": "03-21", "year": 2025, **period})  # type: ignore[arg-type]
    return intervals_of(made, site, sun_track(site, *span_of([made], site)))


@pytest.mark.parametrize("latitude", [-89.9, -45.0, 0.0, 52.5, 67.0, 89.9])
def test_the_track_follows_pvlib(latitude: float) -> None:
    """pvlib's own SPA at scattered instants of a year."""
    import pandas as pd
    from pvlib.solarposition import spa_python

    site = replace(BERLIN, latitude=latitude, north_deg=31.0)
    first = 1735689600
    track = sun_track(site, first, first + 365 * 86400)
    at = first + np.random.default_rng(3).uniform(0, 365 * 86400, 400).round()
    times = pd.DatetimeIndex(pd.to_datetime(at.astype(np.int64), unit="s", utc=True))
    expected = spa_python(times, latitude, site.longitude, altitude=site.elevation_m, delta_t=None)
    np.testing.assert_allclose(track.altitude(at), expected["elevation"], rtol=0, atol=5e-4)
    away = (track.azimuth(at) - expected["azimuth"].to_numpy() + 180) % 360 - 180
    # Towards the zenith an azimuth means little: measured along the sky.
    assert np.abs(away * np.cos(np.radians(expected["elevation"].to_numpy()))).max() < 5e-4


@given(st.sampled_from([1, 2, 5, 6, 10, 15, 20, 30, 60]), st.sampled_from(["local", "standard", "solar"]))
def test_the_weights_of_a_day_add_up_to_its_length(step_min: int, clock: Clock) -> None:
    """To a second, whatever the step and the clock."""
    one_minute = intervals(BERLIN, step_min=1).minutes.sum()
    stepped = intervals(BERLIN, step_min=step_min, clock=clock)
    assert stepped.minutes.sum() == pytest.approx(one_minute, abs=2 / 60)
    assert np.all(stepped.start[1:] >= stepped.end[:-1])
    assert stepped.minutes.max() <= step_min + 1.5 / 60 + (0.5 if clock == "solar" else 0)


@pytest.mark.parametrize(
    ("zone", "day", "hours"),
    [
        ("Europe/Berlin", date(2025, 3, 30), 23),
        ("Europe/Berlin", date(2025, 10, 26), 25),
        ("America/Santiago", date(2025, 9, 7), 23),  # begins with the change: there is no midnight
        ("Africa/Cairo", date(2025, 4, 25), 23),
        ("Asia/Beirut", date(2025, 3, 30), 23),
        ("Australia/Lord_Howe", date(2025, 10, 5), 23.5),
        ("Asia/Kathmandu", date(2025, 6, 1), 24),
    ],
)
def test_civil_days_have_the_hours_they_have(zone: str, day: date, hours: float) -> None:
    """Lengths of the days on which clocks change: facts of the zones' public database."""
    begin, end = day_bounds(day, "local", replace(BERLIN, time_zone=zone), None)
    assert (end - begin) / 3600 == hours


def test_a_window_reads_its_clock() -> None:
    summer = intervals(BERLIN, days="06-21", start="09:00", end="15:00")
    assert summer.minutes.sum() == 360
    texts = clock_texts(summer.start[:1].astype(float), "local", BERLIN, sun_track(BERLIN, 1750000000, 1751000000))
    assert texts == ["2025-06-21 09:00:00"]
    standard = intervals(BERLIN, days="06-21", start="09:00", end="15:00", clock="standard")
    assert standard.start[0] - summer.start[0] == 3600


def test_true_solar_noon_is_the_highest_sun() -> None:
    """Common practice, no source: at 12:00 true solar time the sun stands in the meridian."""
    around = intervals(BERLIN, days="11-03", start="11:58", end="12:02", clock="solar", step_min=1)
    track = sun_track(BERLIN, around.start[0], around.end[-1])
    assert track.azimuth((around.start[0] + around.end[-1]) / 2) == pytest.approx(180.0, abs=0.01)


@given(st.floats(-66, 66), st.integers(1, 28), st.integers(1, 12))
def test_a_day_is_as_long_as_the_night_of_its_mirror(latitude: float, day: int, month: int) -> None:
    """Common practice, no source: what is daylight here is night on the other side of the equator."""
    days = f"{month:02}-{day:02}"
    here = intervals(replace(BERLIN, latitude=latitude), days=days).minutes.sum()
    there = intervals(replace(BERLIN, latitude=-latitude), days=days).minutes.sum()
    assert here + there == pytest.approx(24 * 60, abs=4.0)  # the declination changes within the day


def test_at_the_pole_the_sun_circles_level() -> None:
    """Common practice, no source."""
    pole = replace(BERLIN, latitude=90.0)
    at = 1750464000 + np.arange(0, 86400, 600.0)
    altitude = sun_track(pole, at[0], at[-1]).altitude(at)
    assert np.ptp(altitude) < 0.02
    assert altitude.mean() == pytest.approx(23.44, abs=0.01)


def test_at_the_equator_the_paths_stand_upright() -> None:
    """Common practice, no source: on an equinox the sun keeps to the east, passes the zenith, keeps to the west."""
    equator = replace(BERLIN, latitude=0.0)
    day = intervals(equator, days="march-equinox")
    azimuth = sun_track(equator, day.start[0], day.end[-1]).azimuth(day.middle)
    high = np.abs(azimuth - 180) < 85
    assert high.sum() <= 4
    assert set(np.round(azimuth[~high] / 90).astype(int)) == {1, 3}


@pytest.mark.parametrize(
    ("period", "said"),
    [
        ({"days": "02-29"}, "2025 is no leap year"),
        ({"days": "13-40"}, "not a day of 2025"),
        ({"days": "yaer"}, 'did you mean "year"'),
        ({"days": "12-21", "start": "01:00", "end": "03:00"}, "the sun is not up"),
    ],
)
def test_days_that_cannot_be(period: dict[str, str], said: str) -> None:
    with pytest.raises(PeriodError, match=said):
        intervals(BERLIN, **period)


def test_the_polar_night_has_no_intervals_and_the_polar_day_has_all() -> None:
    far_north = replace(BERLIN, latitude=78.0)
    with pytest.raises(PeriodError, match="the sun is not up on 2025-12-21; at noon of the first day it stands at -11"):
        intervals(far_north, days="12-21")
    assert intervals(far_north, days="06-21").minutes.sum() == 24 * 60


def test_spans_run_over_the_turn_of_the_year() -> None:
    winter = intervals(BERLIN, days="10-01/03-31", step_min=60)
    assert winter.resolved_days[0] == date(2025, 10, 1)
    assert winter.resolved_days[-1] == date(2026, 3, 31)
    assert len(winter.resolved_days) == 182


def test_named_days_are_resolved_and_said() -> None:
    solstice = intervals(BERLIN, days="december-solstice")
    assert solstice.resolved_days == (date(2025, 12, 21),)
    assert "2025-12-21 16:0" in solstice.notes[0]
