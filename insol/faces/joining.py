"""Joining surfaces that touch or overlap in one plane without sharing an edge.

Storeys that stand on one another with different joints, and bodies that a designer pushed into one
another, leave neighbours in one plane that the mesh does not connect.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely

from insol.conventions import PLANAR_M, WELD_M
from insol.faces.flats import SAME_NORMAL
from insol.faces.frames import Frames, Polygons
from insol.faces.grouping import Floats, Ints, connected_labels, run_starts
from insol.faces.uniting import polygon_parts, united


@dataclass(frozen=True)
class Surfaces:
    """Flat surfaces, in the order of part and file.

    Attributes
    ----------
    polygons : (s,) shapely polygons in the surface's own plane [m]
    frames : the planes; no vertex of the surface stands out above its plane
    thickness : (s,), how far the lowest vertex lies under the plane [m]
    part : (s,), index into the scene's parts
    """

    polygons: Polygons
    frames: Frames
    thickness: Floats
    part: Ints

    def __len__(self) -> int:
        return len(self.part)

    def __getitem__(self, index: Ints) -> Surfaces:
        return Surfaces(self.polygons[index], self.frames[index], self.thickness[index], self.part[index])


def joined_where_they_touch(surfaces: Surfaces) -> Surfaces:
    """Surfaces of one part that touch or overlap in one plane made one; it stands where the first of them stood."""
    first, second = pairs_of_touching_boxes(surfaces)
    first, second = pairs_in_one_plane(surfaces, first, second)
    if not len(first):
        return surfaces
    involved = np.unique(np.concatenate([first, second]))
    labels = connected_labels(len(involved), np.searchsorted(involved, first), np.searchsorted(involved, second))
    alone = np.setdiff1d(np.arange(len(surfaces)), involved)
    together, place = unions(surfaces[involved], labels)
    return merged(surfaces[alone], alone, together, involved[place])


def pairs_of_touching_boxes(surfaces: Surfaces) -> tuple[Ints, Ints]:
    """Pairs of surfaces of one part, each once, whose boxes touch."""
    coordinates, owner = shapely.get_coordinates(surfaces.polygons, return_index=True)
    points = surfaces.frames.raised(owner, coordinates)
    starts = run_starts(owner)
    margin = (WELD_M + surfaces.thickness)[:, None]
    low = np.minimum.reduceat(points, starts) - margin
    high = np.maximum.reduceat(points, starts) + margin
    # Each part is moved to a place of its own in plan, so that one search serves all parts.
    width = float(high[:, 0].max() - low[:, 0].min()) + 1.0
    place = np.unique(surfaces.part, return_inverse=True)[1] * width
    boxes = shapely.box(low[:, 0] + place, low[:, 1], high[:, 0] + place, high[:, 1])
    first, second = shapely.STRtree(boxes).query(boxes)
    near = (first < second) & (low[first, 2] <= high[second, 2]) & (low[second, 2] <= high[first, 2])
    return first[near], second[near]


def pairs_in_one_plane(surfaces: Surfaces, first: Ints, second: Ints) -> tuple[Ints, Ints]:
    """The pairs that face the same way, lie in one plane and touch."""
    normals = surfaces.frames.normals
    alike = np.linalg.norm(normals[first] - normals[second], axis=1) <= SAME_NORMAL
    first, second = first[alike], second[alike]
    moved, low, high = in_frames(surfaces[second], surfaces.frames[first])
    level = (high <= PLANAR_M) & (low >= -PLANAR_M)
    first, second, moved = first[level], second[level], moved[level]
    touching = shapely.dwithin(surfaces.polygons[first], moved, WELD_M)
    return first[touching], second[touching]


def in_frames(surfaces: Surfaces, frames: Frames) -> tuple[Polygons, Floats, Floats]:
    """The polygons (n,) seen in other planes (n,), and their lowest and highest corner above those [m]."""
    coordinates, owner = shapely.get_coordinates(surfaces.polygons, return_index=True)
    points = surfaces.frames.raised(owner, coordinates)
    height = np.einsum("ij,ij->i", points - frames.origins[owner], frames.normals[owner])
    low, high = np.full(len(surfaces), np.inf), np.full(len(surfaces), -np.inf)
    np.minimum.at(low, owner, height)
    np.maximum.at(high, owner, height)
    moved = shapely.set_coordinates(surfaces.polygons.copy(), frames.flattened(owner, points))
    return moved, low, high


def unions(surfaces: Surfaces, labels: Ints) -> tuple[Surfaces, Ints]:
    """Each label's surfaces as one, in the plane of the first, and which that is.

    Where together they are no plane they stay apart.
    """
    order = np.argsort(labels, kind="stable")
    starts = run_starts(labels[order])
    leader = order[starts]
    moved, low, high = in_frames(surfaces, surfaces.frames[leader[labels]])
    lift = np.maximum.reduceat(high[order], starts)
    sink = np.minimum.reduceat((low - surfaces.thickness)[order], starts)
    flat = (lift <= PLANAR_M) & (sink >= -2.0 * PLANAR_M)
    members = [group for group, fits in zip(np.split(order, starts[1:]), flat, strict=True) if fits]
    whole = [united(moved[group]) for group in members]
    pieces, index = polygon_parts(np.array(whole, dtype=object))
    first, lift, sink = leader[flat][index], lift[flat][index], sink[flat][index]
    planes = surfaces.frames[first]
    raised = planes.origins + planes.normals * lift[:, None]
    frames = Frames(raised, planes.along, planes.up, planes.normals)
    together = Surfaces(shapely.orient_polygons(pieces), frames, lift - sink, surfaces.part[first])
    alone = np.flatnonzero(~flat[labels])
    place = np.sort(np.concatenate([alone, first]), kind="stable")
    return merged(surfaces[alone], alone, together, first), place


def merged(one: Surfaces, one_place: Ints, other: Surfaces, other_place: Ints) -> Surfaces:
    """Two lists of surfaces as one, ordered by their places."""
    order = np.argsort(np.concatenate([one_place, other_place]), kind="stable")
    frames = Frames(
        np.concatenate([one.frames.origins, other.frames.origins]),
        np.concatenate([one.frames.along, other.frames.along]),
        np.concatenate([one.frames.up, other.frames.up]),
        np.concatenate([one.frames.normals, other.frames.normals]),
    )
    return Surfaces(
        np.concatenate([one.polygons, other.polygons]),
        frames,
        np.concatenate([one.thickness, other.thickness]),
        np.concatenate([one.part, other.part]),
    )[order]
