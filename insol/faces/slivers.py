"""Slivers: pieces of cells too small to stand for anything, given to the largest neighbour they touch."""

from __future__ import annotations

import numpy as np
import shapely

from insol.faces.frames import Polygons
from insol.faces.grid import Grids
from insol.faces.grouping import Ints, largest_of_each, run_starts, spread_out

SLIVER_SHARE = 0.02
"""A piece smaller than this share of its cell is a sliver."""

TOUCHING_M = 1e-6
"""Pieces that share less border than this only meet at a corner [m]."""


def without_slivers(shapes: Polygons, cell: Ints, whole: Ints, layout: Grids) -> tuple[Polygons, Ints, Ints]:
    """Pieces, their cells, and the cells left whole, after slivers went to the largest neighbour that is none.

    A sliver among slivers stays: were it passed on from one to the next, a face could grow along a narrow
    strip far beyond the spacing.

    Parameters
    ----------
    shapes : (k,), pieces of cells
    cell : (k,), the cell of each
    whole : cells that are not cut
    """
    surface, _, _ = layout.place(cell)
    areas = shapely.area(shapes)
    sliver = areas < SLIVER_SHARE * layout.width[surface] * layout.height[surface]
    small = np.flatnonzero(sliver)
    if not len(small):
        return shapes, cell, whole
    # Things that may take a sliver: pieces first, then whole cells.
    takers = np.concatenate([np.flatnonzero(~sliver), len(shapes) + np.arange(len(whole))])
    all_cells = np.concatenate([cell, whole])
    pair_small, pair_taker = neighbours(small, takers, all_cells, layout)
    taker_shapes = shapes_of(pair_taker, shapes, whole, layout)
    border = shapely.length(shapely.intersection(shapes[pair_small], taker_shapes))
    touching = border > TOUCHING_M
    given, pair = largest_of_each(pair_small[touching], shapely.area(taker_shapes[touching]))
    return united(shapes, cell, whole, layout, given, pair_taker[touching][pair])


def neighbours(small: Ints, takers: Ints, all_cells: Ints, layout: Grids) -> tuple[Ints, Ints]:
    """Pairs of a sliver and a thing in the same cell or one beside, above or below it."""
    takers = takers[np.argsort(all_cells[takers], kind="stable")]
    surface, _, _ = layout.place(all_cells[small])
    step = layout.rows[surface] + 1
    beside = all_cells[small][:, None] + np.stack([0 * step, -step, step, 0 * step - 1, 0 * step + 1], axis=-1)
    first = np.searchsorted(all_cells[takers], beside.reshape(-1))
    last = np.searchsorted(all_cells[takers], beside.reshape(-1), side="right")
    place, query = spread_out(first, last - first)
    pair_small, pair_taker = np.repeat(small, 5)[query], takers[place]
    owner, _, _ = layout.place(all_cells[pair_taker])
    same = owner == np.repeat(surface, 5)[query]
    return pair_small[same], pair_taker[same]


def shapes_of(things: Ints, shapes: Polygons, whole: Ints, layout: Grids) -> Polygons:
    """The polygons of things that are pieces, or whole cells where their number is beyond the pieces."""
    found = np.empty(len(things), dtype=object)
    is_cell = things >= len(shapes)
    found[~is_cell] = shapes[things[~is_cell]]
    found[is_cell] = shapely.box(*layout.bounds(whole[things[is_cell] - len(shapes)]).T)
    return found


def united(
    shapes: Polygons, cell: Ints, whole: Ints, layout: Grids, given: Ints, taker: Ints
) -> tuple[Polygons, Ints, Ints]:
    """Unite each sliver that is given away with its taker, where that makes one polygon."""
    order = np.lexsort((given, taker))
    given, taker = given[order], taker[order]
    starts = run_starts(taker)
    receivers = taker[starts]
    base = shapes_of(receivers, shapes, whole, layout)
    groups = np.split(given, starts[1:]) if len(starts) else []
    unions = np.array([shapely.union_all([one, *shapes[group]]) for one, group in zip(base, groups, strict=True)])
    good = shapely.get_type_id(unions) == shapely.GeometryType.POLYGON if len(unions) else np.zeros(0, dtype=bool)
    receivers, unions = receivers[good], unions[good]
    gone = np.zeros(len(shapes) + len(whole), dtype=bool)
    gone[receivers] = True
    gone[given[np.isin(taker, receivers)]] = True
    left = ~gone[: len(shapes)]
    all_cells = np.concatenate([cell, whole])
    together = np.concatenate([shapes[left], shapely.orient_polygons(unions)])
    return together, np.concatenate([cell[left], all_cells[receivers]]), whole[~gone[len(shapes) :]]
