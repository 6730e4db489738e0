"""How triangles hang together: welded vertices, shared edges, connected bodies."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from insol.conventions import WELD_M
from insol.scene.model import Mesh


@dataclass(frozen=True)
class Edges:
    """The undirected edges of a set of triangles.

    Attributes
    ----------
    edge : (t, 3) int64, the edge of each triangle's side; sides run 0-1, 1-2, 2-0
    forward : (t, 3) bool, whether the side runs from the edge's lower vertex to its higher one
    uses : (e,) int64, how many triangle sides lie on each edge
    """

    edge: NDArray[np.int64]
    forward: NDArray[np.bool_]
    uses: NDArray[np.int64]


def edges_of(triangles: NDArray[np.integer]) -> Edges:
    """The edges of triangles (t, 3); those of different bodies are different by their vertices."""
    start = triangles.astype(np.int64)
    end = np.roll(start, -1, axis=1)
    low, high = np.minimum(start, end), np.maximum(start, end)
    width = int(high.max(initial=0)) + 1
    _, edge, uses = np.unique((low * width + high).ravel(), return_inverse=True, return_counts=True)
    return Edges(edge.reshape(-1, 3), start < end, uses)


def welded(mesh: Mesh) -> Mesh:
    """The mesh with equal vertices made one, as exporters that repeat them for every face need.

    In the file's own units; a millimetre model is welded to a hundred-thousandth of one.
    """
    keys = np.round(mesh.vertices / WELD_M)
    _, first, number = np.unique(keys, axis=0, return_index=True, return_inverse=True)
    if len(first) == len(mesh.vertices):
        return mesh
    # Kept in the order in which the file has them.
    order = np.argsort(first, kind="stable")
    rank = np.empty(len(first), dtype=np.int64)
    rank[order] = np.arange(len(first))
    triangles = rank[number.reshape(-1)][mesh.triangles].astype(np.int32)
    return replace(mesh, vertices=mesh.vertices[first[order]], triangles=triangles)


def bodies_of(triangles: NDArray[np.integer]) -> NDArray[np.int64]:
    """The connected body (t,) of each triangle, numbered in order of first appearance.

    Triangles are connected where they share an edge; one that touches at a point only is not.
    """
    edges = edges_of(triangles)
    return connected(len(triangles), *_neighbours(edges, edges.edge.ravel() >= 0))


def shells_of(triangles: NDArray[np.integer], edges: Edges) -> NDArray[np.int64]:
    """Pieces (t,) connected across edges that exactly two triangles share: they have one winding."""
    return connected(len(triangles), *_neighbours(edges, edges.uses[edges.edge.ravel()] == 2))


def connected(count: int, a: NDArray[np.int64], b: NDArray[np.int64]) -> NDArray[np.int64]:
    """Connected components of `count` things joined in pairs, numbered in order of first appearance."""
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    graph = coo_array((np.ones(len(a), dtype=np.int8), (a, b)), shape=(count, count))
    _, label = connected_components(graph, directed=False)
    _, first, number = np.unique(label, return_index=True, return_inverse=True)
    return np.argsort(np.argsort(first, kind="stable"), kind="stable")[number.reshape(-1)]


def _neighbours(edges: Edges, usable: NDArray[np.bool_]) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Pairs of triangles that follow one another around each usable edge."""
    first, second = side_pairs(edges, usable)
    return first // 3, second // 3


def side_pairs(edges: Edges, usable: NDArray[np.bool_]) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Pairs of sides (3 × triangle + side) that lie on one edge; `usable` (3 t,) bool picks among them."""
    sides = np.flatnonzero(usable)
    on_edge = edges.edge.ravel()[sides]
    order = np.argsort(on_edge, kind="stable")
    same = on_edge[order][1:] == on_edge[order][:-1]
    return sides[order][:-1][same], sides[order][1:][same]
