"""Grids over polygons: which cells an outline cuts, and which lie wholly inside, for all surfaces at once."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from insol.faces.grouping import Flags, Floats, Ints, spread_out

ON_THE_LINE_M = 2e-7
"""An outline this close to a grid line runs along it [m]: rounding, and no area to speak of."""

SAME_COUNT = 1e-6
"""An extent longer than a whole number of spacings by this share of one is still divided into that many."""

SAME_COVER = 1e-7
"""Squares of the spacing may leave so small a share of one uncovered at the far border."""


@dataclass(frozen=True)
class Grids:
    """A grid over each surface, from (0, 0) to the right and up the slope.

    Cells are numbered through all surfaces, column by column; above each column one number stays free.

    Attributes
    ----------
    columns, rows : (s,), how many
    width, height : (s,), of a cell [m]
    first : (s,), the number of the cell at (0, 0)
    """

    columns: Ints
    rows: Ints
    width: Floats
    height: Floats
    first: Ints

    @property
    def size(self) -> int:
        """How many numbers the cells of all surfaces take."""
        return int((self.columns * (self.rows + 1)).sum())

    def cell(self, surface: Ints, column: Ints, row: Ints) -> Ints:
        """The numbers of cells."""
        return self.first[surface] + column * (self.rows[surface] + 1) + row

    def place(self, cell: Ints) -> tuple[Ints, Ints, Ints]:
        """Surface, column and row of cells."""
        surface = np.searchsorted(self.first, cell, side="right") - 1
        column, row = np.divmod(cell - self.first[surface], self.rows[surface] + 1)
        return surface, column, row

    def bounds(self, cell: Ints) -> Floats:
        """Left, lower, right and upper border (n, 4) of cells in their surface's plane [m]."""
        surface, column, row = self.place(cell)
        width, height = self.width[surface], self.height[surface]
        return np.stack([column * width, row * height, (column + 1) * width, (row + 1) * height], axis=-1)


def grids(columns: Ints, rows: Ints, width: Floats, height: Floats) -> Grids:
    """Grids of so many cells of such size."""
    size = columns * (rows + 1)
    return Grids(columns, rows, width, height, np.cumsum(size) - size)


def even_grids(extents: Floats, spacing_m: float) -> Grids:
    """Grids that divide each extent (s, 2) [m] evenly into cells no larger than the spacing."""
    counts = cell_counts(extents, spacing_m, SAME_COUNT)
    size = extents / counts
    return grids(counts[:, 0], counts[:, 1], size[:, 0], size[:, 1])


def square_grids(extents: Floats, spacing_m: float) -> Grids:
    """Grids of squares of the spacing that cover each extent (s, 2) [m]."""
    counts = cell_counts(extents, spacing_m, SAME_COVER)
    size = np.full(len(extents), spacing_m)
    return grids(counts[:, 0], counts[:, 1], size, size)


def cell_counts(extents: Floats, spacing_m: float, spare: float) -> Ints:
    """How many spacings (s, 2) cover each extent (s, 2) [m], a `spare` share of one left out of account."""
    return np.maximum(np.ceil(extents / spacing_m - spare), 1.0).astype(np.int64)


def cells_in_outlines(start: Floats, end: Floats, surface: Ints, layout: Grids) -> tuple[Ints, Ints]:
    """The cells wholly inside an outline, and those that an outline cuts, both ascending.

    Parameters
    ----------
    start, end : (e, 2), edges of all outlines, the inside at their left [m]
    surface : (e,), whose edge it is
    """
    cut = np.zeros(layout.size, dtype=bool)
    cut[cut_cells(start, end, surface, layout)] = True
    inside = centres_inside(start, end, surface, layout)
    return np.flatnonzero(inside & ~cut), np.flatnonzero(cut)


def cut_cells(start: Floats, end: Floats, surface: Ints, layout: Grids) -> Ints:
    """The cells through whose inner part an edge runs; some more than once."""
    width, height = layout.width[surface], layout.height[surface]
    low, high = np.minimum(start, end), np.maximum(start, end)
    first, count = cells_between(low[:, 0], high[:, 0], width, layout.columns[surface])
    column, edge = spread_out(first, count)
    start, end, surface, width, height = start[edge], end[edge], surface[edge], width[edge], height[edge]
    left = np.maximum(low[edge, 0], column * width + ON_THE_LINE_M)
    right = np.minimum(high[edge, 0], (column + 1) * width - ON_THE_LINE_M)
    at_left, at_right = height_at(start, end, left), height_at(start, end, right)
    # An edge that runs straight up has one place across and passes all its heights there.
    upright = start[:, 0] == end[:, 0]
    lower = np.where(upright, low[edge, 1], np.minimum(at_left, at_right))
    upper = np.where(upright, high[edge, 1], np.maximum(at_left, at_right))
    first, count = cells_between(lower, upper, height, layout.rows[surface])
    row, piece = spread_out(first, count)
    return layout.cell(surface[piece], column[piece], row)


def cells_between(low: Floats, high: Floats, size: Floats, most: Ints) -> tuple[Ints, Ints]:
    """The first cell along one axis that reaches between low and high, and how many do."""
    first = np.maximum(np.floor((low + ON_THE_LINE_M) / size), 0.0).astype(np.int64)
    last = np.minimum(np.ceil((high - ON_THE_LINE_M) / size).astype(np.int64), most)
    return first, np.maximum(last - first, 0)


def height_at(start: Floats, end: Floats, across: Floats) -> Floats:
    """Where edges pass a line across [m]."""
    run = end[:, 0] - start[:, 0]
    share = np.divide(across - start[:, 0], run, out=np.zeros_like(run), where=run != 0.0)
    return start[:, 1] + np.clip(share, 0.0, 1.0) * (end[:, 1] - start[:, 1])


def centres_inside(start: Floats, end: Floats, surface: Ints, layout: Grids) -> Flags:
    """Whether each cell's centre lies inside the outline, by the number of turns around it."""
    width, height = layout.width[surface], layout.height[surface]
    low, high = np.minimum(start[:, 0], end[:, 0]), np.maximum(start[:, 0], end[:, 0])
    first = np.ceil(low / width - 0.5).astype(np.int64)
    count = np.ceil(high / width - 0.5).astype(np.int64) - first
    column, edge = spread_out(first, count)
    crossing = height_at(start[edge], end[edge], (column + 0.5) * width[edge])
    row = np.floor(crossing / height[edge] + 0.5).astype(np.int64)
    row = np.clip(row, 0, layout.rows[surface[edge]])
    # An edge to the right has the inside above it, from its row up; one to the left ends it.
    turn = np.where(end[edge, 0] > start[edge, 0], 1.0, -1.0)
    cell = layout.cell(surface[edge], column, row)
    return np.cumsum(np.bincount(cell, turn, minlength=layout.size)) > 0.5
