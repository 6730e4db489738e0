"""The year without dates: rows of declination, each a path of the sun from rise to set.

The sun's direction depends on declination and hour angle alone. Over a year its path fills a
narrow band of that plane twice, spring and autumn over the same ground, and other years over it
again. So a year is asked along some dozens of rows, evenly spaced in the sun's longitude and thus
nearly in time, and every period of any year is a weight on the same answers.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.sun.position import direction_from

LARGEST_DECLINATION = 23.45
"""A little beyond the obliquity of 23.44 degrees: what the sun reaches in these centuries, parallax included."""

SECONDS_PER_DEGREE = 240.0
"""Of hour angle: a row's parameter runs like the seconds of a day, 0 at upper transit."""

HALF_TURN_S = 180.0 * SECONDS_PER_DEGREE

PLACE_S = 1.5
"""Stored begins and ends are whole numbers of this [s], from the lower transit on: sixteen bits hold a turn."""


@dataclass(frozen=True)
class Row:
    """The sun's path at one declination over one place; a `SunPath`."""

    declination: float  # [deg]
    latitude: float  # [deg]
    north_deg: float

    @property
    def set(self) -> float:
        """Half the length of the day [s of hour angle]; 0 in the polar night."""
        cosine = -np.tan(np.radians(self.latitude)) * np.tan(np.radians(self.declination))
        return float(np.degrees(np.arccos(np.clip(cosine, -1.0, 1.0)))) * SECONDS_PER_DEGREE

    @property
    def rise(self) -> float:
        """The same before noon."""
        return -self.set

    def directions(self, at: NDArray[np.float64]) -> NDArray[np.float64]:
        """Unit vectors (m, 3) towards the sun at seconds of hour angle (m,)."""
        return direction_from(self.declination, np.asarray(at) / SECONDS_PER_DEGREE, self.latitude, self.north_deg)


def row_declinations(count: int) -> NDArray[np.float64]:
    """Declinations (count + 1,) [deg], ascending, evenly spaced in the sun's longitude."""
    longitude = np.radians(np.linspace(-90.0, 90.0, count + 1))
    return np.degrees(np.arcsin(np.sin(np.radians(LARGEST_DECLINATION)) * np.sin(longitude)))


def rows_over(latitude: float, north_deg: float, count: int) -> list[Row]:
    """The rows of a place, from the December solstice to the June one."""
    return [Row(float(declination), latitude, north_deg) for declination in row_declinations(count)]
