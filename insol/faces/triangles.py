"""The triangles that a measure looks at, and which of them share an edge."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from insol.conventions import DEGENERATE_M2, WELD_M
from insol.faces.grouping import Flags, Floats, Ints, near_labels, run_starts
from insol.scene.model import Scene, normals_and_areas

MOST_AROUND_AN_EDGE = 8
"""Of more triangles than this around one edge only neighbours in the list are compared."""


@dataclass(frozen=True)
class Triangles:
    """Triangles with a direction to face, in the order of part and file.

    Attributes
    ----------
    corners : (t, 3, 3) [m], counter-clockwise seen from outside
    normals : (t, 3), unit
    areas : (t,) [m²]
    vertices : (t, 3), numbers of the corners, equal where corners are one within WELD_M
    polygon : (t,), number of the file's polygon
    part : (t,), index into the scene's parts
    """

    corners: Floats
    normals: Floats
    areas: Floats
    vertices: Ints
    polygon: Ints
    part: Ints

    def __len__(self) -> int:
        return len(self.areas)

    def some(self, chosen: Flags) -> Triangles:
        """Those of the triangles that are chosen."""
        return Triangles(
            self.corners[chosen],
            self.normals[chosen],
            self.areas[chosen],
            self.vertices[chosen],
            self.polygon[chosen],
            self.part[chosen],
        )


@dataclass(frozen=True)
class HalfEdges:
    """Each triangle's three edges, as it runs round them, the h-th being edge h // t of triangle h % t.

    Attributes
    ----------
    triangle, start, end : (3 t,), the triangle and the numbers of the two vertices
    edge : (3 t,), equal for edges of one part between the same two vertices, in either direction
    """

    triangle: Ints
    start: Ints
    end: Ints
    edge: Ints


def triangles_of_parts(scene: Scene, chosen: Flags) -> Triangles:
    """The triangles of the chosen parts, without those too small to face anywhere."""
    index = np.flatnonzero(chosen[scene.part])
    index = index[np.argsort(scene.part[index], kind="stable")]
    used, renumbered = np.unique(scene.triangles[index], return_inverse=True)
    welded, places = welded_vertices(scene.vertices[used])
    vertices = welded[renumbered.reshape(-1, 3)]
    corners = places[vertices]
    normals, areas = normals_and_areas(corners)
    found = Triangles(
        corners, normals, areas, vertices, scene.polygon[index].astype(np.int64), scene.part[index].astype(np.int64)
    )
    whole = (vertices != np.roll(vertices, 1, axis=1)).all(axis=1)
    return found.some(whole & (areas >= DEGENERATE_M2))


def welded_vertices(vertices: Floats) -> tuple[Ints, Floats]:
    """A number (v,) for each vertex, equal for those within WELD_M, and the one place (k, 3) of each number."""
    labels = near_labels(vertices, WELD_M)
    order = np.argsort(labels, kind="stable")
    return labels, vertices[order[run_starts(labels[order])]]


def half_edges(triangles: Triangles) -> HalfEdges:
    """The edges of the triangles, numbered so that equal ones can be found."""
    start = triangles.vertices.T.reshape(-1)
    end = np.roll(triangles.vertices, -1, axis=1).T.reshape(-1)
    triangle = np.tile(np.arange(len(triangles)), 3)
    count = int(triangles.vertices.max(initial=0)) + 1
    between = np.minimum(start, end) * count + np.maximum(start, end)
    order = np.lexsort((triangles.part[triangle], between))
    parted = np.diff(between[order]) != 0
    parted |= np.diff(triangles.part[triangle][order]) != 0
    edge = np.empty(len(start), dtype=np.int64)
    edge[order] = np.concatenate([np.zeros(min(1, len(order)), dtype=np.int64), np.cumsum(parted)])
    return HalfEdges(triangle, start, end, edge)


def opposite_pairs(edges: HalfEdges) -> tuple[Ints, Ints]:
    """Pairs of half-edges that run along the same edge in opposite directions."""
    order = np.argsort(edges.edge, kind="stable")
    first: list[Ints] = []
    second: list[Ints] = []
    for apart in range(1, MOST_AROUND_AN_EDGE):
        one, other = order[:-apart], order[apart:]
        same = edges.edge[one] == edges.edge[other]
        if not same.any():
            break
        one, other = one[same], other[same]
        opposite = edges.start[one] == edges.end[other]
        first.append(one[opposite])
        second.append(other[opposite])
    none = np.zeros(0, dtype=np.int64)
    return np.concatenate([none, *first]), np.concatenate([none, *second])
