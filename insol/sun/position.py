"""Where the sun stands: the NREL Solar Position Algorithm at coarse nodes, smooth between them.

Declination and hour angle, the latter less its even advance of 15 degrees an hour, change so
slowly that a cubic through hourly values follows them to better than the algorithm's own
uncertainty of 0.0003 degrees, at a hundredth of its cost.

References
----------
Reda, I. and Andreas, A. (2008). Solar Position Algorithm for Solar Radiation Applications.
NREL/TP-560-34302.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike, NDArray

from insol.study.description import Site

if TYPE_CHECKING:
    from scipy.interpolate import CubicSpline

NODE_S = 3600
"""Spacing of the nodes [s]. They lie on whole hours UTC, so that two tracks of one site share them."""

MARGIN_NODES = 24
"""Nodes beyond both ends: there a cubic's end conditions die out."""

DEG_PER_S = 15.0 / 3600.0
"""Advance of the mean sun's hour angle [deg/s]."""


@dataclass(frozen=True)
class SunTrack:
    """The sun over a span of time at one site; true (airless) positions of the disc's centre."""

    site: Site
    first: float  # unix seconds
    last: float
    _smooth: CubicSpline  # of (declination, hour angle less mean advance) [deg]

    def declination(self, unix: ArrayLike) -> NDArray[np.float64]:
        """Topocentric declination [deg] at unix seconds (m,)."""
        return self._smooth(self._seconds(unix))[..., 0]

    def hour_angle(self, unix: ArrayLike) -> NDArray[np.float64]:
        """Hour angle in [-180, 180) [deg], 0 at upper transit, positive after noon."""
        seconds = self._seconds(unix)
        angle = self._smooth(seconds)[..., 1] + mean_hour_angle(seconds + self.first, self.site.longitude)
        return (angle + 180.0) % 360.0 - 180.0

    def equation_of_time_min(self, unix: ArrayLike) -> NDArray[np.float64]:
        """True solar time less mean solar time [min]."""
        return self._smooth(self._seconds(unix))[..., 1] * 4.0

    def directions(self, unix: ArrayLike) -> NDArray[np.float64]:
        """Unit vectors (m, 3) towards the sun in the model's frame."""
        seconds = self._seconds(unix)
        smooth = self._smooth(seconds)
        hour_angle = smooth[..., 1] + mean_hour_angle(seconds + self.first, self.site.longitude)
        return direction_from(smooth[..., 0], hour_angle, self.site.latitude, self.site.north_deg)

    def altitude(self, unix: ArrayLike) -> NDArray[np.float64]:
        """Degrees above the astronomical horizon."""
        return np.degrees(np.arcsin(np.clip(self.directions(unix)[..., 2], -1.0, 1.0)))

    def azimuth(self, unix: ArrayLike) -> NDArray[np.float64]:
        """Degrees clockwise from true north, [0, 360)."""
        direction = self.directions(unix)
        model = np.degrees(np.arctan2(direction[..., 0], direction[..., 1]))
        return (model + self.site.north_deg) % 360.0

    def _seconds(self, unix: ArrayLike) -> NDArray[np.float64]:
        return np.asarray(unix, dtype=np.float64) - self.first


def direction_from(
    declination_deg: ArrayLike, hour_angle_deg: ArrayLike, latitude_deg: float, north_deg: float
) -> NDArray[np.float64]:
    """Unit vectors (..., 3) towards the sun in the model's frame.

    Parameters
    ----------
    declination_deg, hour_angle_deg : [deg], broadcast together
    north_deg : bearing of the model's +y axis, clockwise from true north [deg]
    """
    delta, omega = np.radians(declination_deg), np.radians(hour_angle_deg)
    phi, turn = np.radians(latitude_deg), np.radians(north_deg)
    east = -np.cos(delta) * np.sin(omega)
    north = np.sin(delta) * np.cos(phi) - np.cos(delta) * np.cos(omega) * np.sin(phi)
    up = np.sin(delta) * np.sin(phi) + np.cos(delta) * np.cos(omega) * np.cos(phi)
    x = east * np.cos(turn) - north * np.sin(turn)
    y = east * np.sin(turn) + north * np.cos(turn)
    return np.stack([x, y, up], axis=-1)


def mean_hour_angle(unix: ArrayLike, longitude_deg: float) -> NDArray[np.float64]:
    """Hour angle of the mean sun [deg], growing without end; 0 at mean noon of 1970-01-01."""
    return (np.asarray(unix, dtype=np.float64) - 43200.0) * DEG_PER_S + longitude_deg


def sun_track(site: Site, first_unix: float, last_unix: float) -> SunTrack:
    """The sun over a site from `first_unix` to `last_unix` [unix s]."""
    from scipy.interpolate import CubicSpline

    low = (np.floor(first_unix / NODE_S) - MARGIN_NODES) * NODE_S
    high = (np.ceil(last_unix / NODE_S) + MARGIN_NODES) * NODE_S
    nodes = np.arange(low, high + NODE_S, NODE_S)
    declination, hour_angle = _spa_equatorial(site, nodes)
    lead = hour_angle - mean_hour_angle(nodes, site.longitude)
    lead = (lead + 180.0) % 360.0 - 180.0
    smooth = CubicSpline(nodes - low, np.stack([declination, lead], axis=1))
    return SunTrack(site, float(low), float(high), smooth)


def _spa_equatorial(site: Site, nodes: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Topocentric declination and hour angle [deg] from the algorithm's azimuth and true elevation."""
    import pandas as pd
    from pvlib.solarposition import spa_python

    times = pd.DatetimeIndex(pd.to_datetime(nodes.astype(np.int64), unit="s", utc=True))
    # The true elevation takes no refraction; pressure and temperature do not enter it.
    position = spa_python(times, site.latitude, site.longitude, altitude=site.elevation_m, delta_t=None)
    azimuth, elevation = np.radians(position["azimuth"].to_numpy()), np.radians(position["elevation"].to_numpy())
    phi = np.radians(site.latitude)
    east, north, up = np.cos(elevation) * np.sin(azimuth), np.cos(elevation) * np.cos(azimuth), np.sin(elevation)
    hour_angle = np.degrees(np.arctan2(-east, up * np.cos(phi) - north * np.sin(phi)))
    declination = np.degrees(np.arcsin(np.clip(up * np.sin(phi) + north * np.cos(phi), -1.0, 1.0)))
    return declination, hour_angle
