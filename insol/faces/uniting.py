"""Joining polygons that meet or overlap, whatever rounding did to the places where they meet."""

from __future__ import annotations

import numpy as np
import shapely

from insol.conventions import WELD_M
from insol.faces.frames import Polygons
from insol.faces.grouping import Ints, near_labels, run_starts


def united(polygons: Polygons) -> shapely.Geometry:
    """The union of polygons (n,), in which corners within WELD_M of one another or of a side are one.

    A corner of one polygon on the side of another is put into that side first. Joining on a fine grid
    instead leaves slits now and then, since it moves corners and sides apart.
    """
    corners = shapely.get_coordinates(polygons)
    labels = near_labels(corners, WELD_M)
    order = np.argsort(labels, kind="stable")
    places = shapely.points(corners[order[run_starts(labels[order])]])
    owner, place = near_borders(polygons, places)
    targets = shapely.multipoints(places[place], indices=owner)
    return shapely.union_all(polygon_repaired(shapely.snap(polygons, targets, WELD_M)))


def near_borders(polygons: Polygons, places: Polygons) -> tuple[Ints, Ints]:
    """Pairs of a polygon, ascending, and a place that lies on its border."""
    borders = shapely.boundary(polygons)
    owner, place = shapely.STRtree(places).query(borders, predicate="dwithin", distance=WELD_M)
    order = np.lexsort((place, owner))
    return owner[order], place[order]


def polygon_repaired(polygons: Polygons) -> Polygons:
    """Polygons made valid where they are not, as slim ones may be whose corners were moved."""
    broken = ~shapely.is_valid(polygons)
    polygons[broken] = shapely.make_valid(polygons[broken])
    return polygons


def polygon_parts(geometries: Polygons) -> tuple[Polygons, Ints]:
    """The polygons within geometries of any kind, and the geometry of each."""
    parts, index = shapely.get_parts(geometries, return_index=True)
    nested = shapely.get_type_id(parts) == shapely.GeometryType.MULTIPOLYGON
    if nested.any():
        parts, inner = shapely.get_parts(parts, return_index=True)
        index = index[inner]
    wanted = (shapely.get_type_id(parts) == shapely.GeometryType.POLYGON) & (shapely.area(parts) > 0.0)
    return parts[wanted], index[wanted].astype(np.int64)
