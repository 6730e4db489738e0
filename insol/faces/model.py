"""The faces that are measured: where a ray begins, which way it may look, whose it is, how it is drawn."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.checks import read_only

MEASURED, COVERED = 0, 1
STATUS_NAMES = ("measured", "covered")
"""`covered`: the face lies against or inside another body, so that no light can reach it."""


@dataclass(frozen=True)
class Faces:
    """Faces of all measures, one after another.

    Attributes
    ----------
    points : (n, 3) float64 [m], local; on the surface, well inside the face
    normals : (n, 3) float64, unit, outward
    areas : (n,) float64 [m²], 0 for a point
    measure : (n,) int32, index into `measure_names`
    part : (n,) int32, index into the scene's parts; -1 where the face belongs to none
    number : (n,) int32, 1, 2, ... within its measure and part: with them it names the face
    status : (n,) uint8, index into STATUS_NAMES
    names : (n,) of str, a point's own name, "" for others
    outlines : (t, 3, 3) float64 [m], local; triangles that draw the faces
    outline_face : (t,) int32, index of the face that a triangle draws, ascending
    measure_names : names of the measures
    spacings : (number of measures,) float64 [m]; 0 for points
    """

    points: NDArray[np.float64]
    normals: NDArray[np.float64]
    areas: NDArray[np.float64]
    measure: NDArray[np.int32]
    part: NDArray[np.int32]
    number: NDArray[np.int32]
    status: NDArray[np.uint8]
    names: tuple[str, ...]
    outlines: NDArray[np.float64]
    outline_face: NDArray[np.int32]
    measure_names: tuple[str, ...]
    spacings: NDArray[np.float64]

    def __post_init__(self) -> None:
        n = len(self.points)
        shapes: dict[str, tuple[type, tuple[int | None, ...]]] = {
            "points": (np.float64, (n, 3)),
            "normals": (np.float64, (n, 3)),
            "areas": (np.float64, (n,)),
            "measure": (np.int32, (n,)),
            "part": (np.int32, (n,)),
            "number": (np.int32, (n,)),
            "status": (np.uint8, (n,)),
            "outlines": (np.float64, (None, 3, 3)),
            "outline_face": (np.int32, (len(self.outlines),)),
            "spacings": (np.float64, (len(self.measure_names),)),
        }
        for name, (dtype, shape) in shapes.items():
            object.__setattr__(self, name, read_only(getattr(self, name), dtype, shape, name))

    def __len__(self) -> int:
        return len(self.points)
