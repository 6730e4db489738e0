"""What passes on from reading: one file's mesh, and the scene of all of them around a local origin."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from insol.checks import indices_within, read_only
from insol.study.description import Role

Sidedness = Literal["outward", "turned", "two-sided"]
"""How a part's normals were taken: outward as found, turned outward by evidence, or measured on both sides."""


@dataclass(frozen=True)
class Mesh:
    """The triangles of one file, in the file's own units and axes or, once placed, in metres with z up.

    Attributes
    ----------
    vertices : (v, 3) float64
    triangles : (t, 3) int32, indices of vertices
    polygon : (t,) int32, number of the file's polygon that the triangle came from
    part : (t,) int32, index into `part_names`
    part_names : the file's own names of its pieces, unique
    materials : a material name for each part, "" where there is none
    notes : what the reader had to do or to leave out, a line each
    """

    vertices: NDArray[np.float64]
    triangles: NDArray[np.int32]
    polygon: NDArray[np.int32]
    part: NDArray[np.int32]
    part_names: tuple[str, ...]
    materials: tuple[str, ...]
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        set_arrays(self, triangles_of="vertices")


@dataclass(frozen=True)
class Part:
    """A named piece of the scene."""

    name: str  # unique in the scene
    role: Role
    model: str  # the file it came from, as the study names it
    material: str
    sidedness: Sidedness
    doubts: tuple[str, ...] = ()  # plain words, with numbers, on what may be wrong with it


@dataclass(frozen=True)
class Scene:
    """All models together: metres, z up, coordinates relative to `origin`.

    Attributes
    ----------
    origin : (3,) float64 [m], to be added to every output
    vertices : (v, 3) float64 [m], local
    triangles : (t, 3) int32, wound so that the normal points outward where the part has an outside
    polygon : (t,) int32, unique over the scene
    part : (t,) int32, index into `parts`
    parts : Part
    doubts : warnings on the scene as a whole
    """

    origin: NDArray[np.float64]
    vertices: NDArray[np.float64]
    triangles: NDArray[np.int32]
    polygon: NDArray[np.int32]
    part: NDArray[np.int32]
    parts: tuple[Part, ...]
    doubts: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        object.__setattr__(self, "origin", read_only(self.origin, np.float64, (3,), "origin"))
        set_arrays(self, triangles_of="vertices")

    @property
    def extent_m(self) -> float:
        """The largest local coordinate [m]."""
        return float(np.abs(self.vertices).max(initial=0.0))


def set_arrays(mesh: Mesh | Scene, *, triangles_of: str) -> None:
    """Check and freeze the arrays that a mesh and a scene have in common."""
    vertices = read_only(getattr(mesh, triangles_of), np.float64, (None, 3), "vertices")
    triangles = read_only(mesh.triangles, np.int32, (None, 3), "triangles")
    indices_within(triangles, len(vertices), "triangles")
    object.__setattr__(mesh, "vertices", vertices)
    object.__setattr__(mesh, "triangles", triangles)
    for name in ("polygon", "part"):
        object.__setattr__(mesh, name, read_only(getattr(mesh, name), np.int32, (len(triangles),), name))


def triangle_corners(vertices: NDArray[np.float64], triangles: NDArray[np.int32]) -> NDArray[np.float64]:
    """Corners (t, 3, 3) of triangles."""
    return vertices[triangles]


def normals_and_areas(corners: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Unit normals (t, 3) and areas (t,) of triangles (t, 3, 3); a zero normal where there is no area."""
    cross = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
    twice = np.linalg.norm(cross, axis=1)
    normals = np.divide(cross, twice[:, None], out=np.zeros_like(cross), where=twice[:, None] > 0)
    return normals, twice / 2.0
