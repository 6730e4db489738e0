"""A point well inside a piece: its centroid where that serves, else the middle of its widest place."""

from __future__ import annotations

import numpy as np
import shapely

from insol.faces.frames import Polygons
from insol.faces.grouping import Flags, Floats, Ints, run_starts

WELL_INSIDE = 0.1
"""A centroid of a piece that bends inward serves when its distance from the border is this share of the
square root of the area."""

WIDEST_PLACE = 0.1
"""The widest place is found to this share of area by length of the border, than which no radius is smaller."""


def points_well_inside(shapes: Polygons, convex: Flags) -> Floats:
    """Points (n, 2) inside polygons (n,), of which some are convex; never on their border."""
    centroids = shapely.centroid(shapes)
    points: Floats = shapely.get_coordinates(centroids)
    doubtful = np.flatnonzero(~convex)
    if not len(doubtful):
        return points
    odd, middle, size = shapes[doubtful], centroids[doubtful], np.sqrt(shapely.area(shapes[doubtful]))
    room = shapely.distance(shapely.boundary(odd), middle)
    bad = ~(shapely.contains(odd, middle) & (room >= WELL_INSIDE * size))
    for index in doubtful[bad]:
        points[index] = widest_place(shapes[index])
    return points


def widest_place(shape: shapely.Polygon) -> Floats:
    """The centre (2,) of the largest circle in a polygon."""
    radius = shapely.maximum_inscribed_circle(shape, tolerance=WIDEST_PLACE * shape.area / shape.length)
    centre = shapely.Point(shapely.get_coordinates(radius)[0]) if not radius.is_empty else shapely.Point()
    if not shapely.contains_properly(shape, centre):
        centre = shapely.point_on_surface(shape)
    return np.array(centre.coords[0])


def are_convex(shapes: Polygons) -> Flags:
    """Whether polygons (n,), counter-clockwise, have no hole and turn left at every corner."""
    outer = shapely.get_exterior_ring(shapes)
    points, owner = shapely.get_coordinates(outer, return_index=True)
    if not len(points):
        return np.zeros(len(shapes), dtype=bool)
    last = np.append(run_starts(owner)[1:], len(owner)) - 1
    kept = np.ones(len(points), dtype=bool)
    kept[last] = False  # the closing point repeats the first
    points, owner = points[kept], owner[kept]
    before, after = ring_neighbours(points, run_starts(owner))
    arm, next_arm = points - before, after - points
    turn = arm[:, 0] * next_arm[:, 1] - arm[:, 1] * next_arm[:, 0]
    size = np.linalg.norm(arm, axis=1) * np.linalg.norm(next_arm, axis=1)
    bends_in: Flags = np.zeros(len(shapes), dtype=bool)
    bends_in[owner[turn < -1e-12 * size]] = True
    convex: Flags = ~bends_in & (shapely.get_num_interior_rings(shapes) == 0)
    return convex


def ring_neighbours(points: Floats, starts: Ints) -> tuple[Floats, Floats]:
    """The points before and after each on its ring; rings begin at `starts` and do not repeat their first."""
    ends = np.append(starts[1:], len(points)) - 1
    before, after = np.roll(points, 1, axis=0), np.roll(points, -1, axis=0)
    before[starts] = points[ends]
    after[ends] = points[starts]
    return before, after
