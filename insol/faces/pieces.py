"""Polygons cut by their grids into pieces: each with its area, a point well inside it, triangles to draw it."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import shapely

from insol.faces.clipping import cut_cells_of
from insol.faces.drawing import drawn_cells, drawn_polygons
from insol.faces.frames import Polygons, edges_of
from insol.faces.grid import Grids, cells_in_outlines, grids
from insol.faces.grouping import Floats, Ints, run_starts
from insol.faces.inside import are_convex, points_well_inside
from insol.faces.slivers import without_slivers

CELLS_AT_ONCE = 2_000_000
"""So many cells are laid out at once, to bound the memory taken."""


@dataclass(frozen=True)
class Pieces:
    """Pieces of polygons, ordered by polygon, then from the lowest row up, then left to right.

    Attributes
    ----------
    surface : (n,), the polygon of each
    areas : (n,) [m²]
    points : (n, 2), in the polygon's plane [m]
    triangles : (m, 3, 2), counter-clockwise, in the polygon's plane [m]
    drawn : (m,), the piece that a triangle draws, ascending
    """

    surface: Ints
    areas: Floats
    points: Floats
    triangles: Floats
    drawn: Ints


def cut(polygons: Polygons, layout: Grids) -> Pieces:
    """Cut polygons (s,), whose lower left corners are at (0, 0), by their grids."""
    size = layout.columns * (layout.rows + 1)
    starts = run_starts(np.cumsum(size) // CELLS_AT_ONCE).tolist()
    done: list[Pieces] = []
    for first, last in pairwise([*starts, len(size)]):
        some = slice(first, last)
        part = grids(layout.columns[some], layout.rows[some], layout.width[some], layout.height[some])
        done.append(cut_at_once(polygons[some], part, first))
    return chained_pieces(done)


def cut_at_once(polygons: Polygons, layout: Grids, first_surface: int) -> Pieces:
    """Cut polygons that are few enough to be cut in one go."""
    start, end, owner = edges_of(polygons)
    whole, crossed = cells_in_outlines(start, end, owner, layout)
    shapes, cell = cut_cells_of(polygons, layout, crossed)
    shapes, cell, whole = without_slivers(shapes, cell, whole, layout)
    bounds = layout.bounds(whole)
    centres = (bounds[:, :2] + bounds[:, 2:]) / 2.0
    convex = are_convex(shapes)
    points = np.concatenate([centres, points_well_inside(shapes, convex)])
    surface, column, row = layout.place(np.concatenate([whole, cell]))
    order = np.lexsort((points[:, 1], points[:, 0], column, row, surface))
    drawn, drawn_shape = drawn_polygons(shapes, convex)
    drawing, piece = in_order(drawn_cells(bounds), drawn, drawn_shape + len(whole), order)
    areas = np.concatenate([np.prod(bounds[:, 2:] - bounds[:, :2], axis=1), shapely.area(shapes)])
    return Pieces(surface[order] + first_surface, areas[order], points[order], drawing, piece)


def in_order(cells: Floats, shapes: Floats, shape_piece: Ints, order: Ints) -> tuple[Floats, Ints]:
    """All triangles, ordered as their pieces are, and the place of the piece that each draws."""
    rank = np.empty(len(order), dtype=np.int64)
    rank[order] = np.arange(len(order))
    piece = rank[np.concatenate([np.repeat(np.arange(len(cells) // 2), 2), shape_piece])]
    drawn = np.argsort(piece, kind="stable")
    return np.concatenate([cells, shapes])[drawn], piece[drawn]


def chained_pieces(done: list[Pieces]) -> Pieces:
    """Batches of pieces, one after another."""
    before = np.cumsum([0] + [len(pieces.surface) for pieces in done])
    return Pieces(
        np.concatenate([np.zeros(0, dtype=np.int64), *(pieces.surface for pieces in done)]),
        np.concatenate([np.zeros(0), *(pieces.areas for pieces in done)]),
        np.concatenate([np.zeros((0, 2)), *(pieces.points for pieces in done)]),
        np.concatenate([np.zeros((0, 3, 2)), *(pieces.triangles for pieces in done)]),
        np.concatenate(
            [np.zeros(0, dtype=np.int64), *(pieces.drawn + n for pieces, n in zip(done, before, strict=False))]
        ),
    )
