"""The engine for machines without Embree: numpy only, double precision, the same answers."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from insol.casting.contract import Answers, Origins
from insol.casting.sweep import blocked_along, bounding_balls
from insol.casting.tree import nearest_hits, tree_of


class NumpyCaster:
    """Parallel rays by a sweep across the sun's plane, any others down a tree of boxes."""

    engine = "numpy"

    def __init__(self, vertices: NDArray[np.float64], triangles: NDArray[np.int32]) -> None:
        self.triangle_count = len(triangles)
        self._triangles = triangles
        self._corners = vertices[triangles]
        self._balls = bounding_balls(self._corners)
        self._tree = tree_of(self._corners) if self.triangle_count else None

    def blocked(self, origins: Origins, direction: NDArray[np.float64]) -> Answers:
        """Whether anything stands in the one direction, (n,) bool."""
        if not self.triangle_count or not len(origins):
            return np.zeros(len(origins), dtype=bool)
        points, along = origins.astype(np.float64), np.asarray(direction, dtype=np.float64)
        return blocked_along(self._corners, self._triangles, self._balls, points, along)

    def blocked_each(self, origins: Origins, directions: NDArray[np.float32]) -> Answers:
        """Whether anything stands in each ray's own direction, (n,) bool."""
        return self.first(origins, directions) >= 0

    def first(self, origins: Origins, directions: NDArray[np.float32]) -> NDArray[np.int32]:
        """The triangle met first, (n,) int32; -1 where the sky is open."""
        if self._tree is None:
            return np.full(len(origins), -1, dtype=np.int32)
        hits = nearest_hits(self._tree, self._corners, origins.astype(np.float64), directions.astype(np.float64))
        return hits.astype(np.int32)
