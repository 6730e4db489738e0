"""The polygon of a level grid: checked, with every fault named by its corners."""

from __future__ import annotations

import numpy as np
import shapely

from insol.errors import MeasureError
from insol.faces.frames import Frames
from insol.faces.grouping import Floats
from insol.faces.joining import Surfaces
from insol.scene.model import Scene
from insol.study.description import GroundMeasure

SMALLEST_M2 = 1e-6
"""A polygon of less area than this is none [m²]."""


def level_surface(scene: Scene, measure: GroundMeasure) -> Surfaces:
    """The level surface that a ground measure's polygon bounds, its axes the model's own x and y.

    The grid keeps to the model's axes, not to the polygon's longest edge: cells of two polygons, or of
    one polygon whose corner moved, then still lie parallel, and a cell can be found again from its
    coordinates.

    Raises
    ------
    MeasureError
        The polygon has fewer than three corners, no area, a corner twice, or crosses itself.
    """
    corners = checked_corners(measure)
    local = corners - scene.origin[:2]
    polygon = shapely.orient_polygons(shapely.Polygon(local))
    low = local.min(axis=0)
    placed = shapely.set_coordinates(np.array([polygon]), shapely.get_coordinates(polygon) - low)
    origin = np.array([[low[0], low[1], measure.height_m - scene.origin[2]]])
    axes = np.eye(3)[:, None]
    return Surfaces(placed, Frames(origin, axes[0], axes[1], axes[2]), np.zeros(1), np.full(1, -1))


def checked_corners(measure: GroundMeasure) -> Floats:
    """The corners (k, 2) of a ground measure's polygon, when they bound one simple area."""
    where = f'measure "{measure.name}", key polygon'
    if len(measure.polygon) < 3:
        raise MeasureError(f"{len(measure.polygon)} corners bound no area; at least 3 are needed", where=where)
    corners = np.array(measure.polygon, dtype=np.float64)
    unfit = np.flatnonzero(~np.isfinite(corners).all(axis=1))
    if len(unfit):
        raise MeasureError(f"corner {unfit[0] + 1} is not a pair of finite numbers", where=where)
    refuse_repeats(corners, where)
    refuse_crossings(corners, where)
    area = float(shapely.area(shapely.Polygon(corners - corners[0])))
    if area < SMALLEST_M2:
        raise MeasureError("the corners lie on one line and bound no area", where=where)
    return corners


def refuse_repeats(corners: Floats, where: str) -> None:
    """Refuse a corner that is there twice."""
    _, first, label = np.unique(corners, axis=0, return_index=True, return_inverse=True)
    earlier = first[label.reshape(-1)]
    again = np.flatnonzero(earlier != np.arange(len(corners)))
    if not len(again):
        return
    one, other = int(earlier[again[0]]), int(again[0])
    closing = one == 0 and other == len(corners) - 1
    raise MeasureError(
        f"corner {other + 1} repeats corner {one + 1} at {at(corners[one])}",
        where=where,
        hint="leave the last corner out, the polygon closes itself" if closing else "",
    )


def refuse_crossings(corners: Floats, where: str) -> None:
    """Refuse sides that meet anywhere but at the corner between them."""
    count = len(corners)
    base = corners - corners[0]
    sides = shapely.linestrings(np.stack([base, np.roll(base, -1, axis=0)], axis=1))
    first, second = shapely.STRtree(sides).query(sides, predicate="intersects")
    apart = (second - first) % count
    meet = (first < second) & (apart > 1) & (apart < count - 1)
    back = (first < second) & ~meet  # neighbours may fold back on one another
    overlap = shapely.length(shapely.intersection(sides[first], sides[second])) > 0.0
    faults = np.flatnonzero(meet | (back & overlap))
    if not len(faults) or shapely.area(shapely.MultiPoint(base).convex_hull) < SMALLEST_M2:
        return
    one, other = min((int(first[fault]), int(second[fault])) for fault in faults)
    place = shapely.get_coordinates(shapely.intersection(sides[one], sides[other]))[0] + corners[0]
    raise MeasureError(
        f"the side from corner {one + 1} to {(one + 1) % count + 1} meets the side from corner {other + 1} "
        f"to {(other + 1) % count + 1} at {at(place)}",
        where=where,
        hint="a polygon may not cross or touch itself",
    )


def at(place: Floats) -> str:
    """A place in the plan as a message shows it."""
    return f"({place[0]:.10g}, {place[1]:.10g})"
