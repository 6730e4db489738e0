"""A mesh file read into named parts, whatever its format."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from insol.errors import ModelError, did_you_mean, listed
from insol.scene.bodies import bodies_of, welded
from insol.scene.formats import read_with_trimesh
from insol.scene.model import Mesh
from insol.scene.obj import read_obj

FORMATS = (".obj", ".stl", ".ply", ".off", ".glb", ".gltf")


def read_mesh(path: Path) -> Mesh:
    """The mesh of a file, in the file's own units and axes, equal vertices welded.

    Raises
    ------
    ModelError
        No such file, no format that is read, or nothing in it that can be measured.
    """
    ending = path.suffix.lower()
    if path.is_dir():
        raise ModelError("this is a folder, not a mesh file", where=str(path))
    if not path.is_file():
        near = did_you_mean(path.name, [p.name for p in path.parent.iterdir()]) if path.parent.is_dir() else ""
        raise ModelError("there is no such file", where=str(path), hint=near)
    if ending not in FORMATS:
        raise ModelError(f'"{ending}" files are not read; allowed: {listed(FORMATS)}', where=str(path))
    try:
        if path.stat().st_size == 0:
            raise ModelError("the file is empty", where=str(path))
        mesh = read_obj(path) if ending == ".obj" else read_with_trimesh(path)
    except OSError as failure:
        raise ModelError(f"cannot be read: {failure.strerror}", where=str(path)) from failure
    return named_bodies(welded(mesh), path.stem)


def named_bodies(mesh: Mesh, stem: str) -> Mesh:
    """A mesh that names nothing, split into its connected bodies: "<stem>-001", "<stem>-002", ..."""
    if mesh.part_names != (stem,):
        return mesh
    body = bodies_of(mesh.triangles)
    count = int(body.max(initial=0)) + 1
    if count == 1:
        return mesh
    digits = max(3, len(str(count)))
    names = tuple(f"{stem}-{number:0{digits}d}" for number in range(1, count + 1))
    note = f"{stem} names no parts: its {count} connected bodies are taken as parts"
    return Mesh(
        mesh.vertices, mesh.triangles, mesh.polygon, body.astype(np.int32), names,
        mesh.materials * count, (*mesh.notes, note),
    )  # fmt: skip
