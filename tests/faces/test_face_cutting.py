"""The fast way of cutting equals the plain one: every cell of the grid intersected with the polygon."""

from __future__ import annotations

import numpy as np
import pytest
import shapely
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from insol.faces.clipping import clipped_convex
from insol.faces.grid import cell_counts, even_grids, grids, square_grids
from insol.faces.pieces import cut
from insol.faces.slivers import SLIVER_SHARE

ROUNDING_M2 = 1e-7  # cells have up to 2e-7 m of their border in doubt, over a metre or so


def placed(polygon):
    """A polygon with its lower left corner at (0, 0), as an array of one."""
    low = np.array(polygon.bounds[:2])
    return np.array([shapely.orient_polygons(shapely.transform(polygon, lambda xy: xy - low))])


def plain_cells(polygon, layout):
    """The area that a polygon has in each cell, by shapely, row by row."""
    columns, rows = int(layout.columns[0]), int(layout.rows[0])
    column, row = np.meshgrid(np.arange(columns), np.arange(rows))
    x, y = column * layout.width[0], row * layout.height[0]
    boxes = shapely.box(x, y, x + layout.width[0], y + layout.height[0])
    return shapely.area(shapely.intersection(boxes, polygon))


@st.composite
def polygons(draw):
    """Polygons of all sorts: stars, triangles, rectangles with holes, on a lattice or off it."""
    seed = draw(st.integers(0, 2**32 - 1))
    rng = np.random.default_rng(seed)
    kind = draw(st.sampled_from(["star", "convex", "rectilinear", "holes"]))
    if kind == "star":
        angle = np.sort(rng.uniform(0, 2 * np.pi, 9))
        radius = rng.uniform(1.0, 6.0, 9)
        star = shapely.Polygon(np.column_stack([radius * np.cos(angle), radius * np.sin(angle)]))
        return star if star.is_valid else shapely.convex_hull(star)
    if kind == "convex":
        return shapely.convex_hull(shapely.MultiPoint(rng.uniform(0, 8, (5, 2))))
    corners = rng.integers(0, 9, (5, 2)).astype(float)
    sizes = rng.integers(1, 6, (5, 2))
    union = shapely.union_all(shapely.box(*corners.T, *(corners + sizes).T))
    largest = max(shapely.get_parts(union), key=shapely.area)
    if kind == "rectilinear":
        return largest
    holes = shapely.union_all(shapely.buffer(shapely.points(rng.uniform(1, 9, (4, 2))), 0.7))
    return max(shapely.get_parts(largest.difference(holes)), key=shapely.area)


