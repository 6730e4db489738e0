"""All models of a study brought together: one frame, one local origin, parts with names of their own."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from insol.casting.engines import build
from insol.errors import ModelError
from insol.scene.health import PartHealth, doubts_of, health_of, scene_doubts
from insol.scene.model import Mesh, Part, Scene, Sidedness, normals_and_areas
from insol.scene.orientation import Turned, turned_outward
from insol.scene.placing import place
from insol.scene.reading import read_mesh
from insol.scene.repair import repaired, without_degenerate
from insol.study.description import Model, Study


@dataclass(frozen=True)
class Merged:
    """The models' triangles one after another, in metres in the model frame."""

    vertices: NDArray[np.float64]
    triangles: NDArray[np.int32]
    polygon: NDArray[np.int32]
    part: NDArray[np.int32]
    names: tuple[str, ...]
    materials: tuple[str, ...]
    model: tuple[int, ...]  # of each part
    notes: tuple[str, ...]


def load_scene(study: Study, *, repair: bool = False) -> Scene:
    """Read every model of a study into one scene.

    Raises
    ------
    ModelError
        A file cannot be read rightly, or holds nothing that has an area.
    """
    return load_scene_and_health(study, repair=repair)[0]


def load_scene_and_health(study: Study, *, repair: bool = False) -> tuple[Scene, tuple[PartHealth, ...]]:
    """The scene of a study, and numbers on each of its parts."""
    merged = _merged(study.models, [_read(model, study, repair) for model in study.models])
    low, high = merged.vertices.min(axis=0), merged.vertices.max(axis=0)
    origin = np.round((low + high) / 2.0)
    local = merged.vertices - origin
    turned = turned_outward(local, merged.triangles, merged.part, build(local, merged.triangles))
    ground = np.array([study.models[model].role == "ground" for model in merged.model])[merged.part]
    turned = _ground_upward(turned, local, ground)
    merged, part_sheets = _sheets_apart(merged, turned.sheet)
    health = health_of(
        merged.vertices, turned.triangles, merged.part, merged.names, flipped=turned.flipped, sheet=turned.sheet
    )
    parts = tuple(
        Part(
            name, study.models[model].role, str(study.models[model].file), material,
            _sidedness(numbers, sheets), doubts_of(numbers),
        )
        for name, model, material, numbers, sheets in zip(
            merged.names, merged.model, merged.materials, health, part_sheets, strict=True
        )
    )  # fmt: skip
    doubts = (*merged.notes, *_model_doubts(study, merged, health))
    return Scene(origin, local, turned.triangles, merged.polygon, merged.part, parts, doubts), health


def _read(model: Model, study: Study, repair: bool) -> Mesh:
    name = str(model.file)
    mesh = without_degenerate(place(read_mesh(study.path_of(model.file)), model.units, model.up), name)
    if repair:
        mesh = repaired(mesh, name)
    if not len(mesh.triangles):
        raise ModelError(
            "holds no triangle with an area", where=str(study.path_of(model.file)),
            hint=f'with units = "{model.units}" everything in it is smaller than a grain of sand; are the units right?',
        )  # fmt: skip
    return mesh


def _merged(models: tuple[Model, ...], meshes: list[Mesh]) -> Merged:
    taken = Counter(name for mesh in meshes for name in set(mesh.part_names))
    clashes = sorted(name for name, times in taken.items() if times > 1)
    names: list[str] = []
    for model, mesh in zip(models, meshes, strict=True):
        names += [f"{model.file.stem}/{name}" if name in clashes else name for name in mesh.part_names]
    notes = [note for mesh in meshes for note in mesh.notes]
    if clashes:
        few = ", ".join(f'"{name}"' for name in clashes[:3]) + (" ..." if len(clashes) > 3 else "")
        notes.append(f"parts of several models are called {few}: the file's name is put before them")
    counts = [(len(mesh.vertices), int(mesh.polygon.max(initial=-1)) + 1, len(mesh.part_names)) for mesh in meshes]
    before = np.cumsum([(0, 0, 0), *counts], axis=0)
    return Merged(
        vertices=np.concatenate([mesh.vertices for mesh in meshes]),
        triangles=np.concatenate([mesh.triangles + n[0] for mesh, n in zip(meshes, before[:-1], strict=True)]),
        polygon=np.concatenate([mesh.polygon + n[1] for mesh, n in zip(meshes, before[:-1], strict=True)]),
        part=np.concatenate([mesh.part + n[2] for mesh, n in zip(meshes, before[:-1], strict=True)]),
        names=tuple(_without_repeats(names)),
        materials=tuple(material for mesh in meshes for material in mesh.materials),
        model=tuple(number for number, mesh in enumerate(meshes) for _ in mesh.part_names),
        notes=tuple(notes),
    )


def _without_repeats(names: list[str]) -> list[str]:
    """Two files of one name may still clash: the later ones are numbered."""
    seen: Counter[str] = Counter()
    unique = []
    for name in names:
        seen[name] += 1
        unique.append(name if seen[name] == 1 else f"{name} ({seen[name]})")
    return unique


def _ground_upward(turned: Turned, vertices: NDArray[np.float64], ground: NDArray[np.bool_]) -> Turned:
    """Open surfaces with the role of ground face up, whatever their winding; they have one side."""
    normals, _ = normals_and_areas(vertices[turned.triangles])
    down = ground & ~turned.closed & (normals[:, 2] < 0)
    triangles = np.where(down[:, None], turned.triangles[:, ::-1], turned.triangles).astype(np.int32)
    return replace(
        turned, triangles=triangles, flipped=turned.flipped ^ down, sheet=turned.sheet & ~(ground & ~turned.closed)
    )


def _sheets_apart(merged: Merged, sheet: NDArray[np.bool_]) -> tuple[Merged, list[bool]]:
    """Parts with both bodies and sheets divided, so that a part is measured on one side or on both."""
    count = len(merged.names)
    sheets = np.bincount(merged.part[sheet], minlength=count)
    total = np.bincount(merged.part, minlength=count)
    mixed = np.flatnonzero((sheets > 0) & (sheets < total))
    moved = np.full(count, -1, dtype=np.int32)
    moved[mixed] = count + np.arange(len(mixed))
    part = np.where(sheet & (moved[merged.part] >= 0), moved[merged.part], merged.part).astype(np.int32)
    divided = replace(
        merged,
        part=part,
        names=merged.names + tuple(f"{merged.names[n]}/sheets" for n in mixed),
        materials=merged.materials + tuple(merged.materials[n] for n in mixed),
        model=merged.model + tuple(merged.model[n] for n in mixed),
    )
    only = (sheets > 0) & (sheets == total)
    return divided, [*only.tolist(), *([True] * len(mixed))]


def _sidedness(health: PartHealth, sheets: bool) -> Sidedness:
    if sheets:
        return "two-sided"
    return "turned" if health.flipped else "outward"


def _model_doubts(study: Study, merged: Merged, health: tuple[PartHealth, ...]) -> tuple[str, ...]:
    model = np.array(merged.model)
    lows, highs = np.array([h.low_m for h in health]), np.array([h.high_m for h in health])
    present = np.unique(model)
    low = np.array([lows[model == n].min(axis=0) for n in present])
    high = np.array([highs[model == n].max(axis=0) for n in present])
    names = tuple(str(study.models[n].file) for n in present)
    return scene_doubts(names, low, high, tuple(study.models[n].units for n in present))
