"""What `insol check` says of models, parts, measures, and of what is doubtful in them."""

from __future__ import annotations

import re
from collections.abc import Sequence
from pathlib import Path

import numpy as np

from insol.cli.layout import count, metres, paragraph, sizes, table
from insol.cli.up_axis import likely_up
from insol.faces.model import COVERED, Faces
from insol.scene.health import PartHealth
from insol.scene.model import Mesh, Scene
from insol.scene.placing import extents_in_each_unit
from insol.study.description import FacesMeasure, GroundMeasure, Measure, Study

MOST_PARTS = 30
MOST_DOUBTS = 15
MOST_ALIKE = 3
SIDES = {"outward": "outward", "turned": "turned outward", "two-sided": "both sides"}


def models_lines(study: Study, scene: Scene, health: Sequence[PartHealth]) -> list[str]:
    """Every file, how it is taken, and its size in metres once it stands upright."""
    rows = [("file", "role", "taken as", "parts", "triangles", "size in metres, x y z")]
    for model in study.models:
        mine = [numbers for part, numbers in zip(scene.parts, health, strict=True) if part.model == str(model.file)]
        rows.append((
            str(model.file), model.role, f"{model.units}, {model.up} up", f"{len(mine):,}",
            f"{sum(numbers.triangles for numbers in mine):,}", sizes(_box(mine)),
        ))  # fmt: skip
    if len(study.models) > 1:
        rows.append(("together", "", "", f"{len(health):,}", f"{len(scene.triangles):,}", sizes(_box(health))))
    return ["", "Models", table(rows, right=(3, 4))]


def parts_lines(scene: Scene, health: Sequence[PartHealth], every: bool) -> list[str]:
    """The parts with their size, and on which side they are measured."""
    rows = [("part", "role", "triangles", "size in metres, x y z", "area m²", "measured")]
    shown = len(health) if every else MOST_PARTS
    for part, numbers in list(zip(scene.parts, health, strict=True))[:shown]:
        rows.append((
            part.name, part.role, f"{numbers.triangles:,}", sizes(numbers.size_m), f"{numbers.area_m2:,.1f}",
            SIDES[part.sidedness],
        ))  # fmt: skip
    return ["", "Parts", table(rows, right=(2, 4)), *_more(len(health) - shown, "part")]


def measures_lines(study: Study, faces: Faces) -> list[str]:
    """What is measured: faces, their area, and how many are covered."""
    rows = [("measure", "what", "spacing", "faces", "area m²", "covered")]
    for index, measure in enumerate(study.measures):
        mine = faces.measure == index
        covered = int((faces.status[mine] == COVERED).sum())
        area = float(faces.areas[mine].sum())
        rows.append((
            measure.name, what_is_measured(measure), spacing_of(measure), f"{int(mine.sum()):,}",
            f"{area:,.1f}" if area else "-", f"{covered:,}",
        ))  # fmt: skip
    return ["", "Measures", table(rows, right=(3, 4, 5))]


def what_is_measured(measure: Measure) -> str:
    """The choice of a measure in words."""
    if isinstance(measure, FacesMeasure):
        chosen = [f"parts {' '.join(measure.parts)}"] if measure.parts else []
        return "faces of " + " and ".join([*chosen, *([f"role {' '.join(measure.roles)}"] if measure.roles else [])])
    if isinstance(measure, GroundMeasure):
        if measure.parts:
            return f"ground over parts {' '.join(measure.parts)}"
        return f"level ground at {metres(measure.height_m)} m in {len(measure.polygon)} corners"
    return f"points of {measure.file}"


def spacing_of(measure: Measure) -> str:
    """The spacing as people read it."""
    if not isinstance(measure, (FacesMeasure, GroundMeasure)):
        return "-"
    return f"{measure.spacing_m:g} m" if measure.spacing_m else "as modelled"


def axis_doubts(study: Study, scene: Scene) -> list[str]:
    """Models whose walls do not stand upright as the study takes them."""
    names = np.array([part.model for part in scene.parts], dtype=object)[scene.part]
    doubts = []
    for model in study.models:
        mine = names == str(model.file)
        # The scene stands upright already: z is what the study takes for up, y is the other one.
        if mine.any() and likely_up(scene.vertices, scene.triangles[mine], scene.part[mine]) == "y":
            other = "z" if model.up == "y" else "y"
            taken = f"{model.file}: taken with {model.up} up, but its walls stand along {other}"
            doubts.append(f'{taken}: is up = "{other}"?')
    return doubts


def part_doubts(scene: Scene, every: bool) -> list[str]:
    """What is doubtful in parts; a doubt that many of them share is said once, of the worst."""
    alike: dict[str, list[tuple[str, str]]] = {}
    for part in scene.parts:
        for doubt in part.doubts:
            alike.setdefault(re.sub(r"\d+", "#", doubt), []).append((part.name, doubt))
    said = []
    for group in alike.values():
        if every or len(group) <= MOST_ALIKE:
            said += [f"{name}: {doubt}" for name, doubt in group]
        else:
            name, doubt = max(group, key=lambda pair: _first_number(pair[1]))
            said.append(f"{len(group):,} parts, most of all {name}: {doubt}")
    return said


def _first_number(text: str) -> int:
    found = re.search(r"\d+", text)
    return int(found[0]) if found else 0


def doubts_lines(doubts: Sequence[str], every: bool) -> list[str]:
    """The doubts as warnings."""
    if not doubts:
        return ["", "Nothing looks doubtful."]
    shown = len(doubts) if every else MOST_DOUBTS
    lines = [paragraph(doubt, first="  warning: ", indent="    ") for doubt in doubts[:shown]]
    return ["", "Doubts", *lines, *_more(len(doubts) - shown, "warning")]


def file_lines(path: Path, mesh: Mesh, every: bool) -> list[str]:
    """What a mesh file holds, and its size in every unit that it might be in."""
    parts, triangles = count(len(mesh.part_names), "part"), count(len(mesh.triangles), "triangle")
    up = likely_up(mesh.vertices, mesh.triangles, mesh.part)
    said = f"its walls or bases say that {up} is up" if up else "which axis is up, it does not tell"
    rows = [("if in", "size in metres, along the file's x y z", "")]
    rows += [
        (extent.units, sizes(extent.size_m), "as large as buildings are" if extent.plausible else "")
        for extent in extents_in_each_unit(mesh)
    ]
    shown = len(mesh.part_names) if every else MOST_PARTS
    triangle_counts = np.bincount(mesh.part, minlength=len(mesh.part_names))
    listed = [("part", "triangles", "material")]
    for name, number, material in list(zip(mesh.part_names, triangle_counts, mesh.materials, strict=True))[:shown]:
        listed.append((name, f"{number:,}", material))
    return [
        f"{path}: {parts}, {triangles}; {said}",
        table(rows),
        "",
        table(listed, right=(1,)),
        *_more(len(mesh.part_names) - shown, "part"),
        *(paragraph(note, first="  note: ", indent="    ") for note in mesh.notes),
    ]


def _box(health: Sequence[PartHealth]) -> tuple[float, float, float]:
    low = np.min([numbers.low_m for numbers in health], axis=0)
    high = np.max([numbers.high_m for numbers in health], axis=0)
    return float(high[0] - low[0]), float(high[1] - low[1]), float(high[2] - low[2])


def _more(number: int, what: str) -> list[str]:
    return [f"  and {count(number, 'more ' + what)}; --all lists them"] if number > 0 else []
