"""Polygons clipped by the cells of their grid."""

from __future__ import annotations

import numpy as np
import shapely

from insol.conventions import DEGENERATE_M2
from insol.faces.frames import Polygons
from insol.faces.grid import Grids
from insol.faces.grouping import Flags, Floats, Ints, run_starts, spread_out
from insol.faces.inside import are_convex
from insol.faces.uniting import polygon_parts


def cut_cells_of(polygons: Polygons, layout: Grids, crossed: Ints) -> tuple[Polygons, Ints]:
    """What the polygons leave of the cells that they cut, in pieces that hold together, and their cells, ascending."""
    surface, _, _ = layout.place(crossed)
    alone = (layout.columns * layout.rows)[surface] == 1
    convex = ~alone & are_convex(polygons)[surface]
    other = ~alone & ~convex
    cut = shapely.intersection(polygons[surface[other]], shapely.box(*layout.bounds(crossed[other]).T))
    pieces, index = polygon_parts(cut)
    pieces = shapely.orient_polygons(pieces)
    clipped, kept = clipped_convex(polygons, surface[convex], layout.bounds(crossed[convex]))
    found = np.concatenate([polygons[surface[alone]], pieces, clipped])
    cell = np.concatenate([crossed[alone], crossed[other][index], crossed[convex][kept]])
    real = alone[np.searchsorted(crossed, cell)] | (shapely.area(found) > DEGENERATE_M2)
    order = np.flatnonzero(real)[np.argsort(cell[real], kind="stable")]
    return found[order], cell[order]


def clipped_convex(polygons: Polygons, surface: Ints, bounds: Floats) -> tuple[Polygons, Ints]:
    """Convex polygons, one for each box (n, 4), clipped by it; those left, and the box of each.

    References
    ----------
    I. Sutherland, G. Hodgman: Reentrant polygon clipping. Communications of the ACM 17 (1974), 32-42.
    """
    points, owner = corners_of(polygons, surface)
    for side in range(4):
        axis = side % 2
        line = bounds[owner, side]
        within = points[:, axis] - line if side < 2 else line - points[:, axis]
        points, owner = clipped_by_line(points, owner, within, axis, bounds[:, side])
    starts = run_starts(owner)
    enough = np.diff(starts, append=len(owner)) >= 3
    box = owner[starts][enough]
    kept = np.isin(owner, box)
    if not len(box):
        return np.zeros(0, dtype=object), box
    rings = shapely.linearrings(points[kept], indices=np.searchsorted(box, owner[kept]))
    return shapely.polygons(rings), box


def corners_of(polygons: Polygons, chosen: Ints) -> tuple[Floats, Ints]:
    """The corners of chosen polygons, again for each time one is chosen, and which of the choices each belongs to."""
    rings = shapely.get_exterior_ring(polygons)
    points = shapely.get_coordinates(rings)
    length = shapely.get_num_coordinates(rings)
    first = np.cumsum(length) - length
    index, owner = spread_out(first[chosen], length[chosen] - 1)  # the last repeats the first
    return points[index], owner


def clipped_by_line(points: Floats, owner: Ints, within: Floats, axis: int, lines: Floats) -> tuple[Floats, Ints]:
    """Rings after the points with `within` below 0 were cut off along a line across the axis.

    Parameters
    ----------
    points, owner : corners (m, 2) of all rings, one ring after another, and the ring of each
    within : (m,), how far each lies inside the line [m]
    lines : where the line of each ring stands on the axis [m]
    """
    if not len(points):
        return points, owner
    following = np.arange(1, len(points) + 1)
    starts = run_starts(owner)
    following[np.append(starts[1:], len(points)) - 1] = starts
    inside: Flags = within >= 0.0
    crossing = inside != inside[following]
    count = inside.astype(np.int64) + crossing
    place = np.cumsum(count) - count
    result = np.empty((int(count.sum()), 2))
    result[place[inside]] = points[inside]
    at = np.flatnonzero(crossing)
    share = within[at] / (within[at] - within[following[at]])
    met = points[at] + (points[following[at]] - points[at]) * share[:, None]
    met[:, axis] = lines[owner[at]]  # to the last digit, so that neighbours share their border
    result[place[at] + inside[at]] = met
    return result, np.repeat(owner, count)
