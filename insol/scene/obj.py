"""Wavefront OBJ, read by ourselves: names of objects, groups and materials, and the polygons, are kept.

A general mesh library loses what the rest of the program lives on: which triangle belongs to the
part a person has named, and which polygon it was cut from.
"""

from __future__ import annotations

import gc
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from itertools import pairwise
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from insol.errors import ModelError
from insol.scene.model import Mesh
from insol.scene.polygons import triangulated


@contextmanager
def _no_collection() -> Iterator[None]:
    """Without the cyclic collector: it would walk millions of strings again and again and free none."""
    was_on = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_on:
            gc.enable()


@dataclass
class Statements:
    """The statements of a file that matter, as tokens, and where they stood."""

    vertices: list[str] = field(default_factory=list)  # three tokens a vertex
    corners: list[str] = field(default_factory=list)  # of all polygons, one after another
    counts: list[int] = field(default_factory=list)  # corners of each polygon
    lines: list[int] = field(default_factory=list)  # line of each polygon
    known: list[int] = field(default_factory=list)  # vertices read before each polygon
    switches: list[tuple[int, tuple[str, str, str]]] = field(default_factory=list)  # polygon, names from there on
    ignored: set[str] = field(default_factory=set)


def read_obj(path: Path) -> Mesh:
    """The mesh of an OBJ file, in its own units and axes.

    Raises
    ------
    ModelError
        A line that cannot be read rightly, or no face in the file.
    """
    with _no_collection():
        statements = _statements(_text_of(path), path)
    if not statements.counts:
        what = "holds points but no faces" if statements.vertices else "holds no faces"
        raise ModelError(what, where=str(path), hint="export the model as a mesh with faces")
    vertices = _vertices(statements, path)
    corners = _corner_indices(statements, len(vertices), path)
    triangles, polygon = triangulated(vertices, corners, np.array(statements.counts))
    part_of_polygon, names, materials = _parts(statements, path.stem)
    notes = (
        [f"{path.name}: {', '.join(sorted(statements.ignored))} left out: no surfaces"] if statements.ignored else []
    )
    return Mesh(vertices, triangles, polygon, part_of_polygon[polygon], names, materials, tuple(notes))


def _text_of(path: Path) -> str:
    """The file as text, whatever common encoding it has."""
    raw = path.read_bytes()
    if raw[:2] in (b"\xff\xfe", b"\xfe\xff"):
        encoding = "utf-16"
    elif raw[:1] == b"\0" or raw[1:2] == b"\0":  # without a mark: every other byte of plain letters is zero
        encoding = "utf-16-be" if raw[:1] == b"\0" else "utf-16-le"
    else:
        encoding = "utf-8-sig"
    try:
        text = raw.decode(encoding)
    except UnicodeDecodeError:
        text = raw.decode("latin-1")
    if "\\" in text:
        text = text.replace("\\\r\n", " ").replace("\\\n", " ")
    return text


def _statements(text: str, path: Path) -> Statements:
    """One pass over the lines. Bound lookups: a million lines are read in a second or two."""
    found = Statements()
    vertices, corners, counts = found.vertices, found.corners, found.counts
    names = ["", "", ""]  # object, group, material
    level = {"o": 0, "g": 1, "usemtl": 2}
    vertex_count = 0
    for number, line in enumerate(text.splitlines(), start=1):
        tokens = line.split()
        if not tokens:
            continue
        key = tokens[0]
        if key == "v":
            if len(tokens) < 4:
                raise ModelError(f'a vertex needs three numbers, not "{line.strip()[:60]}"', where=f"{path}:{number}")
            vertices += tokens[1:4]
            vertex_count += 1
        elif key == "f":
            if len(tokens) < 4:
                raise ModelError(f'a face needs three corners, not "{line.strip()[:60]}"', where=f"{path}:{number}")
            corners += tokens[1:]
            counts.append(len(tokens) - 1)
            found.lines.append(number)
            found.known.append(vertex_count)
        elif key in level:
            names[level[key]] = line.strip()[len(key) :].strip()
            if key == "o":  # a new object starts without the last one's group
                names[1] = ""
            found.switches.append((len(counts), (names[0], names[1], names[2])))
        elif key in ("l", "p", "curv", "surf"):
            found.ignored.add({"l": "lines", "p": "points"}.get(key, "curves and free-form surfaces"))
    return found


