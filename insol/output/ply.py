"""Coloured meshes as binary PLY: unwelded, colours on vertices and faces, values as scalar properties.

Many viewers show only the colours of vertices, so no two triangles share one. Coordinates are
written in double precision: in a national grid single precision would move them by decimetres.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from itertools import count
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from insol.errors import ResultError

TYPES = {"<f8": "double", "<f4": "float", "<i4": "int", "|u1": "uchar"}

END = "end_header"
"""Nowhere else in a header: readers there are that look for it in the middle of a comment."""

PLAIN = ("size", "corners", "red", "green", "blue")
"""Columns of a face that are no values."""


@dataclass(frozen=True)
class ColouredMesh:
    """What a file of ours holds."""

    triangles: NDArray[np.float64]  # (t, 3, 3)
    colours: NDArray[np.uint8]  # (t, 3)
    values: dict[str, NDArray]  # (t,) each, by property


def write_ply(
    path: Path,
    triangles: NDArray[np.float64],
    colours: NDArray[np.uint8],
    *,
    scalars: Mapping[str, NDArray[np.float64]],
    ints: Mapping[str, NDArray[np.integer]],
    comments: tuple[str, ...] = (),
) -> None:
    """Write triangles with a colour and values each.

    Parameters
    ----------
    triangles : (t, 3, 3) float64, in the model's own frame
    colours : (t, 3) uint8
    scalars : (t,) float each; on faces and on vertices, in single precision
    ints : (t,) int each; on faces
    comments : one line of the header each
    """
    names = _property_names([*scalars, *ints])
    colour = [(channel, "u1") for channel in ("red", "green", "blue")]
    values = [(names[name], "<f4") for name in scalars]
    numbers = [(names[name], "<i4") for name in ints]
    vertex = np.zeros(len(triangles) * 3, dtype=[(axis, "<f8") for axis in "xyz"] + colour + values)
    face = np.zeros(len(triangles), dtype=[("size", "u1"), ("corners", "<i4", 3), *colour, *values, *numbers])
    for number, axis in enumerate("xyz"):
        vertex[axis] = triangles[..., number].ravel()
    for number, (channel, _) in enumerate(colour):
        face[channel] = colours[:, number]
        vertex[channel] = np.repeat(colours[:, number], 3)
    for name, array in scalars.items():
        face[names[name]] = array
        vertex[names[name]] = np.repeat(np.asarray(array, dtype=np.float32), 3)
    for name, numbers_ in ints.items():
        face[names[name]] = numbers_
    face["size"] = 3
    face["corners"] = np.arange(len(triangles) * 3, dtype=np.int32).reshape(-1, 3)
    with path.open("wb") as stream:
        stream.write(_header(vertex.dtype, len(vertex), face.dtype, len(face), comments))
        stream.write(vertex.tobytes())
        stream.write(face.tobytes())


def read_ply(path: Path) -> ColouredMesh:
    """Read a file that `write_ply` wrote.

    Raises
    ------
    ResultError
        It is none, or cut short.
    """
    raw = path.read_bytes()
    head, found, body = raw.partition(f"{END}\n".encode("ascii"))
    if not found or not head.startswith(b"ply\nformat binary_little_endian"):
        raise ResultError("this is not a mesh that insol wrote", where=str(path))
    try:
        counts, dtypes = _read_header(head.decode("ascii", "replace"))
    except (LookupError, ValueError, TypeError):
        raise ResultError("this is not a mesh that insol wrote", where=str(path)) from None
    vertex_bytes = counts["vertex"] * dtypes["vertex"].itemsize
    if len(body) != vertex_bytes + counts["face"] * dtypes["face"].itemsize:
        raise ResultError("the mesh is cut short", where=str(path), hint="run again")
    vertex = np.frombuffer(body[:vertex_bytes], dtype=dtypes["vertex"])
    face = np.frombuffer(body[vertex_bytes:], dtype=dtypes["face"])
    corners = np.stack([vertex[axis] for axis in "xyz"], axis=1)[face["corners"]]
    colours = np.stack([face[channel] for channel in ("red", "green", "blue")], axis=1)
    values = {name: face[name] for name in face.dtype.names or () if name not in PLAIN}
    return ColouredMesh(corners, colours, values)


def _header(vertex: np.dtype, vertices: int, face: np.dtype, faces: int, comments: tuple[str, ...]) -> bytes:
    lines = ["ply", "format binary_little_endian 1.0", *(f"comment {_plain(comment)}" for comment in comments)]
    lines += [f"element vertex {vertices}", *_properties(vertex)]
    lines += [f"element face {faces}", "property list uchar int vertex_indices", *_properties(face)[2:]]
    return ("\n".join(lines) + f"\n{END}\n").encode("ascii")


def _properties(dtype: np.dtype) -> list[str]:
    return [f"property {TYPES.get(dtype[name].base.str, 'list')} {name}" for name in dtype.names or ()]


def _read_header(head: str) -> tuple[dict[str, int], dict[str, np.dtype]]:
    kinds = {name: code for code, name in TYPES.items()}
    counts: dict[str, int] = {}
    fields: dict[str, list[tuple]] = {}
    element = ""
    for line in head.splitlines():
        words = line.split()
        if words[:1] == ["element"]:
            element = words[1]
            counts[element], fields[element] = int(words[2]), []
        elif words[:2] == ["property", "list"]:
            fields[element] += [("size", "u1"), ("corners", "<i4", 3)]
        elif words[:1] == ["property"]:
            fields[element].append((words[2], kinds[words[1]]))
    dtypes = {element: np.dtype(columns) for element, columns in fields.items()}
    missing = {*"xyz"} - {*(dtypes["vertex"].names or ())} | {*PLAIN} - {*(dtypes["face"].names or ())}
    if missing:
        raise KeyError(*missing)
    return counts, dtypes


def _property_names(names: list[str]) -> dict[str, str]:
    """Names that stay one word of plain letters in the header, each different from the others."""
    found: dict[str, str] = {}
    taken = {*"xyz", "vertex_indices", *PLAIN}
    for name in names:
        plain = re.sub(r"[^A-Za-z0-9_]", "_", name).replace(END, "end") or "value"
        word = next(word for number in count(1) if (word := f"{plain}_{number}" if number > 1 else plain) not in taken)
        found[name] = word
        taken.add(word)
    return found


def _plain(text: str) -> str:
    return re.sub(r"[^\x20-\x7e]", "?", text).replace(END, "end-header")
