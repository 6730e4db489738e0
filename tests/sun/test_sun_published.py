"""The sun against published values; what they are and where they come from stands in references/sun_values.py."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from references import sun_values as published

from insol.conventions import normals_from
from insol.study.description import Period, Site
from insol.sun.position import direction_from, sun_track
from insol.sun.seasons import instant_of_longitude
from insol.sun.times import altitude_crossings, intervals_of, span_of

WITH_REFRACTION_DEG = -0.8333
"""Altitude of the centre as the upper limb, refracted by 34 arc minutes, touches the horizon."""


def site(latitude: float, longitude: float = 0.0, **more: float) -> Site:
    return Site(latitude=latitude, longitude=longitude, time_zone="+00:00", **more)


def test_the_worked_example_of_the_solar_position_algorithm() -> None:
    example = published.SPA_EXAMPLE
    place = site(example["latitude"], example["longitude"], elevation_m=example["elevation_m"])
    track = sun_track(place, example["unix"] - 86400, example["unix"] + 86400)
    # The report takes ΔT as 67 s, we 64.5 s: meanwhile the sun moves along the ecliptic by 1e-4 degrees.
    assert track.altitude(example["unix"]) == pytest.approx(example["elevation_deg"], abs=3e-4)
    assert track.azimuth(example["unix"]) == pytest.approx(example["azimuth_deg"], abs=3e-4)
    assert track.equation_of_time_min(example["unix"]) == pytest.approx(example["equation_of_time_min"], abs=0.01)


@pytest.mark.parametrize(("latitude", "rise", "set_"), published.SPA_RISE_SET)
def test_rise_and_set_of_the_solar_position_algorithm(latitude: float, rise: float, set_: float) -> None:
    track = sun_track(site(latitude), rise - 86400, set_ + 86400)
    crossings = altitude_crossings(track, WITH_REFRACTION_DEG, rise, rise)
    for expected in (rise, set_):
        # The report interpolates rise and set between three days: to some seconds.
        assert np.abs(crossings - expected).min() < 10


@pytest.mark.parametrize(("latitude", "longitude", "rise", "set_"), published.USNO_RISE_SET)
def test_rise_and_set_of_the_naval_observatory(latitude: float, longitude: float, rise: float, set_: float) -> None:
    track = sun_track(site(latitude, longitude), rise - 86400, set_ + 86400)
    crossings = altitude_crossings(track, WITH_REFRACTION_DEG, rise, rise)
    for expected in (rise, set_):
        assert np.abs(crossings - expected).min() < 60  # printed to the minute


def test_declination_and_equation_of_time_of_meeus() -> None:
    track = sun_track(site(0.0), published.MEEUS_UNIX - 86400, published.MEEUS_UNIX + 86400)
    # Ours is seen from the ground: up to 8.8 arc seconds of parallax, a second of right ascension.
    assert track.declination(published.MEEUS_UNIX) == pytest.approx(published.MEEUS_DECLINATION_DEG, abs=9 / 3600)
    assert track.equation_of_time_min(published.MEEUS_UNIX) == pytest.approx(
        published.MEEUS_EQUATION_OF_TIME_MIN, abs=1 / 60
    )


@pytest.mark.parametrize(("longitude", "year", "expected"), published.SEASONS)
def test_equinoxes_and_solstices(longitude: float, year: int, expected: float) -> None:
    assert instant_of_longitude(longitude, year) == pytest.approx(expected, abs=90)  # printed to the minute


@pytest.mark.parametrize(("latitude", "day", "geometric_h", "with_refraction_h", "noon_deg"), published.DAY_LENGTHS)
def test_length_of_the_day_and_noon_altitude(
    latitude: float, day: str, geometric_h: float, with_refraction_h: float, noon_deg: float
) -> None:
    period = Period(name="day", days=day, year=2025, step_min=60)
    track = sun_track(site(latitude), *span_of([period], site(latitude)))
    for lowest, expected in ((0.0, geometric_h), (WITH_REFRACTION_DEG, with_refraction_h)):
        intervals = intervals_of(replace(period, lowest_altitude_deg=lowest), site(latitude), track)
        assert intervals.minutes.sum() / 60 == pytest.approx(
            expected, abs=0.01
        )  # printed to two digits, of another year
    noon = intervals.start[0] + np.arange(0, 86400, 30.0)
    assert track.altitude(noon).max() == pytest.approx(noon_deg, abs=0.06)


def incidence_deg(direction: np.ndarray, azimuth: float, tilt: float) -> float:
    normal = normals_from(np.array([azimuth]), np.array([tilt]), 0.0)[0]
    return float(np.degrees(np.arccos(normal @ direction)))


def test_incidence_of_the_worked_example() -> None:
    """NREL/TP-560-34302, the same example: a slope of 30 degrees that faces 10 degrees east of south. Seen."""
    example = published.SPA_EXAMPLE
    place = site(example["latitude"], example["longitude"], elevation_m=example["elevation_m"])
    track = sun_track(place, example["unix"] - 86400, example["unix"] + 86400)
    # With refraction there, 25.18700; it lifts the sun by 0.0163 degrees nearly in the plane of incidence.
    direction = track.directions(np.array([example["unix"]]))[0]
    assert incidence_deg(direction, 170.0, 30.0) == pytest.approx(25.18700 + 0.0163 * 0.88, abs=0.004)


def test_incidence_in_the_handbook() -> None:
    """Duffie and Beckman, Solar Engineering of Thermal Processes, example 1.6.1: cos θ 0.817, θ 35 degrees. Seen."""
    direction = direction_from(-14.0, -22.5, 43.0, 0.0)
    # Madison, 13 February 10:30 solar, slope 45, surface azimuth 15 west of south.
    assert np.cos(np.radians(incidence_deg(direction, 195.0, 45.0))) == pytest.approx(0.817, abs=0.001)
    assert incidence_deg(direction, 195.0, 45.0) == pytest.approx(35.18, abs=0.02)


def test_zenith_and_azimuth_in_the_handbook() -> None:
    """Duffie and Beckman, example 1.6.3: 43 N, 16 March 16:00 solar, zenith 70.3, azimuth 66.8. From memory."""
    direction = direction_from(-2.4, 60.0, 43.0, 0.0)
    assert np.degrees(np.arccos(direction[2])) == pytest.approx(70.3, abs=0.1)
    assert np.degrees(np.arctan2(direction[0], direction[1])) % 360 == pytest.approx(180 + 66.8, abs=0.1)


def test_noon_altitude_of_the_overhang_rule() -> None:
    """40 N at the June solstice: 73.44 degrees, so 1.5 m are shaded by 0.446 m of overhang. Recomputed with pvlib."""
    altitude = np.arcsin(direction_from(23.44, 0.0, 40.0, 0.0)[2])
    assert np.degrees(altitude) == pytest.approx(73.44, abs=0.01)
    assert 1.5 / np.tan(altitude) == pytest.approx(0.446, abs=0.001)
