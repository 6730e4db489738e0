"""Both engines against a plain float64 ray test, and against what has to hold for any of them."""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest
from numpy.typing import NDArray

from insol.casting.contract import Caster
from insol.casting.engines import build
from insol.casting.order import coherent_order
from insol.errors import MissingPackage

EDGE_M = 2e-4
"""Rays that pass an edge closer than this are left out: single precision at a hundred metres, ten times."""

UP = np.array([0.0, 0.0, 1.0])


def random_scene(seed: int, kind: str) -> tuple[NDArray[np.float64], NDArray[np.int32]]:
    """Vertices and triangles: boxes, loose triangles, or thin slats."""
    random = np.random.default_rng(seed)
    if kind == "loose":
        corners = random.uniform(-30, 30, (60, 1, 3)) + random.uniform(-8, 8, (60, 3, 3))
        return corners.reshape(-1, 3), np.arange(180, dtype=np.int32).reshape(-1, 3)
    vertices, triangles = [], []
    for number in range(20):
        low = random.uniform((-30, -30, 0), (30, 30, 5))
        size = random.uniform(2, 12, 3) if kind == "boxes" else random.uniform((8, 0.02, 0.02), (20, 0.3, 0.3))
        box = low + size * np.array([[x, y, z] for z in (0, 1) for y in (0, 1) for x in (0, 1)])
        quads = [(0, 2, 3, 1), (4, 5, 7, 6), (0, 1, 5, 4), (2, 6, 7, 3), (0, 4, 6, 2), (1, 3, 7, 5)]
        vertices.append(box)
        triangles += [(8 * number + a, 8 * number + b, 8 * number + c) for a, b, c, _ in quads]
        triangles += [(8 * number + a, 8 * number + c, 8 * number + d) for a, _, c, d in quads]
    return np.concatenate(vertices), np.array(triangles, dtype=np.int32)


def plainly(
    corners: NDArray[np.float64], origins: NDArray[np.float64], directions: NDArray[np.float64]
) -> tuple[NDArray[np.int64], NDArray[np.bool_]]:
    """First triangle of each ray (-1: none), and whether it passes any edge, or begins, within EDGE_M (float64)."""
    first, close = np.full(len(origins), -1), np.zeros(len(origins), dtype=bool)
    nearest = np.full(len(origins), np.inf)
    for number, (a, b, c) in enumerate(corners):
        normal = np.cross(b - a, c - a)
        area = np.linalg.norm(normal)
        facing = directions @ normal
        with np.errstate(divide="ignore", invalid="ignore"):
            distance = ((a - origins) @ normal) / facing
            point = origins + distance[:, None] * directions
        inside = np.full(len(origins), np.inf)
        for p, q in ((a, b), (b, c), (c, a)):
            inside = np.minimum(inside, np.cross(q - p, point - p) @ normal / area / np.linalg.norm(q - p))
        sideways = np.abs(facing) / area  # seen at a slant, the band across the ray is as much narrower
        close |= (np.abs(inside) * np.maximum(sideways, 0.05) < EDGE_M) & (distance > -EDGE_M)
        close |= (np.abs(distance) < EDGE_M) & (inside > -EDGE_M)
        hit = (inside >= 0) & (distance > 0) & (distance < nearest)
        first[hit], nearest[hit] = number, distance[hit]
    return first, close


def rays(seed: int, count: int) -> tuple[NDArray[np.float32], NDArray[np.float32]]:
    random = np.random.default_rng(seed + 1000)
    origins = random.uniform((-32, -32, -1), (32, 32, 14), (count, 3)).astype(np.float32)
    directions = random.normal(size=(count, 3))
    return origins, (directions / np.linalg.norm(directions, axis=1, keepdims=True)).astype(np.float32)


