"""The instants of equinoxes, solstices and any other longitude of the sun."""

from __future__ import annotations

from datetime import UTC, datetime

import numpy as np
from numpy.typing import NDArray

DAYS_PER_DEGREE = 365.2422 / 360.0
MARCH_EQUINOX_DAY = 79.0
"""Of the year, near enough to begin from."""


def instant_of_longitude(longitude_deg: float, year: int) -> float:
    """Unix seconds at which the sun's apparent geocentric longitude is `longitude_deg` in a year, to a second.

    Longitude 0 is the March equinox, 90 the June solstice. From 280 on, the instant falls near the
    year's turn; the one that begins from the year's own January is given.
    """
    day = (MARCH_EQUINOX_DAY + longitude_deg * DAYS_PER_DEGREE) % 365.2422
    unix = datetime(year, 1, 1, tzinfo=UTC).timestamp() + day * 86400.0
    for _ in range(8):
        away = (longitude_deg - float(apparent_longitude(np.array([unix]))[0]) + 180.0) % 360.0 - 180.0
        unix += away * DAYS_PER_DEGREE * 86400.0
    return unix


def apparent_longitude(unix: NDArray[np.float64]) -> NDArray[np.float64]:
    """Apparent geocentric longitude of the sun [deg], by the steps 3.2 to 3.6 of NREL/TP-560-34302."""
    from pvlib import spa

    moment = datetime.fromtimestamp(float(unix[0]), tz=UTC)
    delta_t = spa.calculate_deltat(moment.year, moment.month)
    century = spa.julian_ephemeris_century(spa.julian_ephemeris_day(spa.julian_day(unix), delta_t))
    millennium = spa.julian_ephemeris_millennium(century)
    longitude = spa.geocentric_longitude(spa.heliocentric_longitude(millennium))
    nutation = np.empty((2, len(unix)))
    spa.longitude_obliquity_nutation(
        century,
        spa.mean_elongation(century),
        spa.mean_anomaly_sun(century),
        spa.mean_anomaly_moon(century),
        spa.moon_argument_latitude(century),
        spa.moon_ascending_longitude(century),
        nutation,
    )
    aberration = spa.aberration_correction(spa.heliocentric_radius_vector(millennium))
    return np.asarray(spa.apparent_sun_longitude(longitude, nutation[0], aberration)) % 360.0
