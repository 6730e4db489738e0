"""Mending what is safe to mend: triangles laid on others, and slivers that only a rounding made."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from insol.conventions import DEGENERATE_M2, PLANAR_M
from insol.scene.model import Mesh, normals_and_areas


def repaired(mesh: Mesh, name: str) -> Mesh:
    """The mesh, placed in metres, without doubles and slivers; its notes say what was done.

    The file is not touched. Winding is put right on every reading, asked or not.
    """
    doubles = _doubles(mesh)
    slivers = _slivers(mesh.vertices[mesh.triangles]) & ~doubles
    kept = ~(doubles | slivers)
    notes = [
        f"{name}: {int(which.sum())} {what} left out"
        for which, what in ((doubles, "triangles lying on others"), (slivers, "slivers thinner than a millimetre"))
        if which.any()
    ]
    return replace(mesh, triangles=mesh.triangles[kept], polygon=mesh.polygon[kept], part=mesh.part[kept],
                   notes=(*mesh.notes, *notes))  # fmt: skip


def without_degenerate(mesh: Mesh, name: str) -> Mesh:
    """The mesh without triangles that have no area: they face nowhere and shade nothing."""
    _, areas = normals_and_areas(mesh.vertices[mesh.triangles])
    kept = areas > DEGENERATE_M2
    if kept.all():
        return mesh
    note = f"{name}: {int((~kept).sum())} triangles without area left out"
    return replace(mesh, triangles=mesh.triangles[kept], polygon=mesh.polygon[kept], part=mesh.part[kept],
                   notes=(*mesh.notes, note))  # fmt: skip


def _doubles(mesh: Mesh) -> NDArray[np.bool_]:
    """Triangles on the same three vertices as an earlier one of the same part."""
    keys = np.column_stack([mesh.part, np.sort(mesh.triangles, axis=1)])
    _, first = np.unique(keys, axis=0, return_index=True)
    double = np.ones(len(keys), dtype=bool)
    double[first] = False
    return double


def _slivers(corners: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Triangles whose longest side has less than a millimetre of height over it."""
    _, areas = normals_and_areas(corners)
    sides = np.linalg.norm(np.roll(corners, -1, axis=1) - corners, axis=2)
    return np.asarray(2.0 * areas < PLANAR_M * sides.max(axis=1))
