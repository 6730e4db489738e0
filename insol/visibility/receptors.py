"""Receptors: the points that rays begin from, in the order in which they are cast."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.casting.order import coherent_order
from insol.checks import read_only
from insol.conventions import stand_off
from insol.faces.model import MEASURED, Faces

SAME_ORIENTATION = 1e-6
"""Normals that differ by less than this in every coordinate are one orientation: 0.2 arc seconds."""


@dataclass(frozen=True)
class Receptors:
    """Points off their surface, sorted by orientation and then along a space-filling curve.

    Attributes
    ----------
    face : (n,) int64, index of the face that a receptor stands for
    origins : (n, 3) float32 [m], local, moved off the surface
    orientation : (n,) int32, index into `normals`, ascending
    normals : (k, 3) float64, the different unit normals
    """

    face: NDArray[np.int64]
    origins: NDArray[np.float32]
    orientation: NDArray[np.int32]
    normals: NDArray[np.float64]

    def __post_init__(self) -> None:
        n = len(self.face)
        object.__setattr__(self, "face", read_only(self.face, np.int64, (n,), "face"))
        object.__setattr__(self, "origins", read_only(self.origins, np.float32, (n, 3), "origins"))
        object.__setattr__(self, "orientation", read_only(self.orientation, np.int32, (n,), "orientation"))
        object.__setattr__(self, "normals", read_only(self.normals, np.float64, (None, 3), "normals"))

    def __len__(self) -> int:
        return len(self.face)

    def piece(self, first: int, last: int) -> Receptors:
        """The receptors from `first` up to `last`, with the orientations that occur among them."""
        return self.chosen(np.arange(first, last))

    def chosen(self, which: NDArray[np.int64]) -> Receptors:
        """The receptors at ascending places, with the orientations that occur among them."""
        present, orientation = np.unique(self.orientation[which], return_inverse=True)
        return Receptors(
            face=self.face[which],
            origins=self.origins[which],
            orientation=orientation.reshape(-1).astype(np.int32),
            normals=self.normals[present],
        )

    def segments(self, within: slice | None = None) -> Iterator[tuple[int, slice]]:
        """Each orientation that occurs (in a part of the receptors) with the run of those that have it."""
        first, last = (within.start, within.stop) if within is not None else (0, len(self))
        starts = first + np.flatnonzero(np.diff(self.orientation[first:last], prepend=-1))
        for start, end in zip(starts, np.append(starts, last)[1:], strict=True):
            yield int(self.orientation[start]), slice(int(start), int(end))


def receptors_of(faces: Faces, *, extent_m: float, stand_off_m: float) -> Receptors:
    """The measured faces' points, moved off their surface and put in the order of casting.

    Parameters
    ----------
    extent_m : the largest coordinate of the scene [m], which float32 has to hold
    stand_off_m : how far the rays begin before their face [m]
    """
    measured = np.flatnonzero(faces.status == MEASURED)
    normals = faces.normals[measured]
    _, kept, orientation = np.unique(
        np.round(normals / SAME_ORIENTATION).astype(np.int64), axis=0, return_index=True, return_inverse=True
    )
    orientation = orientation.reshape(-1)
    points = faces.points[measured] + normals * stand_off(extent_m, stand_off_m)
    order = coherent_order(points, orientation)
    return Receptors(
        face=measured[order],
        origins=points[order].astype(np.float32),
        orientation=orientation[order].astype(np.int32),
        normals=normals[kept],
    )
