"""Any rays in numpy: a balanced tree of boxes, all rays walked down it together, level by level."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.casting.order import coherent_order

LEAF = 4
"""Triangles of a leaf."""

RAYS_AT_ONCE = 1 << 13
"""Rays walked together: bounds the memory of the pairs of ray and box."""

NO_ADVANCE = 1e-60
"""Stands for a direction's zero: large enough to divide by, too small to leave a box's side."""

INSIDE = 1e-12
"""How far outside a triangle, in barycentric coordinates, still counts as in it: rays along an edge
that two triangles share must meet one of them."""


@dataclass(frozen=True)
class Tree:
    """A complete binary tree over triangles in the order of a space-filling curve.

    Attributes
    ----------
    low, high : by level, (2**level, 3) float64, the boxes
    order : (leaves * LEAF,) int64, triangle of each place, -1 where padded
    """

    low: tuple[NDArray[np.float64], ...]
    high: tuple[NDArray[np.float64], ...]
    order: NDArray[np.int64]


def tree_of(corners: NDArray[np.float64]) -> Tree:
    """The tree over triangles (t, 3, 3), t > 0."""
    count = len(corners)
    order = coherent_order(corners.mean(axis=1), np.zeros(count, dtype=np.int64))
    levels = max(int(np.ceil(np.log2(max(count / LEAF, 1)))), 0)
    places = LEAF << levels
    padded = np.full(places, -1, dtype=np.int64)
    # Spread evenly, so that no leaf is full while its neighbour is empty.
    padded[(np.arange(count) * places) // count] = order
    low = np.where(padded[:, None] >= 0, corners.min(axis=1)[padded], np.inf).reshape(-1, LEAF, 3).min(axis=1)
    high = np.where(padded[:, None] >= 0, corners.max(axis=1)[padded], -np.inf).reshape(-1, LEAF, 3).max(axis=1)
    lows, highs = [low], [high]
    while len(lows[0]) > 1:
        lows.insert(0, lows[0].reshape(-1, 2, 3).min(axis=1))
        highs.insert(0, highs[0].reshape(-1, 2, 3).max(axis=1))
    return Tree(tuple(lows), tuple(highs), padded)


def nearest_hits(
    tree: Tree, corners: NDArray[np.float64], origins: NDArray[np.float64], directions: NDArray[np.float64]
) -> NDArray[np.int64]:
    """The triangle (n,) met first by each ray, -1 where none is met."""
    found = np.full(len(origins), -1, dtype=np.int64)
    for first in range(0, len(origins), RAYS_AT_ONCE):
        run = slice(first, first + RAYS_AT_ONCE)
        ray, triangle = _candidates(tree, origins[run], directions[run])
        distance = _distances(corners[triangle], origins[run][ray], directions[run][ray])
        met = np.flatnonzero(np.isfinite(distance))
        met = met[np.lexsort((distance[met], ray[met]))]
        rays, nearest = np.unique(ray[met], return_index=True)
        found[first + rays] = triangle[met[nearest]]
    return found


def _candidates(
    tree: Tree, origins: NDArray[np.float64], directions: NDArray[np.float64]
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Pairs of a ray and a triangle in a leaf whose box the ray passes."""
    inverse = 1.0 / np.where(directions == 0, NO_ADVANCE, directions)
    ray: NDArray[np.int64] = np.arange(len(origins))
    node: NDArray[np.int64] = np.zeros(len(origins), dtype=np.int64)
    for level, (low, high) in enumerate(zip(tree.low, tree.high, strict=True)):
        if level:
            ray, node = np.repeat(ray, 2), (node[:, None] * 2 + np.array([0, 1])).ravel()
        passed = _passes(low[node], high[node], origins[ray], inverse[ray])
        ray, node = ray[passed], node[passed]
    triangle = tree.order[node[:, None] * LEAF + np.arange(LEAF)]
    ray = np.repeat(ray, LEAF)
    there = triangle.ravel() >= 0
    return ray[there], triangle.ravel()[there]


def _passes(
    low: NDArray[np.float64], high: NDArray[np.float64], origin: NDArray[np.float64], inverse: NDArray[np.float64]
) -> NDArray[np.bool_]:
    """The slab test of a box against the ray."""
    a, b = (low - origin) * inverse, (high - origin) * inverse
    near, far = np.minimum(a, b), np.maximum(a, b)
    nearest = np.maximum(np.maximum(near[:, 0], near[:, 1]), near[:, 2])
    farthest = np.minimum(np.minimum(far[:, 0], far[:, 1]), far[:, 2])
    return np.asarray((farthest >= 0) & (farthest * (1.0 + 1e-12) >= nearest))


def _distances(
    corners: NDArray[np.float64], origins: NDArray[np.float64], directions: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Distance (p,) along each ray to its triangle, infinite where it is not met (Möller and Trumbore, 1997)."""
    side, other = corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]
    across = np.cross(directions, other)
    determinant = np.einsum("ij,ij->i", side, across)
    with np.errstate(divide="ignore", invalid="ignore"):
        inverse = 1.0 / determinant
        away = origins - corners[:, 0]
        u = np.einsum("ij,ij->i", away, across) * inverse
        turned = np.cross(away, side)
        v = np.einsum("ij,ij->i", directions, turned) * inverse
        distance = np.einsum("ij,ij->i", other, turned) * inverse
        met = (u >= -INSIDE) & (v >= -INSIDE) & (u + v <= 1 + INSIDE) & (distance > 0)
    return np.where(met & (determinant != 0), distance, np.inf)
