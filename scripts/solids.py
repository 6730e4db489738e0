"""Solids and sheets of which the sample models are made, and their writing as OBJ.

A shape is vertices (v, 3) in metres, z up, and polygons of any number of corners that run
counter-clockwise seen from outside.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import ArrayLike, NDArray


@dataclass(frozen=True)
class Shape:
    """Vertices (v, 3) [m] and the corners of each polygon."""

    vertices: NDArray[np.float64]
    polygons: tuple[tuple[int, ...], ...]


def joined(*shapes: Shape) -> Shape:
    """Several shapes as one."""
    firsts = np.cumsum([0] + [len(shape.vertices) for shape in shapes])
    return Shape(
        np.concatenate([shape.vertices for shape in shapes]),
        tuple(
            tuple(int(first) + corner for corner in polygon)
            for first, shape in zip(firsts, shapes, strict=False)
            for polygon in shape.polygons
        ),
    )


def turned(shape: Shape, degrees: float, about: tuple[float, float]) -> Shape:
    """A shape turned counter-clockwise about a vertical axis."""
    angle, centre = np.radians(degrees), np.array([*about, 0.0])
    matrix = np.array([[np.cos(angle), -np.sin(angle), 0], [np.sin(angle), np.cos(angle), 0], [0, 0, 1]])
    return Shape((shape.vertices - centre) @ matrix.T + centre, shape.polygons)


def rectangle(x0: float, y0: float, x1: float, y1: float) -> list[tuple[float, float]]:
    """The outline of a rectangle in plan, counter-clockwise."""
    return [(x0, y0), (x1, y0), (x1, y1), (x0, y1)]


def regular(sides: int, radius: float, centre: tuple[float, float]) -> list[tuple[float, float]]:
    """The outline of a regular polygon."""
    angles = (np.arange(sides) + 0.5) * 2 * np.pi / sides
    return [(centre[0] + radius * np.cos(a), centre[1] + radius * np.sin(a)) for a in angles]


def ring(low: ArrayLike, high: ArrayLike) -> Shape:
    """The quads between two rings (n, 3) of as many corners, the lower one first."""
    low, high = np.asarray(low, dtype=float), np.asarray(high, dtype=float)
    n = len(low)
    return Shape(np.concatenate([low, high]), tuple((i, (i + 1) % n, n + (i + 1) % n, n + i) for i in range(n)))


def cap(outline: ArrayLike, *, facing_up: bool) -> Shape:
    """One polygon over a ring (n, 3) that runs counter-clockwise seen from above."""
    corners = np.asarray(outline, dtype=float)
    order = range(len(corners)) if facing_up else range(len(corners) - 1, -1, -1)
    return Shape(corners, (tuple(order),))


def at_height(outline: ArrayLike, z: float) -> NDArray[np.float64]:
    """A plan outline (n, 2) as a level ring (n, 3)."""
    plan = np.asarray(outline, dtype=float)
    return np.column_stack([plan, np.full(len(plan), z)])


def prism(outline: ArrayLike, low: float, high: float) -> Shape:
    """An upright body with level top and bottom."""
    below, above = at_height(outline, low), at_height(outline, high)
    return joined(ring(below, above), cap(above, facing_up=True), cap(below, facing_up=False))


def box(x0: float, y0: float, z0: float, x1: float, y1: float, z1: float) -> Shape:
    """A body between two corners."""
    return prism(rectangle(x0, y0, x1, y1), z0, z1)


def court(
    outer: Sequence[tuple[float, float]],
    inner: Sequence[tuple[float, float]],
    low: float,
    high: float,
    *,
    lean: float = 0.0,
) -> Shape:
    """A block around a courtyard; its two outlines are rectangles. Its walls lean inward by `lean` [m]."""
    steps = lean * np.array([(1, 1), (-1, 1), (-1, -1), (1, -1)])
    out_low, in_low = at_height(outer, low), at_height(inner, low)
    out_high, in_high = at_height(np.array(outer) + steps, high), at_height(np.array(inner) - steps, high)
    return joined(ring(out_low, out_high), ring(out_high, in_high), ring(in_high, in_low), ring(in_low, out_low))


def pointed(outline: ArrayLike, low: float, eaves: float, apex: float) -> Shape:
    """An upright body under a pyramid, a cone or a spire."""
    below, above = at_height(outline, low), at_height(outline, eaves)
    n = len(below)
    top = np.array([[*above[:, :2].mean(axis=0), apex]])
    roof = Shape(np.concatenate([above, top]), tuple((i, (i + 1) % n, n) for i in range(n)))
    return joined(ring(below, above), roof, cap(below, facing_up=False))


def extruded(profile: ArrayLike, start: float, end: float, *, along: str) -> Shape:
    """A vertical profile drawn out along an axis.

    Parameters
    ----------
    profile : (n, 2), the other level axis and z, counter-clockwise with that axis drawn to the right
    start, end : where on the axis it begins and ends
    along : "x" or "y"
    """
    plan = np.asarray(profile, dtype=float)
    if along == "y":  # seen against this axis, x runs to the left
        plan = plan[::-1]
    rings = []
    for at in (start, end):
        axis = np.full(len(plan), at)
        across, up = plan.T
        rings.append(np.column_stack([axis, across, up] if along == "x" else [across, axis, up]))
    n = len(plan)
    ends = (tuple(range(n - 1, -1, -1)), tuple(range(n, 2 * n)))
    return Shape(np.concatenate(rings), ring(*rings).polygons + ends)


def gabled(x0: float, y0: float, x1: float, y1: float, eaves: float, ridge: float, *, along: str) -> Shape:
    """A house with a saddle roof whose ridge runs along an axis."""
    first, last = (y0, y1) if along == "x" else (x0, x1)
    profile = [(first, 0), (last, 0), (last, eaves), ((first + last) / 2, ridge), (first, eaves)]
    return extruded(profile, *((x0, x1) if along == "x" else (y0, y1)), along=along)


def arc(centre: float, spring: float, radius: float, pieces: int) -> list[tuple[float, float]]:
    """A half circle from its left foot over the crown to its right, both feet included."""
    angles = np.linspace(np.pi, 0, pieces + 1)
    return [(centre + radius * np.cos(a), spring + radius * np.sin(a)) for a in angles]


Named = dict[str, Shape]
"""Shapes by the name of their part: "building/piece", or "building" alone."""


def obj_text(parts: Named, heading: Sequence[str], *, mm_y_up: bool = False) -> str:
    """An OBJ file: a building is an object, its pieces are groups; metres with z up, or millimetres with y up."""
    lines = [f"# {line}" for line in heading]
    count, building = 1, ""
    for name, shape in parts.items():
        this, _, piece = name.partition("/")
        if this != building:
            lines.append(f"o {this}")
            building = this
        lines.append(f"g {piece or building}")  # a group holds until the next, also over a new object
        vertices, polygons = merged(shape)
        if mm_y_up:
            vertices = np.column_stack([vertices[:, 0], vertices[:, 2], -vertices[:, 1]]) * 1000
        lines += ["v " + " ".join(number(value) for value in vertex) for vertex in vertices]
        lines += ["f " + " ".join(str(count + corner) for corner in polygon) for polygon in polygons]
        count += len(vertices)
    return "\n".join(lines) + "\n"


def number(value: float) -> str:
    """Four decimals without idle zeros: a tenth of a millimetre in a file of metres."""
    return f"{round(value, 4) + 0.0:.4f}".rstrip("0").rstrip(".")


def merged(shape: Shape) -> tuple[NDArray[np.float64], list[tuple[int, ...]]]:
    """A shape with every vertex once, in the order of first use."""
    seen: dict[tuple[float, ...], int] = {}
    index = [seen.setdefault(tuple(np.round(vertex, 6) + 0.0), len(seen)) for vertex in shape.vertices]
    return np.array(list(seen)), [tuple(index[corner] for corner in polygon) for polygon in shape.polygons]


def write(path: Path, text: str) -> None:
    """Write a text file with the same bytes on every system."""
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(text, encoding="utf-8", newline="\n")
