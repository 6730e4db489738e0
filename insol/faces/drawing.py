"""Triangles that draw pieces."""

from __future__ import annotations

import mapbox_earcut
import numpy as np
import shapely

from insol.faces.frames import Polygons
from insol.faces.grouping import Flags, Floats, Ints, run_starts, spread_out


def drawn_cells(bounds: Floats) -> Floats:
    """Two triangles (2 n, 3, 2) for each of the boxes (n, 4)."""
    left, low, right, high = bounds.T
    corners = np.stack([left, low, right, low, right, high, left, high], axis=-1).reshape(-1, 4, 2)
    return corners[:, [0, 1, 2, 0, 2, 3]].reshape(-1, 3, 2)


def drawn_polygons(shapes: Polygons, convex: Flags) -> tuple[Floats, Ints]:
    """Triangles (m, 3, 2), counter-clockwise, that draw polygons (n,), and the polygon (m,) of each, ascending."""
    fans, fan_owner = fanned(shapes[convex])
    cut, cut_owner = ears_cut(shapes[~convex])
    owner = np.concatenate([np.flatnonzero(convex)[fan_owner], np.flatnonzero(~convex)[cut_owner]])
    order = np.argsort(owner, kind="stable")
    return np.concatenate([fans, cut])[order], owner[order]


def fanned(shapes: Polygons) -> tuple[Floats, Ints]:
    """Triangles of convex polygons, all from the first corner."""
    points, owner = shapely.get_coordinates(shapely.get_exterior_ring(shapes), return_index=True)
    starts = run_starts(owner)
    count = np.diff(starts, append=len(owner)) - 3
    second, polygon = spread_out(starts + 1, count)
    return points[np.stack([starts[polygon], second, second + 1], axis=-1)], polygon


def ears_cut(shapes: Polygons) -> tuple[Floats, Ints]:
    """Triangles of polygons that bend inward or have holes."""
    triangles = [np.zeros((0, 3, 2))]
    counts = []
    for shape in shapes:
        rings = [shapely.get_coordinates(ring)[:-1] for ring in (shape.exterior, *shape.interiors)]
        points = np.concatenate(rings)
        ends = np.cumsum([len(ring) for ring in rings]).astype(np.uint32)
        found = points[mapbox_earcut.triangulate_float64(points, ends).reshape(-1, 3)]
        triangles.append(counter_clockwise(found))
        counts.append(len(found))
    return np.concatenate(triangles), np.repeat(np.arange(len(shapes)), np.array(counts, dtype=np.int64))


def counter_clockwise(triangles: Floats) -> Floats:
    """The same triangles, turned to run counter-clockwise."""
    one, other = triangles[:, 1] - triangles[:, 0], triangles[:, 2] - triangles[:, 0]
    backward = one[:, 0] * other[:, 1] < one[:, 1] * other[:, 0]
    triangles[backward] = triangles[backward, ::-1]
    return triangles
