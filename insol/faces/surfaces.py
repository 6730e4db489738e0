"""The surfaces of parts: flat, whole, each a polygon with holes in its own plane."""

from __future__ import annotations

import numpy as np

from insol.faces.boundaries import outline_polygons
from insol.faces.flats import flat_surfaces, height_ranges, mean_normals
from insol.faces.frames import Frames, frames_of, settled
from insol.faces.grouping import Floats, Ints, run_starts
from insol.faces.joining import Surfaces, joined_where_they_touch
from insol.faces.triangles import Triangles, half_edges


def surfaces_of(triangles: Triangles, *, as_modelled: bool = False) -> Surfaces:
    """Join the triangles that touch in one plane; every polygon's lower left corner comes to lie at (0, 0).

    Parameters
    ----------
    as_modelled : keep the file's own polygons apart, even where neighbours lie in one plane
    """
    if not len(triangles):
        return no_surfaces()
    edges = half_edges(triangles)
    labels = flat_surfaces(triangles, edges, as_modelled=as_modelled)
    frames, low, high = planes(triangles, labels)
    in_plane = frames.flattened(np.repeat(labels, 3), triangles.corners.reshape(-1, 3)).reshape(-1, 3, 2)
    polygons, surface = outline_polygons(in_plane, edges, labels)
    # The first triangle of a surface says where in the file it stands.
    begins = np.argsort(labels, kind="stable")[run_starts(np.sort(labels))]
    order = np.argsort(begins[surface], kind="stable")
    surface = surface[order]
    found = Surfaces(polygons[order], frames[surface], (high - low)[surface], triangles.part[begins[surface]])
    if not as_modelled:
        found = joined_where_they_touch(found)
    placed, own_frames = settled(found.polygons, found.frames)
    return Surfaces(placed, own_frames, found.thickness, found.part)


def no_surfaces() -> Surfaces:
    """What triangles without area leave."""
    nothing = np.zeros((0, 3))
    frames = Frames(nothing, nothing, nothing, nothing)
    return Surfaces(np.zeros(0, dtype=object), frames, np.zeros(0), np.zeros(0, dtype=np.int64))


def planes(triangles: Triangles, labels: Ints) -> tuple[Frames, Floats, Floats]:
    """Each surface's plane through its outermost vertex, and its lowest and highest vertex along the normal.

    Rounding in a file moves vertices a little out of their plane; a point on the mean plane might lie
    within the body and see nothing.
    """
    normals = mean_normals(triangles, labels)
    corner, low, high = height_ranges(triangles, labels, normals)
    return frames_of(corner + normals * high[:, None], normals), low, high
