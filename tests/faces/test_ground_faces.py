"""Grids on the ground: squares on the model's axes, cut at the polygon, or over the upward faces of parts."""

from __future__ import annotations

import numpy as np
import pytest
import shapely
from face_shapes import Body, assert_sound, box, faces_of, ground_measure, scene_of

from insol.errors import MeasureError

SOMETHING = scene_of(box(100, 100, 1, 1, 1, name="hut"))


def ground(polygon, spacing=1.0, scene=SOMETHING, **more):
    return faces_of(scene, ground_measure(spacing, polygon, **more))


def test_a_square_is_cut_into_squares_with_their_centres():
    faces = ground([[0, 0], [4, 0], [4, 3], [0, 3]], height_m=1.5)
    expected = [[x + 0.5, y + 0.5, 1.5] for y in range(3) for x in range(4)]
    np.testing.assert_allclose(faces.points, expected, rtol=0, atol=1e-12)
    np.testing.assert_array_equal(faces.normals, [[0, 0, 1]] * 12)
    np.testing.assert_allclose(faces.areas, 1.0, rtol=0, atol=1e-12)
    assert (faces.part == -1).all()
    assert faces.number.tolist() == list(range(1, 13))


@pytest.mark.parametrize("clockwise", [False, True])
def test_cells_keep_the_spacing_and_are_cut_exactly_at_the_edge(clockwise):
    corners = [[0, 0], [5.5, 0], [5.5, 2.25], [0, 2.25]]
    faces = ground(corners[::-1] if clockwise else corners)
    assert len(faces) == 6 * 3
    np.testing.assert_allclose(np.unique(faces.areas.round(9)), [0.125, 0.25, 0.5, 1.0], rtol=0, atol=0)
    assert_sound(faces)


def test_a_slanting_polygon_keeps_its_area_and_the_models_axes():
    corners = np.array([[3, -2], [17, 5], [11, 19], [9, 8], [-4, 9]], dtype=float)
    faces = ground(corners, spacing=0.9)
    np.testing.assert_allclose(faces.areas.sum(), shapely.Polygon(corners).area, rtol=0, atol=1e-7)
    whole = np.isclose(faces.areas, 0.81, rtol=0, atol=1e-9)
    assert whole.sum() > 100
    np.testing.assert_allclose((faces.points[whole, 0] + 4) % 0.9, 0.45, rtol=0, atol=1e-9)
    np.testing.assert_allclose((faces.points[whole, 1] + 2) % 0.9, 0.45, rtol=0, atol=1e-9)
    assert_sound(faces)


def test_the_polygon_is_in_the_models_frame():
    scene = scene_of(box(5000, 7000, 1, 1, 1), origin=(5000, 7000, 30))
    faces = ground([[5000, 7000], [5002, 7000], [5002, 7002], [5000, 7002]], scene=scene, height_m=31.0)
    np.testing.assert_allclose(faces.points.mean(axis=0), [1, 1, 1], rtol=0, atol=1e-12)


def test_ground_over_parts_takes_what_faces_up_and_stands_above_it():
    hill = Body("hill", role="ground").add([[0, 0, 0], [8, 0, 6], [8, 5, 6], [0, 5, 0]])
    hill.add([[8, 0, 6], [8, 0, -9], [8, 5, -9], [8, 5, 6]]).add([[0, 0, -9], [0, 5, -9], [8, 5, -9], [8, 0, -9]])
    faces = faces_of(scene_of(hill), ground_measure(1.0, parts=["hill"], height_m=1.2))
    np.testing.assert_allclose(faces.normals, [[-0.6, 0, 0.8]] * 50, rtol=0, atol=1e-12)
    np.testing.assert_allclose(faces.points[:, 2], 0.75 * faces.points[:, 0] + 1.2, rtol=0, atol=1e-9)
    np.testing.assert_allclose(faces.areas.sum(), 50.0, rtol=0, atol=1e-9)
    assert (faces.part == 0).all()


def test_ground_over_a_sheet_wound_upside_down_faces_up_once():
    down = [[0, 0, 0], [0, 4, 0], [4, 4, 0], [4, 0, 0]]
    faces = faces_of(scene_of(Body("lawn", sidedness="two-sided").add(down)), ground_measure(1.0, parts=["lawn"]))
    np.testing.assert_allclose(faces.normals, [[0, 0, 1]] * 16, rtol=0, atol=1e-12)
    assert_sound(faces)


@pytest.mark.parametrize(
    ("polygon", "message"),
    [
        ([], "0 corners bound no area; at least 3 are needed"),
        ([[0, 0], [1, 0]], "2 corners bound no area; at least 3 are needed"),
        ([[0, 0], [1, 0], [float("nan"), 1]], "corner 3 is not a pair of finite numbers"),
        ([[0, 0], [2, 2], [4, 4]], "the corners lie on one line and bound no area"),
        ([[0, 0], [4, 0], [4, 3], [4, 0], [0, 3]], r"corner 4 repeats corner 2 at \(4, 0\)$"),
        ([[0, 0], [4, 0], [4, 3], [0, 0]], "corner 4 repeats corner 1 .* leave the last corner out"),
        (
            [[0, 0], [40, 30], [40, 0], [0, 30]],
            r"the side from corner 1 to 2 meets the side from corner 3 to 4 at \(20, 15\)\. "
            "a polygon may not cross or touch itself",
        ),
        ([[0, 0], [6, 0], [6, 4], [3, 0], [0, 4]], r"the side from corner 1 to 2 meets .* at \(3, 0\)"),
        ([[0, 0], [6, 0], [3, 0], [3, 4]], "the side from corner 1 to 2 meets the side from corner 2 to 3"),
    ],
)
def test_a_polygon_that_bounds_no_simple_area_is_refused(polygon, message):
    with pytest.raises(MeasureError, match='measure "ground", key polygon: ' + message):
        ground(polygon)


def test_a_crossing_is_named_in_the_models_own_coordinates():
    far = np.array([4_512_345.0, 5_812_345.0])
    with pytest.raises(MeasureError, match=r"at \(4512365, 5812360\)"):
        ground((np.array([[0, 0], [40, 30], [40, 0], [0, 30]]) + far).tolist())