@pytest.mark.parametrize("kind", ["boxes", "loose", "slats"])
@pytest.mark.parametrize("seed", range(4))
def test_any_ray_is_answered_as_plainly(engine: str, kind: str, seed: int) -> None:
    vertices, triangles = random_scene(seed, kind)
    caster = build(vertices, triangles, engine)  # type: ignore[arg-type]
    origins, directions = rays(seed, 1500)
    expected, close = plainly(vertices[triangles], origins.astype(float), directions.astype(float))
    assert close.mean() < 0.05
    first = caster.first(origins, directions)
    np.testing.assert_array_equal(first[~close] >= 0, expected[~close] >= 0)
    same = first[~close] == expected[~close]
    assert same.mean() > 0.995  # where solids run through each other two triangles may be met at once
    np.testing.assert_array_equal(caster.blocked_each(origins, directions)[~close], expected[~close] >= 0)


@pytest.mark.parametrize("kind", ["boxes", "loose", "slats"])
@pytest.mark.parametrize("seed", range(4))
def test_parallel_rays_are_answered_as_plainly(engine: str, kind: str, seed: int) -> None:
    vertices, triangles = random_scene(seed, kind)
    caster = build(vertices, triangles, engine)  # type: ignore[arg-type]
    origins, directions = rays(seed, 1500)
    steep, grazing = np.array([0.01, 0.02, 1.0]), np.array([1.0, 0.013, 0.007])
    for direction in [*directions[:3].astype(float), steep, grazing]:
        unit = direction / np.linalg.norm(direction)
        along = np.tile(unit, (len(origins), 1))
        expected, close = plainly(vertices[triangles], origins.astype(float), along)
        blocked = caster.blocked(origins, unit)
        np.testing.assert_array_equal(blocked[~close], expected[~close] >= 0)


def test_one_more_triangle_never_frees_a_ray(engine: str) -> None:
    vertices, triangles = random_scene(5, "boxes")
    origins, directions = rays(5, 3000)
    fewer = build(vertices, triangles[:-40], engine).blocked_each(origins, directions)  # type: ignore[arg-type]
    more = build(vertices, triangles, engine).blocked_each(origins, directions)  # type: ignore[arg-type]
    assert not (fewer & ~more).any()


def sphere(rings: int) -> tuple[NDArray[np.float64], NDArray[np.int32]]:
    import trimesh

    ball = trimesh.creation.icosphere(subdivisions=rings, radius=10.0)
    return np.asarray(ball.vertices, dtype=float), np.asarray(ball.faces, dtype=np.int32)


def test_no_ray_leaks_out_of_a_closed_body(engine: str) -> None:
    vertices, triangles = sphere(3)
    caster = build(vertices, triangles, engine)  # type: ignore[arg-type]
    random = np.random.default_rng(2)
    origins = random.uniform(-4, 4, (20_000, 3)).astype(np.float32)
    for _ in range(4):
        direction = random.normal(size=3)
        assert caster.blocked(origins, direction / np.linalg.norm(direction)).all()


def test_numpy_holds_tight_along_edges_and_at_vertices() -> None:
    """Parallel rays aimed exactly at the edges' middles and at the vertices of a closed body, from inside."""
    vertices, triangles = sphere(2)
    caster = build(vertices, triangles, "numpy")
    direction = np.array([0.3, -0.5, 0.81])
    direction /= np.linalg.norm(direction)
    edges = (vertices[triangles] + np.roll(vertices[triangles], -1, axis=1)).reshape(-1, 3) / 2
    targets = np.concatenate([edges, vertices])
    targets = targets[targets @ direction > 2]
    assert caster.blocked((targets - 1.0 * direction).astype(np.float32), direction).all()


def test_a_ray_begins_before_its_own_face_and_not_behind_it(engine: str) -> None:
    """A millimetre off a face, a kilometre from the local origin."""
    corners = np.array([[1000.0, 0, 0], [1010, 0, 0], [1000, 10, 0]])
    caster = build(corners, np.array([[0, 1, 2]], dtype=np.int32), engine)  # type: ignore[arg-type]
    above = np.array([[1002.0, 2, 0.001]], dtype=np.float32)
    below = np.array([[1002.0, 2, -0.001]], dtype=np.float32)
    assert not caster.blocked(above, UP)[0]
    assert caster.blocked(below, UP)[0]


