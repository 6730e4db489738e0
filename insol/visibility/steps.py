"""A period asked at the midpoints of its intervals: one bit for each receptor and instant."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.casting.contract import Caster
from insol.checks import read_only
from insol.sun.position import SunTrack
from insol.visibility.asking import CheckStop, open_sky
from insol.visibility.receptors import Receptors

COLUMNS_AT_ONCE = 2048
"""Directions held unpacked at a time: with a chunk of 8,192 receptors, 16 MB."""


@dataclass(frozen=True)
class StepsQuestion:
    """Whether the sky is open at each of many instants.

    Attributes
    ----------
    instants : (m,) float64, unix seconds, ascending
    track : where the sun stands
    """

    instants: NDArray[np.float64]
    track: SunTrack

    def __post_init__(self) -> None:
        object.__setattr__(self, "instants", read_only(self.instants, np.float64, (None,), "instants"))

    @property
    def name(self) -> str:
        """A name that is the same for the same instants."""
        return f"steps-{len(self.instants)}-{hashlib.sha256(self.instants.tobytes()).hexdigest()[:12]}"

    @property
    def rays_per_receptor(self) -> float:
        """How many rays a receptor costs, about half of the directions being behind it."""
        return len(self.instants) / 2

    def answer(self, caster: Caster, receptors: Receptors, check_stop: CheckStop) -> dict[str, NDArray]:
        """`open`: (m, ceil(n / 8)) uint8, a row for each instant, packed along the receptors."""
        directions = self.track.directions(self.instants)
        packed = np.zeros((len(directions), (len(receptors) + 7) // 8), dtype=np.uint8)
        for first in range(0, len(directions), COLUMNS_AT_ONCE):
            rows = slice(first, first + COLUMNS_AT_ONCE)
            packed[rows] = np.packbits(open_sky(caster, receptors, directions[rows], check_stop), axis=1)
        return {"open": packed}


def unpacked(packed: NDArray[np.uint8], count: int) -> NDArray[np.uint8]:
    """Bits (m, count) of 0 and 1 from their packed rows."""
    return np.unpackbits(packed, axis=1, count=count)
