"""Parallel rays in numpy: seen along the rays, the scene is flat, and a ray is a point in the plane.

The triangles are turned into a frame whose third axis runs along the rays and sorted into a grid of
cells in the plane across them. A point is tested against its own cell's triangles only: is it
inside, and is the triangle before it?

An edge shared by two triangles gives both the same three numbers, from its vertices in one order,
so that no point can fall between them.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

TRIANGLES_A_CELL = 1.0
"""Cells are as many as triangles divided by this: more tests against more sorting."""

MOST_CELLS_A_SIDE = 512

EDGE_ON = 1e-12
"""A triangle whose shadow is smaller than this share of its longest side squared is seen edge-on."""


@dataclass(frozen=True)
class Flat:
    """Triangles seen along the rays.

    Attributes
    ----------
    edges : (t, 9) float64, of each side a, b, c of a·u + b·v + c, not below zero inside
    depth : (t, 3) float64, of the depth along the rays as a·u + b·v + c
    low, high : (t, 2) float64, bounding box in the plane
    farthest : (t,) float64, the depth of its farthest corner along the rays
    """

    edges: NDArray[np.float64]
    depth: NDArray[np.float64]
    low: NDArray[np.float64]
    high: NDArray[np.float64]
    farthest: NDArray[np.float64]


def blocked_along(
    corners: NDArray[np.float64],
    triangles: NDArray[np.int32],
    balls: NDArray[np.float64],
    origins: NDArray[np.float64],
    direction: NDArray[np.float64],
) -> NDArray[np.bool_]:
    """Whether a triangle stands in one direction from each origin.

    Parameters
    ----------
    corners : (t, 3, 3) float64 [m]
    triangles : (t, 3) int32, vertex numbers: they say in which order an edge is taken
    balls : (t, 4) float64 [m], of `bounding_balls`: they tell quickly which triangles can matter
    origins : (n, 3) float64 [m]
    direction : (3,) float64, unit
    """
    frame = frame_along(direction)
    points = origins @ frame.T
    low, high = points[:, :2].min(axis=0), points[:, :2].max(axis=0)
    u, v, w = frame @ balls[:, :3].T
    radius = balls[:, 3]
    near = w + radius > points[:, 2].min()
    near &= (u + radius >= low[0]) & (u - radius <= high[0]) & (v + radius >= low[1]) & (v - radius <= high[1])
    near = np.flatnonzero(near)
    flat = flattened(corners[near] @ frame.T, triangles[near])
    blocked = np.zeros(len(points), dtype=bool)
    if len(flat.low):
        _test_cells(flat, points, low, high, blocked)
    return blocked


def bounding_balls(corners: NDArray[np.float64]) -> NDArray[np.float64]:
    """Centre and radius (t, 4) of a ball around each triangle (t, 3, 3)."""
    centre = (corners.min(axis=1) + corners.max(axis=1)) / 2.0
    radius = np.linalg.norm(corners - centre[:, None], axis=2).max(axis=1)
    return np.column_stack([centre, radius * (1.0 + 1e-9)])


def frame_along(direction: NDArray[np.float64]) -> NDArray[np.float64]:
    """Rows u, v, w of an orthonormal frame (3, 3) with w along the direction."""
    w = direction / np.linalg.norm(direction)
    helper = np.array([0.0, 0.0, 1.0]) if abs(w[2]) < 0.9 else np.array([1.0, 0.0, 0.0])
    u = np.cross(helper, w)
    u /= np.linalg.norm(u)
    return np.stack([u, np.cross(w, u), w])


def flattened(seen: NDArray[np.float64], triangles: NDArray[np.int32]) -> Flat:
    """The sides and depths of triangles (t, 3, 3) given in the rays' frame; those seen edge-on left out."""
    plane = seen[..., :2]
    side = np.roll(plane, -1, axis=1) - plane
    twice = side[:, 0, 0] * side[:, 1, 1] - side[:, 0, 1] * side[:, 1, 0]
    kept = np.abs(twice) > EDGE_ON * (side**2).sum(axis=2).max(axis=1)
    seen, plane, twice, triangles = seen[kept], plane[kept], twice[kept], triangles[kept]
    edges = _edge_forms(plane, triangles, np.sign(twice))
    return Flat(
        edges.reshape(-1, 9), _depth_forms(seen, twice), plane.min(axis=1), plane.max(axis=1), seen[..., 2].max(axis=1)
    )


