"""Covered faces: which lie against or inside another body, with answers known by hand."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from face_shapes import Body, PlainCaster, box, extruded, faces_measure, faces_of, ground_measure, scene_of
from hypothesis import given, settings
from hypothesis import strategies as st

from insol.faces.model import COVERED

SQUARE = [[0, 0], [12, 0], [12, 12], [0, 12]]


def cast(scene, *measures):
    faces = faces_of(scene, *measures, caster=PlainCaster(scene))
    return faces, faces.status == COVERED


def where(faces, covered):
    """Centres of the covered faces, rounded, in order."""
    return sorted(map(tuple, np.round(faces.points[covered], 6).tolist()))


def test_nothing_is_covered_on_a_body_that_stands_alone():
    _, covered = cast(scene_of(box(0, 0, 5, 4, 3)), faces_measure(1.0), ground_measure(1.0, [[6, 0], [9, 0], [9, 3]]))
    assert not covered.any()


@pytest.mark.parametrize("turn", [0, 23])
def test_the_party_wall_of_two_blocks_is_covered_up_to_the_lower_roof(turn):
    low, high = box(0, 0, 4, 4, 3), box(4, 0, 4, 4, 6, name="high")
    for body in (low, high):
        body.polygons = [[turned(ring, turn) for ring in rings] for rings in body.polygons]
    faces, covered = cast(scene_of(low, high), faces_measure(1.0))
    assert (faces.part[covered] == 0).sum() == 4 * 3  # the low block's wall, all of it
    assert (faces.part[covered] == 1).sum() == 4 * 3  # the high block's, where the low one stands
    assert (faces.points[covered, 2] < 3).all()
    assert np.allclose(np.abs(faces.normals[covered] @ turned(np.array([[1.0, 0, 0]]), turn)[0]), 1.0)


def turned(points, degrees):
    angle = np.radians(degrees)
    axes = np.array([[np.cos(angle), np.sin(angle), 0], [-np.sin(angle), np.cos(angle), 0], [0, 0, 1]])
    return points @ axes


@pytest.mark.parametrize("floor", [True, False])
def test_ground_under_a_building_is_covered_with_and_without_a_floor(floor):
    scene = scene_of(box(3, 4, 5, 3, 10, floor=floor))
    faces, covered = cast(scene, ground_measure(1.0, SQUARE))
    assert where(faces, covered) == sorted((x + 0.5, y + 0.5, 0.0) for x in range(3, 8) for y in range(4, 7))


def test_ground_in_a_court_under_a_bridge_or_in_an_arcade_is_not_covered():
    court = extruded([[1, 1], [11, 1], [11, 11], [1, 11]], 30.0, holes=[[[5, 5], [5, 7], [7, 7], [7, 5]]])
    _, covered = cast(scene_of(court), ground_measure(1.0, SQUARE))
    assert covered.sum() == 100 - 4
    bridge = box(0, 0, 12, 12, 2, base=3.0)
    _, covered = cast(scene_of(bridge), ground_measure(1.0, SQUARE))
    assert not covered.any()


def test_a_cell_that_a_wall_crosses_goes_by_its_point():
    scene = scene_of(box(2.3, 2.3, 3, 3, 5))
    faces, covered = cast(scene, ground_measure(1.0, SQUARE))
    inside = ((faces.points[:, :2] > 2.3) & (faces.points[:, :2] < 5.3)).all(axis=1)
    np.testing.assert_array_equal(covered, inside)


def test_a_block_on_a_block_covers_roof_and_floor_where_they_touch():
    faces, covered = cast(scene_of(box(0, 0, 6, 6, 3), box(1, 1, 2, 3, 4, base=3, name="upper")), faces_measure(1.0))
    roof = (faces.part == 0) & (faces.normals[:, 2] > 0.5)
    floor = (faces.part == 1) & (faces.normals[:, 2] < -0.5)
    assert (covered & roof).sum() == 6
    assert (covered & floor).sum() == 6
    assert covered.sum() == 12


def test_what_is_pushed_into_another_body_is_covered():
    faces, covered = cast(scene_of(box(0, 0, 6, 6, 6), box(4, 2, 5, 2, 4, name="wing")), faces_measure(1.0))
    wing = faces.part == 1
    within = (faces.points[:, 0] < 6) & (faces.points[:, 0] > 0)
    # The wing's floor lies in the main block's: it looks down, out of both.
    floor = faces.normals[:, 2] < -0.5
    np.testing.assert_array_equal(covered & wing, wing & within & ~floor)
    behind = ~wing & (faces.normals[:, 0] > 0.5) & (abs(faces.points[:, 1] - 3) < 1) & (faces.points[:, 2] < 4)
    np.testing.assert_array_equal(covered & ~wing, behind)


def test_walls_under_the_ground_are_covered():
    ground = Body("terrain", role="ground").add([[-50, -50, 0], [50, -50, 0], [50, 50, 0], [-50, 50, 0]])
    faces, covered = cast(scene_of(box(0, 0, 4, 4, 9, base=-3, name="block"), ground), faces_measure(1.0, ["block"]))
    walls = np.abs(faces.normals[:, 2]) < 0.5
    np.testing.assert_array_equal(covered, walls & (faces.points[:, 2] < 0))


def test_two_sided_parts_are_no_evidence():
    tent = box(3, 3, 6, 6, 4, floor=False, sidedness="two-sided")
    _, covered = cast(scene_of(tent), ground_measure(1.0, SQUARE))
    assert not covered.any()
    # Within a house the tent hides the walls; what is seen past it decides.
    house = box(1, 1, 10, 10, 9, name="house")
    furniture = box(3, 3, 1, 1, 0.8, sidedness="two-sided", name="table")
    faces, covered = cast(scene_of(house, furniture), ground_measure(1.0, SQUARE))
    within = ((faces.points[:, :2] > 1) & (faces.points[:, :2] < 11)).all(axis=1)
    beneath = ((faces.points[:, :2] > 3) & (faces.points[:, :2] < 4)).all(axis=1)
    np.testing.assert_array_equal(covered[~beneath], within[~beneath])


def test_the_middle_of_a_terrace_is_covered_though_its_neighbours_walls_lie_in_one_place():
    row = [box(5 * i, 0, 5, 6, 4 + i, name=f"house-{i}") for i in range(4)]
    faces, covered = cast(scene_of(*row), faces_measure(1.0))
    party = np.abs(faces.normals[:, 0]) > 0.5
    # The party walls at x = 5, 10, 15 are covered as high as the lower of their two houses.
    wall, height = np.round(faces.points[:, 0]), faces.points[:, 2]
    lower = np.select([wall == 5, wall == 10, wall == 15], [4, 5, 6], 0)
    np.testing.assert_array_equal(covered, party & (height < lower))


def winding_numbers(scene, points):
    """How often a closed surface goes round each point: the sum of its triangles' solid angles by 4 pi.

    References
    ----------
    A. van Oosterom, J. Strackee: The solid angle of a plane triangle. IEEE Transactions on Biomedical
    Engineering 30 (1983), 125-126.
    """
    a, b, c = (scene.vertices[scene.triangles][None] - points[:, None, None]).transpose(2, 0, 1, 3)
    la, lb, lc = (np.linalg.norm(side, axis=-1) for side in (a, b, c))
    above = np.einsum("...i,...i", a, np.cross(b, c))
    below = la * lb * lc + lc * (a * b).sum(-1) + la * (b * c).sum(-1) + lb * (c * a).sum(-1)
    return 2.0 * np.arctan2(above, below).sum(axis=1) / (4.0 * np.pi)


@settings(max_examples=25, deadline=None)
@given(st.integers(0, 2**32 - 1), st.sampled_from([1.0, 1.3]), st.floats(0, 90))
def test_a_face_is_covered_exactly_when_a_body_winds_around_its_point(seed, spacing, turn):
    rng = np.random.default_rng(seed)
    bodies = [box(*rng.integers(0, 5, 2), *rng.integers(1, 4, 3), base=int(rng.integers(0, 3))) for _ in range(4)]
    for body in bodies:
        body.polygons = [[turned(ring, turn) for ring in rings] for rings in body.polygons]
    scene = scene_of(*bodies)
    faces, covered = cast(scene, faces_measure(spacing))
    inside = winding_numbers(scene, faces.points + 1e-3 * faces.normals) > 0.5
    np.testing.assert_array_equal(covered, inside)


def test_an_open_shed_is_not_covered():
    shed = Body("shed")
    for rings in box(2, 2, 8, 4, 4, floor=False).polygons:
        if np.ptp(rings[0][:, 1]) > 0 or rings[0][:, 1].max() > 2:  # all but the wall at y = 2
            shed.add(*rings)
    _, covered = cast(scene_of(shed), ground_measure(1.0, [[2, 2], [10, 2], [10, 4], [2, 4]]))
    assert not covered.any()


def test_a_gap_wider_than_the_stand_off_is_a_gap():
    _, covered = cast(scene_of(box(0, 0, 4, 4, 3), box(4.01, 0, 4, 4, 3)), faces_measure(1.0))
    assert not covered.any()
    _, covered = cast(scene_of(box(0, 0, 4, 4, 3), box(4.0005, 0, 4, 4, 3)), faces_measure(1.0))
    assert covered.sum() == 2 * 4 * 3


def test_a_scene_far_from_its_origin_is_answered_alike():
    bodies = box(3, 4, 5, 3, 10), box(8, 4, 3, 3, 6, name="next")
    near = scene_of(*bodies)
    far = replace(near, vertices=near.vertices + np.array([30_000.0, 0, 0]))
    polygon = np.array(SQUARE, dtype=float)
    _, here = cast(near, faces_measure(1.0), ground_measure(1.0, polygon))
    _, there = cast(far, faces_measure(1.0), ground_measure(1.0, polygon + np.array([30_000.0, 0])))
    np.testing.assert_array_equal(here, there)
