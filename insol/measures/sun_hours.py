"""What a period comes to for each receptor, and the same set out over the faces."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.checks import read_only


@dataclass(frozen=True)
class SunHours:
    """Hours of one period.

    Attributes
    ----------
    direct_h : (n,) float64, hours in which the sun reaches the point
    possible_h : (n,) float64, hours with the sun up, within the period's window and low-sun limit,
        and in front of the face, nothing in the way
    error_h : (n,) float64, how far `direct_h` may be from its value at an endless number of samples;
        never more than is possible
    """

    direct_h: NDArray[np.float64]
    possible_h: NDArray[np.float64]
    error_h: NDArray[np.float64]

    def __post_init__(self) -> None:
        for name in ("direct_h", "possible_h", "error_h"):
            object.__setattr__(self, name, read_only(getattr(self, name), np.float64, (None,), name))
        bounded = read_only(np.minimum(self.error_h, self.possible_h), np.float64, (None,), "error_h")
        object.__setattr__(self, "error_h", bounded)

    @property
    def shaded_fraction(self) -> NDArray[np.float64]:
        """1 - direct / possible, (n,) float64; NaN where there is no possible sun."""
        fraction = np.full(len(self.direct_h), np.nan)
        np.divide(self.direct_h, self.possible_h, out=fraction, where=self.possible_h > 0)
        return np.clip(1.0 - fraction, 0.0, 1.0)


def joined(pieces: list[SunHours]) -> SunHours:
    """The hours of one chunk after another."""
    return SunHours(
        direct_h=np.concatenate([piece.direct_h for piece in pieces]),
        possible_h=np.concatenate([piece.possible_h for piece in pieces]),
        error_h=np.concatenate([piece.error_h for piece in pieces]),
    )


def on_faces(hours: SunHours, face: NDArray[np.int64], count: int) -> SunHours:
    """Hours of receptors set out over `count` faces; NaN on faces that were not measured."""

    def set_out(values: NDArray[np.float64]) -> NDArray[np.float64]:
        over = np.full(count, np.nan)
        over[face] = values
        return over

    return SunHours(set_out(hours.direct_h), set_out(hours.possible_h), set_out(hours.error_h))