def _edge_forms(
    plane: NDArray[np.float64], triangles: NDArray[np.int32], turn: NDArray[np.float64]
) -> NDArray[np.float64]:
    """(t, 3, 3): a, b, c of each side, from its vertices in the order of their numbers."""
    following, after = np.roll(plane, -1, axis=1), np.roll(triangles, -1, axis=1)
    swap = triangles > after
    start = np.where(swap[..., None], following, plane)
    end = np.where(swap[..., None], plane, following)
    a, b = start[..., 1] - end[..., 1], end[..., 0] - start[..., 0]
    c = -(a * start[..., 0] + b * start[..., 1])
    return np.stack([a, b, c], axis=2) * (turn[:, None] * np.where(swap, -1.0, 1.0))[..., None]


def _depth_forms(seen: NDArray[np.float64], twice: NDArray[np.float64]) -> NDArray[np.float64]:
    """(t, 3): a, b, c of the depth of each triangle's plane."""
    p, q, r = seen[:, 0], seen[:, 1] - seen[:, 0], seen[:, 2] - seen[:, 0]
    a = (q[:, 2] * r[:, 1] - r[:, 2] * q[:, 1]) / twice
    b = (q[:, 0] * r[:, 2] - r[:, 0] * q[:, 2]) / twice
    return np.stack([a, b, p[:, 2] - a * p[:, 0] - b * p[:, 1]], axis=1)


def _test_cells(
    flat: Flat,
    points: NDArray[np.float64],
    low: NDArray[np.float64],
    high: NDArray[np.float64],
    blocked: NDArray[np.bool_],
) -> None:
    """Test every point against the triangles of its cell; fills `blocked`.

    A cell's triangles come with the farthest along the rays first. In each round every point still
    open is tested against its cell's next one, and leaves once it is hit or no triangle is left
    that reaches beyond it.
    """
    across = np.maximum(high - low, 1e-9)
    per_metre = np.sqrt(len(flat.low) / TRIANGLES_A_CELL / across.prod())
    shape = np.clip(np.ceil(across * per_metre), 1, MOST_CELLS_A_SIDE).astype(np.int64)
    size = across / shape
    start, members = _cells(flat, low, size, shape)
    place = np.minimum(((points[:, :2] - low) / size).astype(np.int64), shape - 1)
    cell = place[:, 0] * shape[1] + place[:, 1]
    active, following, end = np.arange(len(points)), start[cell], start[cell + 1]
    while len(active):
        left = end > following
        active, following, end = active[left], following[left], end[left]
        triangle = members[following]
        left = flat.farthest[triangle] > points[active, 2]
        active, following, end, triangle = active[left], following[left], end[left], triangle[left]
        hit = _hits(flat, triangle, points[active])
        blocked[active[hit]] = True
        active, following, end = active[~hit], following[~hit] + 1, end[~hit]


def _cells(
    flat: Flat, low: NDArray[np.float64], size: NDArray[np.float64], shape: NDArray[np.int64]
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Start of each cell's run in `members`, and the triangles whose box touches the cell, farthest first."""
    first = np.clip(np.floor((flat.low - low) / size), 0, shape - 1).astype(np.int64)
    last = np.clip(np.floor((flat.high - low) / size), 0, shape - 1).astype(np.int64)
    span = last - first + 1
    count = span.prod(axis=1)
    triangle = np.repeat(np.arange(len(count)), count)
    nth = np.arange(len(triangle)) - np.repeat(np.cumsum(count) - count, count)
    column = first[triangle, 0] + nth // span[triangle, 1]
    row = first[triangle, 1] + nth % span[triangle, 1]
    cell = column * shape[1] + row
    order = np.lexsort((-flat.farthest[triangle], cell))
    start = np.searchsorted(cell[order], np.arange(int(shape.prod()) + 1))
    return start, triangle[order]


def _hits(flat: Flat, triangle: NDArray[np.int64], points: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Whether each point's ray meets its triangle."""
    u, v, w = points.T
    depth = flat.depth[triangle]
    hit = depth[:, 0] * u + depth[:, 1] * v + depth[:, 2] > w
    # The depth alone rules out many; the sides are looked at for the rest.
    before = np.flatnonzero(hit)
    u, v, edges = u[before], v[before], flat.edges[triangle[before]]
    inside = edges[:, 0] * u + edges[:, 1] * v + edges[:, 2] >= 0
    inside &= edges[:, 3] * u + edges[:, 4] * v + edges[:, 5] >= 0
    inside &= edges[:, 6] * u + edges[:, 7] * v + edges[:, 8] >= 0
    hit[before] = inside
    return hit
