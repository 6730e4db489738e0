"""Units and axes: every mesh in metres, z up; and what its size would be in each unit."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from insol.conventions import METRES_PER_UNIT
from insol.scene.model import Mesh
from insol.study.description import UNITS, Units, Up

PLAUSIBLE_HEIGHT_M = (2.0, 900.0)
"""Between a garden wall and the tallest towers that stand."""

PLAUSIBLE_WIDTH_M = (2.0, 50_000.0)
"""Between a hut and a region."""


def place(mesh: Mesh, units: Units, up: Up) -> Mesh:
    """The mesh in metres with z up; with y up, the file's z points to the viewer and becomes -y."""
    vertices = mesh.vertices * METRES_PER_UNIT[units]
    if up == "y":
        vertices = np.stack([vertices[:, 0], -vertices[:, 2], vertices[:, 1]], axis=1)
    return replace(mesh, vertices=vertices)


@dataclass(frozen=True)
class Extent:
    """The size of a mesh were its numbers in one unit."""

    units: Units
    size_m: tuple[float, float, float]  # along the file's x, y, z [m]
    plausible: bool  # for buildings, whichever of y and z is up


def extents_in_each_unit(mesh: Mesh) -> tuple[Extent, ...]:
    """What the file's numbers would mean in each unit that a study can name."""
    used = mesh.vertices[np.unique(mesh.triangles)]
    size = used.max(axis=0) - used.min(axis=0)
    return tuple(_extent(size, units) for units in UNITS)


def _extent(size: NDArray[np.float64], units: Units) -> Extent:
    metres = size * METRES_PER_UNIT[units]
    width = float(metres.max())
    height = float(min(metres[1], metres[2]))
    plausible = within(width, PLAUSIBLE_WIDTH_M) and within(height, PLAUSIBLE_HEIGHT_M)
    return Extent(units, (float(metres[0]), float(metres[1]), float(metres[2])), plausible)


def within(value: float, bounds: tuple[float, float]) -> bool:
    """Whether a value lies between two bounds."""
    return bounds[0] <= value <= bounds[1]
