"""Areas, counts and points of faces cut from bodies whose surfaces are known by hand."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
import shapely
from face_shapes import (
    Body,
    assert_sound,
    box,
    extruded,
    faces_measure,
    faces_of,
    scene_of,
)
from hypothesis import given, settings
from hypothesis import strategies as st

from insol.faces.surfaces import surfaces_of
from insol.faces.triangles import triangles_of_parts

EXACT_M2 = 1e-9  # rounding of float64 in areas of some hundred square metres
JOINED = 1e-7  # the share of an area that rounding and joining may move


def surfaces(scene, **kind):
    return surfaces_of(triangles_of_parts(scene, np.ones(len(scene.parts), dtype=bool)), **kind)


def area_facing(faces, direction):
    return faces.areas[faces.normals @ np.array(direction) > 0.999].sum()


def test_a_box_is_six_surfaces_cut_evenly():
    faces = faces_of(scene_of(box(0, 0, 10, 6, 4.5, turn_deg=31)), faces_measure(1.0))
    # 4.5 m is divided into five cells of 0.9 m.
    assert len(faces) == 2 * (10 * 6) + 2 * (10 * 5) + 2 * (6 * 5)
    np.testing.assert_allclose(faces.areas.sum(), 2 * (60 + 45 + 27), rtol=0, atol=EXACT_M2)
    assert faces.areas.max() <= 1.0 + 1e-9
    assert_sound(faces)


def test_no_cell_is_larger_than_the_spacing_nor_divided_for_a_rounding():
    exact = faces_of(scene_of(box(0, 0, 3.0000000001, 3, 3)), faces_measure(1.0))
    assert len(exact) == 6 * 9
    above = faces_of(scene_of(box(0, 0, 3.001, 3, 3)), faces_measure(1.0))
    assert len(above) == 2 * 9 + 4 * 12


@pytest.mark.parametrize("turn", [0, 17])
def test_an_l_shaped_block(turn):
    angle = np.radians(turn)
    plan = np.array([[0, 0], [12, 0], [12, 5], [5, 5], [5, 9], [0, 9]], dtype=float)
    plan = plan @ np.array([[np.cos(angle), np.sin(angle)], [-np.sin(angle), np.cos(angle)]])
    faces = faces_of(scene_of(extruded(plan, 7.0)), faces_measure(0.8))
    assert_sound(faces)
    np.testing.assert_allclose(area_facing(faces, [0, 0, 1]), 12 * 5 + 5 * 4, rtol=0, atol=EXACT_M2)
    np.testing.assert_allclose(faces.areas.sum(), 2 * 80 + 42 * 7, rtol=0, atol=EXACT_M2)


def test_a_u_with_a_court_and_a_wall_with_windows():
    court = [[4, 4], [4, 6], [6, 6], [6, 4]]
    plan = [[0, 0], [14, 0], [14, 10], [10, 10], [10, 3], [8, 3], [8, 10], [0, 10]]
    block = extruded(plan, 5.0, holes=[court], name="block")
    pane = np.array([[1, 0, 1], [1, 0, 2.5], [2, 0, 2.5], [2, 0, 1]], dtype=float)
    windows = [pane + np.array([2.3 * i, -1, 0]) for i in range(4)]
    wall = Body("wall").add([[0, -1, 0], [10, -1, 0], [10, -1, 3], [0, -1, 3]], *windows)
    faces = faces_of(scene_of(block, wall), faces_measure(0.7))
    assert_sound(faces)
    roof = 140 - 2 * 7 - 4
    around = 2 * (14 + 10) + 2 * 7 + 8
    of_block = faces.part == 0
    np.testing.assert_allclose(faces.areas[of_block].sum(), 2 * roof + around * 5, rtol=0, atol=EXACT_M2)
    np.testing.assert_allclose(faces.areas[~of_block].sum(), 30 - 4 * 1.5, rtol=0, atol=EXACT_M2)


def test_a_gabled_house():
    gable = [[0, 0, 0], [8, 0, 0], [8, 0, 5], [4, 0, 8], [0, 0, 5]]
    back = [[x, 12, z] for x, _, z in gable[::-1]]
    house = Body().add(gable).add(back)
    for one, two in zip(gable, gable[1:] + gable[:1], strict=True):
        house.add([one, [one[0], 12, one[2]], [two[0], 12, two[2]], two])
    faces = faces_of(scene_of(house), faces_measure(1.0))
    assert_sound(faces)
    # Rafters of 5 m by the rule of Pythagoras (3, 4, 5).
    np.testing.assert_allclose(area_facing(faces, [0.6, 0, 0.8]), 5 * 12, rtol=0, atol=EXACT_M2)
    np.testing.assert_allclose(area_facing(faces, [0, -1, 0]), 8 * 5 + 8 * 3 / 2, rtol=0, atol=EXACT_M2)
    roof = faces.normals @ np.array([0.6, 0, 0.8]) > 0.999
    assert roof.sum() == 5 * 12


def test_a_round_tower_keeps_its_facets_and_its_round_roof():
    corners = 48
    around = np.linspace(0, 2 * np.pi, corners, endpoint=False)
    plan = 6.0 * np.column_stack([np.cos(around), np.sin(around)])
    scene = scene_of(extruded(plan, 20.0))
    faces = faces_of(scene, faces_measure(1.0))
    assert_sound(faces)
    side = 2 * 6.0 * np.sin(np.pi / corners)
    floor = corners / 2 * 36.0 * np.sin(2 * np.pi / corners)
    np.testing.assert_allclose(faces.areas.sum(), 2 * floor + corners * side * 20, rtol=0, atol=1e-7)
    assert len(surfaces(scene)) == corners + 2
    walls = np.abs(faces.normals[:, 2]) < 0.5
    assert walls.sum() == corners * 20


def test_every_facet_of_a_finely_cut_dome_stays_a_face():
    around, up = np.meshgrid(np.linspace(0, 2 * np.pi, 401)[:-1], np.linspace(0.3, 0.5, 5), indexing="ij")
    points = 8.0 * np.stack([np.cos(around) * np.cos(up), np.sin(around) * np.cos(up), np.sin(up)], axis=-1)
    dome = Body()
    for i in range(400):
        for j in range(4):
            k = (i + 1) % 400
            dome.add([points[i, j], points[k, j], points[k, j + 1], points[i, j + 1]])
    scene = scene_of(dome)
    # Neighbours around lie within a millimetre of one plane (a chord of 12 cm, 0.9 degrees on), all do not.
    faces = faces_of(scene, faces_measure(1.0))
    assert len(faces) == 400 * 4
    corners = scene.vertices[scene.triangles]
    area = np.linalg.norm(np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]), axis=1).sum() / 2
    np.testing.assert_allclose(faces.areas.sum(), area, rtol=JOINED, atol=0)


def test_a_wall_with_a_finely_rounded_edge_stays_whole():
    wall = Body().add([[0, 0, 0], [10, 0, 0], [10, 0, 3], [0, 0, 3]])
    bend = np.linspace(0, np.pi / 2, 400)
    x, y = 10 + 2 * np.sin(bend), 2 - 2 * np.cos(bend)
    for a, b in zip(range(399), range(1, 400), strict=True):
        wall.add([[x[a], y[a], 0], [x[b], y[b], 0], [x[b], y[b], 3], [x[a], y[a], 3]])
    found = surfaces(scene_of(wall))
    assert shapely.area(found.polygons).max() >= 30.0
    assert (found.thickness <= 2e-3).all()


def test_triangles_of_a_soup_merge_and_the_files_polygons_can_be_kept():
    body = box(0, 0, 4, 4, 4)
    soup = scene_of(body, one_polygon_a_triangle=True)
    assert len(surfaces(soup)) == 6
    assert len(surfaces(soup, as_modelled=True)) == 12
    assert len(faces_of(scene_of(body), faces_measure(0.0))) == 6


@settings(max_examples=40, deadline=None)
@given(st.integers(0, 2**32 - 1))
def test_storeys_with_other_joints_are_one_wall(seed):
    rng = np.random.default_rng(seed)
    axes, base = plane(seed)
    wall = Body()
    for storey in range(4):
        joints = np.sort(rng.choice(np.arange(1, 90), rng.integers(0, 5), replace=False)) / 10.0
        for left, right in pairwise([0.0, *joints, 9.0]):
            corners = [[left, storey], [right, storey], [right, storey + 1], [left, storey + 1]]
            wall.add(base + np.array(corners) @ axes)
    found = surfaces(scene_of(wall))
    assert len(found) == 1
    assert shapely.get_num_interior_rings(found.polygons)[0] == 0
    np.testing.assert_allclose(shapely.area(found.polygons), 36.0, rtol=JOINED, atol=0)


def test_bodies_pushed_into_one_another_have_one_roof():
    cross = Body()
    for body in (box(0, 3, 9, 3, 5), box(3, 0, 3, 9, 5)):
        cross.polygons += body.polygons
    faces = faces_of(scene_of(cross), faces_measure(1.0))
    np.testing.assert_allclose(area_facing(faces, [0, 0, 1]), 9 + 4 * 9, rtol=JOINED, atol=0)


def test_a_polygon_that_is_there_twice_counts_once():
    ring = [[0, 0, 0], [4, 0, 0], [4, 0, 3], [0, 0, 3]]
    faces = faces_of(scene_of(Body().add(ring).add(ring)), faces_measure(0.5))
    np.testing.assert_allclose(faces.areas.sum(), 12.0, rtol=JOINED, atol=0)


def test_a_sheet_of_paper_has_two_faces_and_an_edge():
    # Front and back are 0.5 mm apart, less than what counts as one plane.
    faces = faces_of(scene_of(box(0, 0, 2, 0.0005, 1)), faces_measure(1.0))
    assert area_facing(faces, [0, -1, 0]) == pytest.approx(2.0, rel=0, abs=1e-9)
    assert area_facing(faces, [0, 1, 0]) == pytest.approx(2.0, rel=0, abs=1e-9)


def test_millimetres_of_rounding_do_not_part_a_wall_and_points_stay_outside_it():
    rng = np.random.default_rng(5)
    grid = np.arange(11.0)
    x, z = np.meshgrid(grid, grid, indexing="ij")
    y = np.round(rng.uniform(-0.4e-3, 0.4e-3, x.shape), 4)
    points = np.stack([x, y, z], axis=-1)
    wall = Body()
    for i in range(10):
        for j in range(10):
            a, b, c, d = points[i, j], points[i + 1, j], points[i + 1, j + 1], points[i, j + 1]
            wall.add([a, b, c]).add([a, c, d])
    found = surfaces(scene_of(wall))
    assert len(found) == 1
    faces = faces_of(scene_of(wall), faces_measure(1.0))
    assert len(faces) == 100
    assert (faces.points[:, 1] <= 0.0).all()
    assert (faces.points[:, 1] >= -1e-3).all()


def test_degenerate_triangles_leave_no_hole():
    scene = scene_of(Body().add([[0, 0, 0], [4, 0, 0], [4, 0, 3]]).add([[0, 0, 0], [4, 0, 3], [0, 0, 3]]))
    vertices = np.concatenate([scene.vertices, [[0, 0, 0], [2, 0, 1.5], [4, 0, 3], [1, 1, 1], [1, 1, 1], [1, 1, 1]]])
    with_more = type(scene)(
        scene.origin, vertices, np.arange(12).reshape(-1, 3), np.arange(4), np.zeros(4), scene.parts
    )
    faces = faces_of(with_more, faces_measure(1.0))
    np.testing.assert_allclose(faces.areas.sum(), 12.0, rtol=0, atol=EXACT_M2)


@st.composite
def squares_in_a_plane(draw):
    """A connected set of unit squares: a polygon with holes and pinches, in lattice coordinates."""
    width, height = draw(st.integers(2, 7)), draw(st.integers(2, 7))
    bits = draw(st.lists(st.booleans(), min_size=width * height, max_size=width * height))
    filled = {(k % width, k // width) for k, bit in enumerate(bits) if bit} or {(0, 0)}
    reached = [min(filled)]
    for x, y in reached:
        beside = {(x + 1, y), (x - 1, y), (x, y + 1), (x, y - 1)} & filled
        reached += sorted(beside - set(reached))
    return reached


def plane(draw_seed):
    """Two axes and an origin somewhere in space."""
    rng = np.random.default_rng(draw_seed)
    axes = np.linalg.qr(rng.normal(size=(3, 3)))[0]
    return axes[:2], rng.uniform(-200, 200, 3)


@settings(max_examples=50, deadline=None)
@given(squares_in_a_plane(), st.integers(0, 2**32 - 1), st.sampled_from([0.31, 0.5, 1.0, 2.3, 9.0]))
def test_any_triangulated_plane_becomes_one_surface_with_its_holes(squares, seed, spacing):
    axes, base = plane(seed)
    rng = np.random.default_rng(seed)
    body = Body()
    for x, y in squares:
        a, b, c, d = (base + np.array([x + i, y + j]) @ axes for i, j in ((0, 0), (1, 0), (1, 1), (0, 1)))
        halves = [[a, b, c], [a, c, d]] if rng.random() < 0.5 else [[a, b, d], [b, c, d]]
        for half in halves:
            body.add(half)
    rng.shuffle(body.polygons)
    scene = scene_of(body)
    found = surfaces(scene)
    assert len(found) == 1
    np.testing.assert_allclose(shapely.area(found.polygons), len(squares), rtol=JOINED, atol=0)
    assert shapely.get_num_interior_rings(found.polygons)[0] == holes_by_euler(squares)
    faces = faces_of(scene, faces_measure(spacing))
    assert_sound(faces)
    np.testing.assert_allclose(faces.areas.sum(), len(squares), rtol=JOINED, atol=0)


def holes_by_euler(squares):
    """How many holes a connected set of squares has, by Euler: vertices - edges + faces = 1 - holes."""
    vertices = {(x + i, y + j) for x, y in squares for i in (0, 1) for j in (0, 1)}
    level = {(x, y + j) for x, y in squares for j in (0, 1)}
    upright = {(x + i, y) for x, y in squares for i in (0, 1)}
    return 1 - (len(vertices) - len(level) - len(upright) + len(squares))
