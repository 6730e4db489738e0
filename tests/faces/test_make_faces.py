"""Faces of whole studies: which parts, in what order, both sides, wherever on the map, and what is refused."""

from __future__ import annotations

import numpy as np
import pytest
from face_shapes import Body, assert_sound, box, extruded, faces_measure, faces_of, ground_measure, scene_of
from hypothesis import given, settings
from hypothesis import strategies as st

from insol.errors import MeasureError
from insol.faces.model import MEASURED

GRID = (1_234_567.0, 5_678_910.0, 45.0)  # the size of coordinates in a national grid [m]
GRID_ROUNDING_M = 1e-6  # float64 holds 1e-9 m there; a few operations multiply it

HOUSE = [[0, 0], [9, 0], [9, 4], [4, 4], [4, 7], [0, 7]]


def test_measures_parts_and_numbers_come_in_order():
    scene = scene_of(
        box(0, 0, 3, 2, 2, name="block-1"),
        box(9, 0, 2, 2, 2, name="tower", role="surroundings"),
        box(5, 0, 2, 2, 2, name="block-2", role="existing"),
    )
    blocks, rest = faces_measure(1.0, ["block-*"], name="a"), faces_measure(2.0, [], ["surroundings"], name="b")
    faces = faces_of(scene, blocks, rest)
    assert faces.measure_names == ("a", "b")
    assert faces.spacings.tolist() == [1.0, 2.0]
    counts = [2 * (6 + 6 + 4), 6 * 4, 6]
    np.testing.assert_array_equal(faces.part, np.repeat([0, 2, 1], counts))
    np.testing.assert_array_equal(faces.measure, np.repeat([0, 0, 1], counts))
    np.testing.assert_array_equal(faces.number, np.concatenate([np.arange(n) + 1 for n in counts]))
    assert (faces.status == MEASURED).all()
    assert faces.names == ("",) * sum(counts)


def test_a_wall_is_numbered_from_below_and_from_left_to_right_seen_from_outside():
    wall = Body().add([[0, 0, 0], [3, 0, 0], [3, 0, 2], [0, 0, 2]])
    faces = faces_of(scene_of(wall), faces_measure(1.0))
    expected = [[x + 0.5, 0, z + 0.5] for z in (0, 1) for x in (0, 1, 2)]
    np.testing.assert_allclose(faces.points, expected, rtol=0, atol=1e-12)
    np.testing.assert_allclose(faces.normals, [[0, -1, 0]] * 6, rtol=0, atol=1e-12)


def test_a_flat_roof_is_cut_along_its_longest_edge():
    faces = faces_of(scene_of(box(0, 0, 10, 4, 3, turn_deg=30)), faces_measure(1.0))
    roof = faces.outlines[faces.normals[faces.outline_face, 2] > 0.5]
    legs = (roof[:, 1] - roof[:, 0])[::2, :2]  # of each cell's two triangles the first begins with its lower edge
    angle = np.degrees(np.arctan2(legs[:, 1], legs[:, 0])) % 90
    np.testing.assert_allclose(angle, 30.0, rtol=0, atol=1e-6)
    assert (faces.normals[:, 2] > 0.5).sum() == 40


def test_a_slope_is_cut_by_level_and_upslope_lines():
    slope = Body().add([[0, 0, 0], [4, 2, 0], [3, 4, 2], [-1, 2, 2]])
    faces = faces_of(scene_of(slope), faces_measure(0.5))
    edges = (faces.outlines - np.roll(faces.outlines, 1, axis=1)).reshape(-1, 3)
    level = np.abs(edges[:, 2]) < 1e-9
    along = edges[level] / np.linalg.norm(edges[level], axis=1, keepdims=True)
    np.testing.assert_allclose(np.abs(along @ np.array([4, 2, 0]) / np.sqrt(20)), 1.0, rtol=0, atol=1e-9)
    assert_sound(faces)


def test_two_sided_parts_are_measured_from_both_sides():
    sheet = [[0, 0, 0], [3, 0, 0], [3, 0, 2], [0, 0, 2]]
    scene = scene_of(
        Body("sail", sidedness="two-sided").add(sheet), Body("wall").add([[x, y + 5, z] for x, y, z in sheet])
    )
    faces = faces_of(scene, faces_measure(1.0))
    assert_sound(faces)
    np.testing.assert_array_equal(faces.part, [0] * 12 + [1] * 6)
    np.testing.assert_array_equal(faces.number, [*range(1, 13), *range(1, 7)])
    np.testing.assert_allclose(faces.normals[:6], -faces.normals[6:12], rtol=0, atol=0)
    np.testing.assert_allclose(faces.points[:6], faces.points[6:12], rtol=0, atol=1e-12)
    assert faces.areas.sum() == pytest.approx(18.0, rel=0, abs=1e-9)


