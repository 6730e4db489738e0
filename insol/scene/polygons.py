"""Polygons cut into triangles: a fan where convex, ears where not."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray


def triangulated(
    vertices: NDArray[np.float64], corners: NDArray[np.int64], counts: NDArray[np.integer]
) -> tuple[NDArray[np.int32], NDArray[np.int32]]:
    """Triangles of polygons, in the polygons' order.

    Parameters
    ----------
    vertices : (v, 3) float64
    corners : indices of vertices, of one polygon after another
    counts : (p,) corners of each polygon, 3 or more

    Returns
    -------
    triangles : (t, 3) int32
    polygon : (t,) int32, the polygon of each
    """
    starts = np.cumsum(counts) - counts
    triangles, polygons = [], []
    for size in np.unique(counts):
        chosen = np.flatnonzero(counts == size)
        rings = corners[starts[chosen][:, None] + np.arange(size)]
        fan = np.stack(
            [np.stack([rings[:, 0], rings[:, k], rings[:, k + 1]], axis=1) for k in range(1, size - 1)], axis=1
        )
        concave = np.zeros(len(chosen), dtype=bool) if size == 3 else _repeats(rings) | ~convex(vertices[rings])
        triangles.append(fan[~concave].reshape(-1, 3))
        polygons.append(np.repeat(chosen[~concave], size - 2))
        for polygon, ring in zip(chosen[concave], rings[concave], strict=True):
            ring = _once_round(ring)
            ears = ring[_ears(vertices[ring])]
            triangles.append(ears)
            polygons.append(np.full(len(ears), polygon))
    polygon = np.concatenate(polygons)
    order = np.argsort(polygon, kind="stable")
    return np.concatenate(triangles)[order].astype(np.int32), polygon[order].astype(np.int32)


def newell_normals(rings: NDArray[np.float64]) -> NDArray[np.float64]:
    """Normals (p, 3) of rings (p, k, 3), not of unit length: Newell's sum, right for concave ones too."""
    following = np.roll(rings, -1, axis=1)
    return np.cross(rings, following).sum(axis=1)


def convex(rings: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Whether each ring (p, k, 3) turns the same way at every corner and goes round once."""
    local = rings - rings[:, :1]
    normals = newell_normals(local)
    edges = np.roll(local, -1, axis=1) - local
    turns = np.einsum("pkc,pc->pk", np.cross(np.roll(edges, 1, axis=1), edges), normals)
    scale = np.einsum("pc,pc->p", normals, normals)
    # A fan from the first corner is right when every triangle of it turns the same way.
    fans = np.cross(local[:, 1:-1], local[:, 2:])
    forward = np.einsum("pkc,pc->pk", fans, normals) >= -1e-12 * scale[:, None]
    return np.asarray((turns >= -1e-12 * scale[:, None]).all(axis=1) & forward.all(axis=1))


def _repeats(rings: NDArray[np.int64]) -> NDArray[np.bool_]:
    """Whether each ring (p, k) visits a vertex twice."""
    ordered = np.sort(rings, axis=1)
    return np.asarray((ordered[:, 1:] == ordered[:, :-1]).any(axis=1))


def _once_round(ring: NDArray[np.int64]) -> NDArray[np.int64]:
    """A ring that goes round the same corners several times, taken once."""
    different = len(np.unique(ring))
    if len(ring) % different == 0 and (ring == np.tile(ring[:different], len(ring) // different)).all():
        return ring[:different]
    return ring


def _ears(ring: NDArray[np.float64]) -> NDArray[np.int64]:
    """Triangles (t, 3) of one ring (k, 3), wound as it is."""
    import mapbox_earcut

    local = ring - ring[0]
    normal = newell_normals(local[None])[0]
    axis = int(np.abs(normal).argmax())
    flat = np.delete(local, axis, axis=1)
    found = mapbox_earcut.triangulate_float64(flat, np.array([len(ring)], dtype=np.uint32))
    ears: NDArray[np.int64] = found.reshape(-1, 3).astype(np.int64)
    corners = local[ears]
    facing = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]) @ normal
    ears[facing < 0] = ears[facing < 0][:, ::-1]
    return ears
