"""A ring lying on the ground: its needle shows north, its width a round length."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.output.view_data import ViewData

SHARE = 0.07
"""Radius over the width of what is shown, at most."""


@dataclass(frozen=True)
class GroundRing:
    """The ring's line, its needle, and where its words stand."""

    points: NDArray[np.float64]  # (p, 3) [m], closed
    needle: NDArray[np.float64]  # (1, 3, 3)
    north: NDArray[np.float64]  # (3,)
    foot: NDArray[np.float64]  # (3,)
    across_m: float


def ground_ring(data: ViewData) -> GroundRing:
    """A ring beside the measured faces, at the height of the lowest of them."""
    low, high = data.triangles.reshape(-1, 3).min(axis=0), data.triangles.reshape(-1, 3).max(axis=0)
    radius = round_length(SHARE * float(np.hypot(*(high - low)[:2])) + 0.1)
    centre = np.array([low[0] - 1.6 * radius, low[1] - 0.4 * radius, low[2]])
    ring = centre + ring_points(radius)
    north = north_of(data.north_deg)
    east = np.array([north[1], -north[0], 0.0])
    needle = centre + radius * np.stack([0.16 * east, north, -0.16 * east])
    return GroundRing(ring, needle[None], centre + 1.3 * radius * north, centre - 1.35 * radius * north, 2 * radius)


def ring_points(radius_m: float) -> NDArray[np.float64]:
    """A level circle (p, 3) around the origin, closed."""
    turn = np.radians(np.arange(0, 361, 3))
    return np.stack([np.sin(turn), np.cos(turn), np.zeros_like(turn)], axis=1) * radius_m


def north_of(north_deg: float) -> NDArray[np.float64]:
    """True north (3,) in the model's frame."""
    return np.array([-np.sin(np.radians(north_deg)), np.cos(np.radians(north_deg)), 0.0])


def round_length(most_m: float) -> float:
    """The longest half of 1, 2 or 5 times a power of ten that is no longer than this.

    >>> round_length(12.0)
    10.0
    """
    power = 10.0 ** np.floor(np.log10(2 * most_m))
    return float(max(step * power / 2 for step in (1, 2, 5) if step * power <= 2 * most_m * (1 + 1e-9)))