@settings(max_examples=25, deadline=None)
@given(st.floats(0, 90), st.floats(-3e5, 3e5), st.floats(-3e5, 3e5), st.sampled_from([0.6, 1.0, 1.7]))
def test_a_national_grid_changes_nothing(turn, east, north, spacing):
    angle = np.radians(turn)
    plan = np.array(HOUSE, dtype=float) @ np.array([[np.cos(angle), np.sin(angle)], [-np.sin(angle), np.cos(angle)]])
    house = extruded(plan, 5.3)
    far = np.array(GRID) + np.array([east, north, 0.0])
    measures = faces_measure(spacing), ground_measure(spacing, [[-9, -9], [9, -7], [3, 12]], height_m=0.2)
    moved = (
        measures[0],
        ground_measure(
            spacing, [[x + far[0], y + far[1]] for x, y in [[-9, -9], [9, -7], [3, 12]]], height_m=0.2 + far[2]
        ),
    )
    here = faces_of(scene_of(house), *measures)
    there = faces_of(scene_of(house, moved=far, origin=np.round(far)), *moved)
    assert len(here) == len(there)
    shift = far - np.round(far)
    np.testing.assert_allclose(there.points - shift, here.points, rtol=0, atol=GRID_ROUNDING_M)
    np.testing.assert_allclose(there.areas, here.areas, rtol=0, atol=GRID_ROUNDING_M)
    np.testing.assert_allclose(there.normals, here.normals, rtol=0, atol=1e-8)
    for name in ("part", "number", "measure"):
        np.testing.assert_array_equal(getattr(there, name), getattr(here, name))


def test_making_faces_twice_gives_the_same_bits():
    scene = scene_of(extruded(HOUSE, 5.0), box(20, 0, 7, 5, 3, turn_deg=20))
    one, two = (faces_of(scene, faces_measure(0.7)) for _ in range(2))
    for name in ("points", "normals", "areas", "outlines", "outline_face", "number"):
        np.testing.assert_array_equal(getattr(one, name), getattr(two, name))


def test_an_unknown_part_is_named_with_near_spellings():
    scene = scene_of(box(0, 0, 1, 1, 1, name="block-east"), box(4, 0, 1, 1, 1, name="block-west"))
    with pytest.raises(MeasureError) as fault:
        faces_of(scene, faces_measure(1.0, ["block-*", "blok-east"], name="facades"))
    assert str(fault.value) == (
        'measure "facades", key parts: no part is named like "blok-east". did you mean "block-east" or "block-west"?'
    )
    with pytest.raises(MeasureError, match=r'no part is named like "Block-east"\. did you mean "block-east"'):
        faces_of(scene, faces_measure(1.0, ["Block-east"]))
    with pytest.raises(MeasureError, match='the parts are "block-east", "block-west"'):
        faces_of(scene, faces_measure(1.0, ["zzz"]))


def test_names_with_brackets_are_names_first():
    scene = scene_of(box(0, 0, 1, 1, 1, name="flat[2]"), box(4, 0, 1, 1, 1, name="flat2"))
    assert set(faces_of(scene, faces_measure(1.0, ["flat[2]"])).part) == {0, 1}


def test_names_and_roles_together_must_both_match():
    scene = scene_of(box(0, 0, 1, 1, 1, name="a-1"), box(4, 0, 1, 1, 1, name="a-2", role="existing"))
    assert set(faces_of(scene, faces_measure(1.0, ["a-*"], ["existing"])).part) == {1}
    with pytest.raises(MeasureError, match='role "ground"; roles in the models: "proposed", "existing"'):
        faces_of(scene, faces_measure(1.0, [], ["ground"]))
    with pytest.raises(MeasureError, match='no part has the role "existing" among those named like "a-1"'):
        faces_of(scene, faces_measure(1.0, ["a-1"], ["existing"]))
    with pytest.raises(MeasureError, match="neither parts nor roles are given"):
        faces_of(scene, faces_measure(1.0, []))


def test_too_fine_a_spacing_is_refused_with_one_that_serves():
    scene = scene_of(box(0, 0, 100, 100, 50))
    with pytest.raises(MeasureError) as fault:
        faces_of(scene, faces_measure(0.01, name="facades"))
    assert str(fault.value) == (
        'measure "facades", key spacing_m: a spacing of 0.01 m makes about 400,000,000 faces; the most is 20,000,000. '
        "spacing_m = 0.2 makes about 1,000,000"
    )
    with pytest.raises(MeasureError, match="makes about"):
        faces_of(scene, ground_measure(1e-12, [[0, 0], [9, 0], [9, 9]]))
    with pytest.raises(MeasureError, match="makes about"):  # both sides count
        faces_of(scene_of(box(0, 0, 100, 100, 50, sidedness="two-sided")), faces_measure(0.06))


@pytest.mark.parametrize("spacing", [-1.0, float("nan"), float("inf")])
def test_a_spacing_that_is_no_length_is_refused(spacing):
    scene = scene_of(box(0, 0, 1, 1, 1))
    for measure in (faces_measure(spacing), ground_measure(spacing, [[0, 0], [1, 0], [1, 1]])):
        with pytest.raises(MeasureError, match=r"key spacing_m: .* m is no spacing; allowed: a length above 0"):
            faces_of(scene, measure)


def test_a_measure_without_a_face_is_refused():
    needle = scene_of(Body("needle").add([[0, 0, 0], [1, 0, 0], [1, 0, 1]]))
    flat = type(needle)(
        needle.origin, needle.vertices * [1, 1, 0], needle.triangles, needle.polygon, needle.part, needle.parts
    )
    with pytest.raises(MeasureError, match='measure "faces": there is no surface to measure'):
        faces_of(flat, faces_measure(1.0))
    with pytest.raises(MeasureError, match="none that faces up"):
        faces_of(needle, ground_measure(1.0, parts=["needle"]))
    with pytest.raises(MeasureError, match="the study measures nothing"):
        faces_of(needle)
