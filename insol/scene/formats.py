"""Formats that trimesh reads well: STL, PLY, OFF, GLB and glTF."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from insol.errors import ModelError
from insol.scene.model import Mesh


def read_with_trimesh(path: Path) -> Mesh:
    """The mesh of a file, in its own units and axes; named nodes and solids become parts.

    Raises
    ------
    ModelError
        The file cannot be read, holds no faces, or coordinates that are no numbers.
    """
    scene = _loaded(path)
    vertices, triangles, part = [], [], []
    names: list[str] = []
    materials: list[str] = []
    offset = 0
    for node in scene.graph.nodes_geometry:
        transform, geometry_name = scene.graph[node]
        geometry = scene.geometry[geometry_name]
        faces = np.asarray(getattr(geometry, "faces", np.empty((0, 3))), dtype=np.int64)
        if not len(faces):
            continue
        corners = np.asarray(geometry.vertices, dtype=np.float64)
        if not np.isfinite(corners).all():
            raise ModelError("holds coordinates that are not finite numbers", where=str(path))
        if faces.min() < 0 or faces.max() >= len(corners):
            raise ModelError("a face names a vertex that is not there", where=str(path))
        vertices.append(corners @ transform[:3, :3].T + transform[:3, 3])
        triangles.append((faces[:, ::-1] if np.linalg.det(transform[:3, :3]) < 0 else faces) + offset)
        part.append(np.full(len(faces), len(names)))
        names.append(_name_of(str(node), str(geometry_name), path))
        materials.append(_material_of(geometry))
        offset += len(corners)
    if not triangles:
        raise ModelError("holds no faces", where=str(path), hint="export the model as a mesh with faces")
    return _joined(np.concatenate(vertices), np.concatenate(triangles), np.concatenate(part), names, materials)


def _loaded(path: Path) -> Any:
    import trimesh

    try:
        return trimesh.load_scene(path, process=False)
    except Exception as failure:  # the readers raise whatever their formats make them stumble on
        reason = str(failure).strip().splitlines()[0] if str(failure).strip() else type(failure).__name__
        raise ModelError(f"cannot be read as {path.suffix[1:].upper()}: {reason[:120]}", where=str(path)) from failure


def _name_of(node: str, geometry: str, path: Path) -> str:
    """The node's name; the file's stem where the library made one up from the file's name."""
    name = node or geometry
    return path.stem if name in (path.name, "geometry_0", "world") else name


def _material_of(geometry: Any) -> str:
    material = getattr(getattr(geometry, "visual", None), "material", None)
    return str(getattr(material, "name", "") or "")


def _joined(
    vertices: NDArray[np.float64],
    triangles: NDArray[np.int64],
    part: NDArray[np.int64],
    names: list[str],
    materials: list[str],
) -> Mesh:
    """One mesh; nodes of one name are one part."""
    unique = list(dict.fromkeys(names))
    number = np.array([unique.index(name) for name in names], dtype=np.int32)
    material = tuple(materials[names.index(name)] for name in unique)
    polygon = np.arange(len(triangles), dtype=np.int32)
    return Mesh(vertices, triangles.astype(np.int32), polygon, number[part], tuple(unique), material)