def test_scaling_turning_and_moving_change_no_answer(engine: str) -> None:
    vertices, triangles = random_scene(9, "boxes")
    origins, directions = rays(9, 2000)
    _, close = plainly(vertices[triangles], origins.astype(float), directions.astype(float))
    expected = build(vertices, triangles, engine).blocked_each(origins, directions)  # type: ignore[arg-type]
    angle = np.radians(33.0)
    turn = np.array([[np.cos(angle), -np.sin(angle), 0], [np.sin(angle), np.cos(angle), 0], [0, 0, 1]])
    for scale, matrix, shift in ((0.01, np.eye(3), 0.0), (1.0, turn, 0.0), (1.0, np.eye(3), 40.0)):
        moved = build(vertices @ matrix.T * scale + shift, triangles, engine)  # type: ignore[arg-type]
        found = moved.blocked_each(
            (origins.astype(float) @ matrix.T * scale + shift).astype(np.float32),
            (directions.astype(float) @ matrix.T).astype(np.float32),
        )
        np.testing.assert_array_equal(found[~close], expected[~close])


def test_many_threads_give_the_answers_of_one(engine: str) -> None:
    vertices, triangles = random_scene(3, "boxes")
    caster: Caster = build(vertices, triangles, engine)  # type: ignore[arg-type]
    origins, directions = rays(3, 4000)
    expected = caster.blocked_each(origins, directions)
    with ThreadPoolExecutor(4) as pool:
        for found in pool.map(lambda _: caster.blocked_each(origins, directions), range(8)):
            np.testing.assert_array_equal(found, expected)


def test_nothing_stands_in_an_empty_scene(engine: str) -> None:
    caster = build(np.empty((0, 3)), np.empty((0, 3), dtype=np.int32), engine)  # type: ignore[arg-type]
    origins, directions = rays(0, 5)
    assert not caster.blocked(origins, UP).any()
    assert not caster.blocked_each(origins, directions).any()
    assert (caster.first(origins, directions) == -1).all()


def test_no_rays_no_answers_and_flat_triangles_do_no_harm(engine: str) -> None:
    vertices = np.array([[0.0, 0, 5], [1, 0, 5], [2, 0, 5], [-5, -5, 6], [5, -5, 6], [0, 5, 6]])
    caster = build(vertices, np.array([[0, 1, 2], [3, 4, 5]], dtype=np.int32), engine)  # type: ignore[arg-type]
    assert len(caster.blocked(np.empty((0, 3), dtype=np.float32), UP)) == 0
    np.testing.assert_array_equal(caster.blocked(np.array([[0, 0, 0], [9, 9, 0]], dtype=np.float32), UP), [True, False])


def test_the_order_keeps_groups_together_and_loses_nobody() -> None:
    random = np.random.default_rng(0)
    points, group = random.uniform(-9, 9, (500, 3)), random.integers(0, 5, 500)
    order = coherent_order(points, group)
    np.testing.assert_array_equal(np.sort(order), np.arange(500))
    assert (np.diff(group[order]) >= 0).all()
    walked = np.linalg.norm(np.diff(points[order], axis=0), axis=1).sum()
    assert walked < 0.6 * np.linalg.norm(np.diff(points[np.argsort(group, kind="stable")], axis=0), axis=1).sum()
    assert len(coherent_order(points[:0], group[:0])) == 0


def test_embree_asked_for_where_it_is_not(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("insol.casting.engines.has_embree", lambda: False)
    with pytest.raises(MissingPackage, match=r"embree is not installed. pip install embreex, or --engine numpy"):
        build(np.empty((0, 3)), np.empty((0, 3), dtype=np.int32), "embree")
    assert build(np.empty((0, 3)), np.empty((0, 3), dtype=np.int32), "auto").engine == "numpy"