@settings(max_examples=80, deadline=None)
@given(polygons(), st.sampled_from([0.37, 0.5, 1.0, 1.9, 20.0]), st.booleans())
def test_each_cell_gets_what_a_plain_intersection_gives_it(polygon, spacing, squares):
    shape = placed(polygon)
    extents = shapely.bounds(shape)[:, 2:]
    layout = (square_grids if squares else even_grids)(extents, spacing)
    assert max(layout.width[0], layout.height[0]) <= spacing * (1 + 1e-6)
    pieces = cut(shape, layout)
    expected = plain_cells(shape[0], layout)
    np.testing.assert_allclose(pieces.areas.sum(), shapely.area(shape[0]), rtol=1e-7, atol=0)
    column = (pieces.points[:, 0] // layout.width[0]).astype(int)
    row = (pieces.points[:, 1] // layout.height[0]).astype(int)
    found = np.zeros_like(expected)
    np.add.at(found, (row, column), pieces.areas)
    cell = layout.width[0] * layout.height[0]
    # Cells near which no sliver changed hands must agree; at most a few slivers fit beside one.
    assert (np.abs(found - expected) <= 8 * SLIVER_SHARE * cell + ROUNDING_M2).all()
    whole = np.isclose(expected, cell, rtol=0, atol=ROUNDING_M2)
    assert (found[whole] >= cell - ROUNDING_M2).all()


def plain_pieces(polygon, layout):
    """All pieces of all cells, by shapely."""
    column, row = np.meshgrid(np.arange(layout.columns[0]), np.arange(layout.rows[0]))
    x, y = (column * layout.width[0]).ravel(), (row * layout.height[0]).ravel()
    cut = shapely.intersection(shapely.box(x, y, x + layout.width[0], y + layout.height[0]), polygon)
    parts = shapely.get_parts(shapely.get_parts(cut))
    return parts[shapely.area(parts) > 1e-7]


@settings(max_examples=60, deadline=None)
@given(polygons(), st.sampled_from([0.5, 1.0, 3.0]))
def test_slivers_go_to_a_neighbour_unless_there_are_only_slivers(polygon, spacing):
    shape = placed(polygon)
    layout = even_grids(shapely.bounds(shape)[:, 2:], spacing)
    limit = SLIVER_SHARE * layout.width[0] * layout.height[0]
    plain = plain_pieces(shape[0], layout)
    slivers, others = plain[shapely.area(plain) < limit - 1e-6], plain[shapely.area(plain) > limit + 1e-6]
    border = shapely.length(shapely.intersection(slivers[:, None], others[None, :]))
    left = cut(shape, layout)
    points = shapely.points(left.points[left.areas < limit - 1e-6])
    for sliver, touched in zip(slivers, border.max(axis=1, initial=0.0), strict=True):
        assert shapely.contains(sliver, points).any() == (touched == 0.0) or 0.0 < touched < 1e-5


@pytest.mark.parametrize("seed", range(5))
def test_the_clip_of_convex_polygons_equals_shapelys(seed):
    rng = np.random.default_rng(seed)
    hulls = np.array([shapely.convex_hull(shapely.MultiPoint(rng.uniform(0, 10, (6, 2)))) for _ in range(20)])
    hulls = shapely.orient_polygons(hulls)
    which = rng.integers(0, 20, 200)
    low = rng.uniform(0, 9, (200, 2))
    bounds = np.hstack([low, low + rng.uniform(0.2, 4, (200, 2))])
    found, box = clipped_convex(hulls, which, bounds)
    area = np.zeros(200)
    area[box] = shapely.area(found)
    expected = shapely.area(shapely.intersection(hulls[which], shapely.box(*bounds.T)))
    np.testing.assert_allclose(area, expected, rtol=0, atol=1e-12)
    assert shapely.is_ccw(shapely.get_exterior_ring(found)).all()


@settings(max_examples=60, deadline=None)
@given(st.integers(0, 2**32 - 1))
def test_areas_obey_picks_theorem(seed):
    """G. Pick 1899: the area of a polygon on a lattice is inner points + border points / 2 + holes - 1."""
    rng = np.random.default_rng(seed)
    corners = rng.integers(0, 12, (6, 2)).astype(float)
    boxes = shapely.box(*corners.T, *(corners + rng.integers(1, 6, (6, 2))).T)
    polygon = max(shapely.get_parts(shapely.union_all(boxes)), key=shapely.area)
    lattice = shapely.points(*np.meshgrid(np.arange(19.0), np.arange(19.0)))
    inner = shapely.contains_properly(polygon, lattice).sum()
    border = shapely.intersects(shapely.boundary(polygon), lattice).sum()
    pinches = shapely.length(shapely.boundary(polygon)) - border
    assume(abs(pinches) < 0.5)  # the theorem is for borders that do not touch themselves
    shape = placed(polygon)
    pieces = cut(shape, even_grids(shapely.bounds(shape)[:, 2:], 0.7))
    expected = inner + border / 2 + len(polygon.interiors) - 1
    np.testing.assert_allclose(pieces.areas.sum(), expected, rtol=0, atol=1e-6)


def test_pieces_that_do_not_hold_together_are_faces_of_their_own():
    comb = placed(shapely.Polygon([(0, 0), (3, 0), (3, 3), (2, 3), (2, 1), (1, 1), (1, 3), (0, 3)]))
    one = np.array([1])
    pieces = cut(comb, grids(one, one, np.array([3.0]), np.array([3.0])))
    np.testing.assert_allclose(pieces.areas, [7.0], rtol=0, atol=1e-12)
    pieces = cut(comb, grids(one, 2 * one, np.array([3.0]), np.array([1.5])))
    np.testing.assert_allclose(pieces.areas, [4.0, 1.5, 1.5], rtol=0, atol=1e-12)
    np.testing.assert_allclose(pieces.points[1:], [[0.5, 2.25], [2.5, 2.25]], rtol=0, atol=1e-12)


def test_a_count_is_not_raised_by_rounding():
    assert cell_counts(np.array([[10.0000001, 10.00002]]), 1.0, 1e-6).tolist() == [[10, 11]]
    assert cell_counts(np.array([[1e-9, 0.2]]), 1.0, 1e-6).tolist() == [[1, 1]]
