"""A ring as it would lie on the ground of the scene: its needle shows north, its width a round length."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.output.stage import Camera

NEEDLE = 0.16
"""Half of the needle's width over the ring's radius."""


@dataclass(frozen=True)
class GroundRing:
    """The ring in the picture's plane, around the origin [m].

    Attributes
    ----------
    rim : (p, 2) float64, closed
    needle : (3, 2) float64, its tip in the middle
    letter : (2,) float64, unit; the way from the tip to where its N stands
    across_m : width of the ring
    """

    rim: NDArray[np.float64]
    needle: NDArray[np.float64]
    letter: NDArray[np.float64]
    across_m: float


def ground_ring(camera: Camera, north_deg: float, most_radius_m: float) -> GroundRing:
    """The ring of the longest round width that a radius allows, as a camera sees it."""
    radius = round_length(most_radius_m)
    turn = np.radians(np.arange(0, 361, 3))
    rim = np.stack([np.sin(turn), np.cos(turn), np.zeros_like(turn)], axis=1)
    north = north_of(north_deg)
    east = np.array([north[1], -north[0], 0.0])
    needle = camera.flat(np.stack([NEEDLE * east, north, -NEEDLE * east]))
    letter = needle[1] / max(float(np.linalg.norm(needle[1])), 1e-9)
    return GroundRing(camera.flat(rim) * radius, needle * radius, letter, 2 * radius)


def north_of(north_deg: float) -> NDArray[np.float64]:
    """True north (3,) in the model's frame.

    >>> north_of(90.0).round(6).tolist()  # +y bears east, so north lies to its left
    [-1.0, 0.0, 0.0]
    """
    return np.array([-np.sin(np.radians(north_deg)), np.cos(np.radians(north_deg)), 0.0])


def round_length(most_m: float) -> float:
    """The longest half of 1, 2 or 5 times a power of ten that is no longer than this.

    >>> round_length(12.0)
    10.0
    """
    power = 10.0 ** np.floor(np.log10(2 * most_m))
    return float(max(step * power / 2 for step in (1, 2, 5) if step * power <= 2 * most_m * (1 + 1e-9)))