def _vertices(statements: Statements, path: Path) -> NDArray[np.float64]:
    """Coordinates (v, 3)."""
    try:
        vertices = np.array(list(map(float, statements.vertices)), dtype=np.float64).reshape(-1, 3)
    except ValueError:
        raise _bad_vertex(statements, path) from None
    if not np.isfinite(vertices).all():
        raise _bad_vertex(statements, path)
    return vertices


def _bad_vertex(statements: Statements, path: Path) -> ModelError:
    for place, token in enumerate(statements.vertices):
        try:
            if np.isfinite(float(token)):
                continue
        except ValueError:
            pass
        hint = "use a decimal point, not a comma" if "," in token else ""
        where = f"{path}: vertex {place // 3 + 1}"
        return ModelError(f'"{token[:40]}" is not a finite number', where=where, hint=hint)
    raise AssertionError("no bad vertex")


def _corner_indices(statements: Statements, count: int, path: Path) -> NDArray[np.int64]:
    """Vertex of each corner, counted from 0; negative numbers count back from the vertices read so far."""
    tokens = statements.corners
    if any("/" in token for token in tokens):
        tokens = [token.partition("/")[0] for token in tokens]
    try:
        written = np.array(list(map(int, tokens)), dtype=np.int64)
    except (ValueError, OverflowError):
        place = next(n for n, token in enumerate(tokens) if not _is_index(token))
        raise _bad_corner(statements, place, path, "is not the number of a vertex") from None
    known = np.repeat(np.array(statements.known, dtype=np.int64), statements.counts)
    index = np.where(written < 0, written + known, written - 1)
    bad = np.flatnonzero((index < 0) | (index >= count) | (written == 0))
    if len(bad):
        why = "counts from 1" if written[bad[0]] == 0 else f"is not one of the file's {count} vertices"
        raise _bad_corner(statements, int(bad[0]), path, why)
    return index


def _is_index(token: str) -> bool:
    try:
        return abs(int(token)) < 2**62
    except ValueError:
        return False


def _bad_corner(statements: Statements, place: int, path: Path, why: str) -> ModelError:
    polygon = int(np.searchsorted(np.cumsum(statements.counts), place, side="right"))
    token = statements.corners[place]
    return ModelError(
        f'a face names the vertex "{token[:40]}", which {why}', where=f"{path}:{statements.lines[polygon]}"
    )


def _parts(statements: Statements, stem: str) -> tuple[NDArray[np.int32], tuple[str, ...], tuple[str, ...]]:
    """Part of each polygon, names of the parts, material of each.

    A name joins object, group and material with "/". A level is left out where it is empty or
    repeats the one before; the material, also where its object and group have only one.
    """
    total = len(statements.counts)
    starts = [0, *(polygon for polygon, _ in statements.switches), total]
    levels = [("", "", ""), *(names for _, names in statements.switches)]
    runs = [(first, last, names) for (first, last), names in zip(pairwise(starts), levels, strict=True) if last > first]
    materials_of: dict[tuple[str, str], set[str]] = {}
    for _, _, (object_, group, material) in runs:
        materials_of.setdefault((object_, group), set()).add(material)
    part_of_polygon = np.zeros(total, dtype=np.int32)
    numbers: dict[str, int] = {}
    materials: list[str] = []
    for first, last, (object_, group, material) in runs:
        several = len(materials_of[object_, group]) > 1
        steps = [object_, group if group != object_ else "", material if several else ""]
        name = "/".join(step for step in steps if step) or stem
        if name not in numbers:
            numbers[name] = len(numbers)
            materials.append(material)
        part_of_polygon[first:last] = numbers[name]
    return part_of_polygon, tuple(numbers), tuple(materials)
