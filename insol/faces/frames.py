"""A surface's own plane: level to the right, up the slope, out of the surface."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray

from insol.faces.grouping import Flags, Floats, Ints, largest_of_each

LEVEL_TILT_DEG = 1.0
"""A surface tilted less than this has no slope that anyone would draw a grid along: a flat roof's fall."""

SAME_LENGTH = 1e-6
"""Edges whose lengths differ by less than this share of them are equally long."""

Polygons = NDArray[np.object_]


@dataclass(frozen=True)
class Frames:
    """Planes in space.

    Attributes
    ----------
    origins : (s, 3) [m], local
    along, up, normals : (s, 3), unit, right-handed in this order
    """

    origins: Floats
    along: Floats
    up: Floats
    normals: Floats

    def __getitem__(self, index: Ints | slice) -> Frames:
        return Frames(self.origins[index], self.along[index], self.up[index], self.normals[index])

    def flattened(self, frame: Ints, points: Floats) -> Floats:
        """Coordinates (n, 2) in their frame of points (n, 3) in space."""
        away = points - self.origins[frame]
        axes = np.stack([self.along[frame], self.up[frame]], axis=1)
        flat: Floats = np.einsum("nki,ni->nk", axes, away)
        return flat

    def raised(self, frame: Ints, coordinates: Floats) -> Floats:
        """Points (n, 3) in space of coordinates (n, 2) in their frame."""
        across = self.along[frame] * coordinates[:, :1]
        return self.origins[frame] + across + self.up[frame] * coordinates[:, 1:]

    def turned_and_moved(self, turn: Floats, corner: Floats) -> Frames:
        """Frames turned counter-clockwise by an angle (s,) [rad] about a new origin (s, 2)."""
        cosine, sine = np.cos(turn)[:, None], np.sin(turn)[:, None]
        moved = self.raised(np.arange(len(corner)), corner)
        along, up = self.along * cosine + self.up * sine, self.up * cosine - self.along * sine
        return Frames(moved, along, up, self.normals)


def frames_of(origins: Floats, normals: Floats) -> Frames:
    """Frames (s,) with level and upslope axes; those of level surfaces run along the model's x axis."""
    level = is_level(normals)
    sideways = np.stack([-normals[:, 1], normals[:, 0], np.zeros(len(normals))], axis=-1)
    x_axis = np.array([1.0, 0.0, 0.0])
    in_plane = x_axis - normals * normals[:, :1]
    along = np.where(level[:, None], in_plane, sideways)
    along /= np.linalg.norm(along, axis=1, keepdims=True)
    return Frames(origins, along, np.cross(normals, along), normals)


def is_level(normals: Floats) -> Flags:
    """Whether surfaces with these normals are level, facing up or down."""
    level: Flags = np.hypot(normals[:, 0], normals[:, 1]) < np.sin(np.radians(LEVEL_TILT_DEG))
    return level


def settled(polygons: Polygons, frames: Frames) -> tuple[Polygons, Frames]:
    """The same polygons in frames with the polygon's lower left corner at (0, 0).

    Level surfaces are turned so that their axis runs along their longest edge.
    """
    turn = np.where(is_level(frames.normals), longest_edge_angles(polygons), 0.0)
    coordinates, owner = shapely.get_coordinates(polygons, return_index=True)
    cosine, sine = np.cos(turn)[owner], np.sin(turn)[owner]
    across, upward = coordinates.T
    turned = np.stack([across * cosine + upward * sine, upward * cosine - across * sine], axis=-1)
    settled_polygons = shapely.set_coordinates(polygons.copy(), turned)
    corner = shapely.bounds(settled_polygons)[:, :2]
    shapely.set_coordinates(settled_polygons, turned - corner[owner])
    back = np.stack(
        [
            corner[:, 0] * np.cos(turn) - corner[:, 1] * np.sin(turn),
            corner[:, 0] * np.sin(turn) + corner[:, 1] * np.cos(turn),
        ],
        axis=-1,
    )
    return settled_polygons, frames.turned_and_moved(turn, back)


def longest_edge_angles(polygons: Polygons) -> Floats:
    """The direction of each polygon's longest edge, in [0, pi) [rad]; of equally long ones the least."""
    start, end, owner = edges_of(polygons)
    length = np.linalg.norm(end - start, axis=1)
    angle = np.arctan2(end[:, 1] - start[:, 1], end[:, 0] - start[:, 0]) % np.pi
    angle[angle > np.pi - SAME_LENGTH] = 0.0
    _, longest = largest_of_each(owner, length)
    contender = length >= length[longest][owner] * (1.0 - SAME_LENGTH)
    least = np.full(len(polygons), np.pi)
    np.minimum.at(least, owner[contender], angle[contender])
    return least


def edges_of(polygons: Polygons) -> tuple[Floats, Floats, Ints]:
    """Starts (e, 2) and ends (e, 2) of all edges, the inside at their left, and the polygon of each."""
    rings, owner = shapely.get_rings(polygons, return_index=True)
    coordinates, ring = shapely.get_coordinates(rings, return_index=True)
    within = ring[1:] == ring[:-1]
    return coordinates[:-1][within], coordinates[1:][within], owner[ring[:-1][within]].astype(np.int64)
