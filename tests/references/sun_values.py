"""Published values of the sun's position and of the day's length, each with its source.

How sure: "seen" in the source named or in a copy of it; "memory": of the source, without it at hand;
"recomputed": with pvlib 0.16.1 or numpy from the formula named.
"""

from __future__ import annotations

from datetime import UTC, datetime


def unix(year: int, month: int, day: int, hour: int = 0, minute: int = 0, second: float = 0.0) -> float:
    """Unix seconds of a moment in UTC."""
    return datetime(year, month, day, hour, minute, tzinfo=UTC).timestamp() + second


# Reda and Andreas, Solar Position Algorithm for Solar Radiation Applications, NREL/TP-560-34302 (2008),
# table A5.1 and its text: seen. 2003-10-17 12:30:30 UTC-7, 39.742476 N, 105.1786 W, 1830.14 m.
SPA_EXAMPLE = {
    "unix": unix(2003, 10, 17, 19, 30, 30),
    "latitude": 39.742476,
    "longitude": -105.1786,
    "elevation_m": 1830.14,
    "elevation_deg": 39.872046,  # without refraction
    "azimuth_deg": 194.340241,
    "equation_of_time_min": 14.641503,
}

# The same report's table of rise and set: longitude 0, UT, disc's upper limb and refraction, -0.8333 degrees. Seen.
SPA_RISE_SET = [
    (-35.0, unix(1996, 7, 5, 7, 8, 15), unix(1996, 7, 5, 17, 1, 4)),
    (-35.0, unix(2004, 12, 4, 4, 38, 57), unix(2004, 12, 4, 19, 2, 2)),
    (35.0, unix(1994, 1, 2, 7, 8, 12), unix(1994, 1, 2, 16, 59, 55)),
]

# U.S. Naval Observatory, complete sun table for one day, to the minute: seen in public test code.
USNO_RISE_SET = [
    (39.0, -105.0, unix(2015, 1, 2, 14, 19), unix(2015, 1, 2, 23, 49)),  # 07:19 and 16:49 MST
    (39.904, 116.407, unix(2015, 1, 1, 23, 36), unix(2015, 1, 2, 9, 0)),  # Beijing, 07:36 and 17:00
]

# Meeus, Astronomical Algorithms, 2nd edition: examples 25.b and 28.b, 1992-10-13 0h TD. Seen, quoted in public test
# code. TD was 59 s ahead of UT.
MEEUS_UNIX = unix(1992, 10, 12, 23, 59, 1)
MEEUS_DECLINATION_DEG = -(7 + 47 / 60 + 1.74 / 3600)
MEEUS_EQUATION_OF_TIME_MIN = 13 + 42.6 / 60

# Equinoxes and solstices, UTC, to the minute, as almanacs print them: memory (USNO, Earth's Seasons).
SEASONS = [
    (0.0, 2024, unix(2024, 3, 20, 3, 6)),
    (90.0, 2024, unix(2024, 6, 20, 20, 51)),
    (180.0, 2024, unix(2024, 9, 22, 12, 44)),
    (270.0, 2024, unix(2024, 12, 21, 9, 21)),  # 09:20 in some prints
    (0.0, 2025, unix(2025, 3, 20, 9, 1)),
    (90.0, 2025, unix(2025, 6, 21, 2, 42)),
    (180.0, 2025, unix(2025, 9, 22, 18, 19)),
    (270.0, 2025, unix(2025, 12, 21, 15, 3)),
]

# Length of the day [h], geometric and with -0.833 degrees, June and December solstice; altitude at noon [deg].
# Recomputed with pvlib 0.16.1.
DAY_LENGTHS = [
    (40.0, "06-21", 14.85, 15.02, 73.4),
    (40.0, "12-21", 9.16, 9.32, 26.6),
    (51.5, "06-21", 16.40, 16.64, 61.9),
    (51.5, "12-21", 7.60, 7.83, 15.1),
    (60.0, "06-21", 18.49, 18.87, 53.4),
    (60.0, "12-21", 5.51, 5.87, 6.6),
]
