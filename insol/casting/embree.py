"""Embree, through embreex's own scene: single precision, watertight at shared edges, the GIL released."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from insol.casting.contract import Answers, Origins

HIT = 0
"""What an occlusion query answers where something stands in the way; -1 where nothing does."""


class EmbreeCaster:
    """One merged geometry; a triangle's number is its row."""

    engine = "embree"

    def __init__(self, vertices: NDArray[np.float64], triangles: NDArray[np.int32]) -> None:
        from embreex import rtcore_scene
        from embreex.mesh_construction import TriangleMesh

        self.triangle_count = len(triangles)
        self._scene = rtcore_scene.EmbreeScene(robust=True)
        if self.triangle_count:
            corners = np.ascontiguousarray(vertices, dtype=np.float32), np.ascontiguousarray(triangles, dtype=np.int32)
            TriangleMesh(self._scene, *corners)
            # The first ray commits the scene; later ones may then come from any thread.
            self._scene.run(np.zeros((1, 3), np.float32), np.array([[0, 0, 1]], np.float32), query="OCCLUDED")

    def blocked(self, origins: Origins, direction: NDArray[np.float64]) -> Answers:
        """Whether anything stands in the one direction, (n,) bool."""
        return self.blocked_each(origins, np.asarray(direction, dtype=np.float32).reshape(1, 3))

    def blocked_each(self, origins: Origins, directions: NDArray[np.float32]) -> Answers:
        """Whether anything stands in each ray's own direction, (n,) bool."""
        if not self.triangle_count or not len(origins):
            return np.zeros(len(origins), dtype=bool)
        return np.asarray(self._scene.run(origins, directions, query="OCCLUDED") == HIT)

    def first(self, origins: Origins, directions: NDArray[np.float32]) -> NDArray[np.int32]:
        """The triangle met first, (n,) int32; -1 where the sky is open."""
        if not self.triangle_count or not len(origins):
            return np.full(len(origins), -1, dtype=np.int32)
        return np.asarray(self._scene.run(origins, directions, query="INTERSECT"), dtype=np.int32)
