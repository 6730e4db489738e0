"""Which axis of a mesh points up, by what buildings have in common."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from insol.scene.model import normals_and_areas
from insol.study.description import Up

LEVEL_OR_UPRIGHT = 0.02
"""A normal so close to an axis, or to a right angle with it, belongs to a level or an upright surface."""

CLEAR_DIFFERENCE = 0.15
"""Shares that differ by less tell nothing: a box along the axes looks the same from all sides."""

MOST_OF_IT = 0.5
"""A share below this tells nothing: floors that are parts of their own do not stand on one level."""

FEWEST_PARTS = 4


def likely_up(vertices: NDArray[np.float64], triangles: NDArray[np.int32], part: NDArray[np.int32]) -> Up | None:
    """The axis, y or z, that points up; None where the mesh does not tell.

    Walls are upright and floors level whichever way a building faces: about the axis that points
    up nearly all area is one or the other. Where all lies along the axes, the parts' bases tell:
    they stand on one level.
    """
    corners = vertices[triangles]
    for shares in (_level_or_upright(corners), _on_one_level(corners, part)):
        if abs(shares[1] - shares[2]) >= CLEAR_DIFFERENCE and max(shares[1], shares[2]) >= MOST_OF_IT:
            return "y" if shares[1] > shares[2] else "z"
    return None


def _level_or_upright(corners: NDArray[np.float64]) -> NDArray[np.float64]:
    """Share of area (3,) that is level or upright, were each axis the one that points up."""
    normals, areas = normals_and_areas(corners)
    along = np.abs(normals)
    fits = (along < LEVEL_OR_UPRIGHT) | (along > 1 - LEVEL_OR_UPRIGHT)
    return np.asarray(areas @ fits) / max(float(areas.sum()), 1e-300)


def _on_one_level(corners: NDArray[np.float64], part: NDArray[np.int32]) -> NDArray[np.float64]:
    """Share of parts (3,) whose least coordinate along each axis is about the same."""
    present, index = np.unique(part, return_inverse=True)
    if len(present) < FEWEST_PARTS:
        return np.zeros(3)
    bases = np.full((len(present), 3), np.inf)
    np.minimum.at(bases, index, corners.min(axis=1))
    size = np.maximum(np.ptp(corners, axis=(0, 1)), 1e-300)
    return np.asarray((np.abs(bases - np.median(bases, axis=0)) < 0.05 * size).mean(axis=0))
