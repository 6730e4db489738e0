"""Small solids, their OBJ text, and studies of them: what many tests build on. Nothing here imports `insol.scene`."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from insol.study.description import Measure, Model, Period, Site, Study

Solid = tuple[NDArray[np.float64], list[tuple[int, ...]]]
"""Vertices (v, 3) [m], z up, and polygons that run counter-clockwise seen from outside."""


def prism(outline: ArrayLike, low: float, high: float) -> Solid:
    """An upright body over a counter-clockwise outline (n, 2)."""
    plan = np.asarray(outline, dtype=float)
    n = len(plan)
    vertices = np.concatenate([np.column_stack([plan, np.full(n, z)]) for z in (low, high)])
    return vertices, [*_sides(n), tuple(range(n - 1, -1, -1)), tuple(range(n, 2 * n))]


def extruded(profile: ArrayLike, start: float, end: float) -> Solid:
    """A profile (n, 2) in x and z, counter-clockwise with x to the right, drawn out along y."""
    plan = np.asarray(profile, dtype=float)
    n = len(plan)
    vertices = np.concatenate([np.column_stack([plan[:, 0], np.full(n, y), plan[:, 1]]) for y in (end, start)])
    return vertices, [*_sides(n), tuple(range(n - 1, -1, -1)), tuple(range(n, 2 * n))]


def _sides(n: int) -> list[tuple[int, ...]]:
    return [(i, (i + 1) % n, n + (i + 1) % n, n + i) for i in range(n)]


def box(x0: float, y0: float, z0: float, x1: float, y1: float, z1: float) -> Solid:
    """A body between two corners."""
    return prism([(x0, y0), (x1, y0), (x1, y1), (x0, y1)], z0, z1)


def pole(x: float, y: float, height: float, width: float = 0.1) -> Solid:
    """A square pole on the ground, its middle at x, y."""
    half = width / 2
    return box(x - half, y - half, 0, x + half, y + half, height)


def ell(x: float, y: float, length: float, depth: float, height: float) -> Solid:
    """An L: two wings of the same length and depth that meet in the corner x, y."""
    plan = [(0, 0), (length, 0), (length, depth), (depth, depth), (depth, length), (0, length)]
    return prism(np.array(plan) + [x, y], 0, height)


def gable(x0: float, y0: float, x1: float, y1: float, eaves: float, ridge: float) -> Solid:
    """A house with a saddle roof, its ridge along y."""
    return extruded([(x0, 0), (x1, 0), (x1, eaves), ((x0 + x1) / 2, ridge), (x0, eaves)], y0, y1)


def arch(x: float, y0: float, y1: float, *, span: float, pier: float, spring: float, height: float) -> Solid:
    """A wall with a round-headed opening, its middle at x; `pier` is the width on either side [m]."""
    angles = np.linspace(np.pi, 0, 17)
    head = np.column_stack([x + span / 2 * np.cos(angles), spring + span / 2 * np.sin(angles)])
    left, right = x - span / 2 - pier, x + span / 2 + pier
    foot = [(left, 0), (x - span / 2, 0), *head, (x + span / 2, 0), (right, 0)]
    return extruded([*foot, (right, height), (left, height)], y0, y1)


def court(x0: float, y0: float, x1: float, y1: float, depth: float, height: float) -> Solid:
    """A block around a yard, as deep on every side."""
    outer = np.array([(x0, y0), (x1, y0), (x1, y1), (x0, y1)], dtype=float)
    inner = outer + depth * np.array([(1, 1), (-1, 1), (-1, -1), (1, -1)])
    rings = [(outer, 0.0), (outer, height), (inner, height), (inner, 0.0)]
    vertices = np.concatenate([np.column_stack([plan, np.full(4, z)]) for plan, z in rings])
    polygons = [
        tuple(4 * (r % 4) + c for r, c in ((k, i), (k, (i + 1) % 4), (k + 1, (i + 1) % 4), (k + 1, i)))
        for k in range(4)
        for i in range(4)
    ]
    return vertices, polygons


def slats(
    count: int,
    *,
    pitch: float,
    depth: float,
    thickness: float,
    length: float,
    base: float,
    x: float = 0.0,
    y: float = 0.0,
) -> Solid:
    """Level slats above one another along x, the lowest at `base`."""
    return joined(
        [box(x, y, base + k * pitch, x + length, y + depth, base + k * pitch + thickness) for k in range(count)]
    )


def joined(solids: Sequence[Solid]) -> Solid:
    """Several solids as one."""
    vertices: list[NDArray[np.float64]] = []
    polygons: list[tuple[int, ...]] = []
    count = 0
    for corners, faces in solids:
        vertices.append(corners)
        polygons += [tuple(count + corner for corner in face) for face in faces]
        count += len(corners)
    return np.concatenate(vertices), polygons


def moved(solid: Solid, by: ArrayLike) -> Solid:
    """A solid moved by a vector [m]."""
    return solid[0] + np.asarray(by, dtype=float), solid[1]


def turned(solid: Solid, degrees: float) -> Solid:
    """A solid turned counter-clockwise about the origin, seen from above."""
    return turned_points(solid[0], degrees), solid[1]


def turned_points(points: ArrayLike, degrees: float) -> NDArray[np.float64]:
    """Points (n, 3) turned counter-clockwise about the origin, seen from above."""
    angle = np.radians(degrees)
    matrix = np.array([[np.cos(angle), -np.sin(angle), 0], [np.sin(angle), np.cos(angle), 0], [0, 0, 1]])
    return np.asarray(points, dtype=float) @ matrix.T


def obj_text(parts: dict[str, Solid]) -> str:
    """The solids as objects of an OBJ file, each number with all its digits."""
    lines, count = [], 1
    for name, (vertices, polygons) in parts.items():
        lines.append(f"o {name}")
        lines += [f"v {x!r} {y!r} {z!r}" for x, y, z in vertices.tolist()]
        lines += ["f " + " ".join(str(count + corner) for corner in polygon) for polygon in polygons]
        count += len(vertices)
    return "\n".join(lines) + "\n"


def points_text(points: ArrayLike, azimuth_deg: ArrayLike, tilt_deg: ArrayLike) -> str:
    """A table of points named p000, p001, ... with true azimuths."""
    rows = zip(np.asarray(points, dtype=float).tolist(), np.asarray(azimuth_deg), np.asarray(tilt_deg), strict=True)
    lines = [f"p{n:03},{x!r},{y!r},{z!r},{float(a)!r},{float(t)!r}" for n, ((x, y, z), a, t) in enumerate(rows)]
    return "\n".join(["name,x_m,y_m,z_m,azimuth_deg,tilt_deg", *lines]) + "\n"


def make_study(
    folder: Path,
    parts: dict[str, Solid],
    measures: Sequence[Measure],
    periods: Sequence[Period],
    site: Site,
    **model: Any,
) -> Study:
    """A study of solids, which are written to `folder` as one OBJ file; `model` changes how it is taken."""
    (folder / "model.obj").write_text(obj_text(parts), encoding="utf-8")
    taken = {"units": "m", "up": "z", "role": "proposed", **model}
    return Study(
        title="test",
        site=site,
        models=(Model(file=Path("model.obj"), **taken),),
        measures=tuple(measures),
        periods=tuple(periods),
        folder=folder,
    )
