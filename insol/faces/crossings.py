"""How often rays in one direction leave bodies more than they enter them.

A ray that begins within a closed body leaves it once more than it enters it, whatever else it passes,
and whichever of two walls in one place it is said to meet first.
"""

from __future__ import annotations

import numpy as np
import shapely

from insol.faces.frames import frames_of
from insol.faces.grouping import Floats, Ints
from insol.scene.model import normals_and_areas

POINTS_AT_ONCE = 50_000
"""So many rays are looked up at once, to bound the memory taken."""

EDGE_ON = 1e-9
"""Twice the area of a triangle seen edge-on [m²]."""


class Crossings:
    """Triangles seen along one direction, ready to be asked which of them a ray passes."""

    def __init__(self, corners: Floats, direction: Floats) -> None:
        """Take in triangles (t, 3, 3) and a unit direction (3,)."""
        self.direction = direction
        frame = frames_of(np.zeros((1, 3)), direction[None])
        self.axes = np.stack([frame.along[0], frame.up[0]])
        normals, _ = normals_and_areas(corners)
        facing = normals @ direction
        seen = corners @ self.axes.T
        one, two = seen[:, 1] - seen[:, 0], seen[:, 2] - seen[:, 0]
        self.size = one[:, 0] * two[:, 1] - one[:, 1] * two[:, 0]
        kept = np.abs(self.size) > EDGE_ON
        self.seen, self.size = seen[kept], self.size[kept]
        self.leaving = np.where(facing > 0.0, 1, -1)[kept]
        self.depths = (corners @ direction)[kept]
        self.tree = shapely.STRtree(shapely.box(*self.seen.min(axis=1).T, *self.seen.max(axis=1).T))

    def net_exits(self, origins: Floats) -> Ints:
        """Exits less entries on the way of each ray from origins (n, 3)."""
        counts = [
            self.net_exits_at_once(origins[first : first + POINTS_AT_ONCE])
            for first in range(0, len(origins), POINTS_AT_ONCE)
        ]
        return np.concatenate([np.zeros(0, dtype=np.int64), *counts])

    def net_exits_at_once(self, origins: Floats) -> Ints:
        """The same for origins that are few enough to be looked up in one go."""
        places = origins @ self.axes.T
        ray, triangle = self.tree.query(shapely.points(places))
        corners = self.seen[triangle] - places[ray][:, None]
        following = np.roll(corners, -1, axis=1)
        # The share of the triangle that lies across the ray from each edge, and so the weight of the corner there.
        share = corners[..., 0] * following[..., 1] - corners[..., 1] * following[..., 0]
        share /= self.size[triangle][:, None]
        depth = np.einsum("ki,ki->k", share[:, [1, 2, 0]], self.depths[triangle])
        passed = (share >= 0.0).all(axis=1) & (depth > (origins @ self.direction)[ray])
        return np.bincount(ray[passed], self.leaving[triangle[passed]], minlength=len(origins)).astype(np.int64)
