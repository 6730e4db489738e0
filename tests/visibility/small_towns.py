"""Random scenes that are hard on a sampler: columns, slits, slats, blocks; and receptors among them."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from builders import Solid, box, make_study, points_text, pole, slats

from insol.faces.model import COVERED, MEASURED
from insol.pipeline import Prepared, prepare
from insol.study.description import GroundMeasure, Period, PointsMeasure, Site
from insol.visibility.receptors import Receptors, receptors_of

SITES = (
    Site(latitude=52.0, longitude=9.0, time_zone="Europe/Berlin", north_deg=17.0),
    Site(latitude=-33.9, longitude=18.4, time_zone="Africa/Johannesburg"),
    Site(latitude=12.0, longitude=-61.7, time_zone="-04:00", north_deg=-40.0),
)


@dataclass(frozen=True)
class SmallTown:
    """A prepared scene with a few dozen receptors on walls of all directions and on the ground."""

    prepared: Prepared
    receptors: Receptors


def parts_of(kind: str, random: np.random.Generator) -> dict[str, Solid]:
    """Solids of one kind around an empty middle of twenty metres."""
    parts: dict[str, Solid] = {}
    if kind == "blocks":
        for number in range(8):
            turn = number * np.pi / 4
            x, y = 22 * np.cos(turn) + random.uniform(-3, 3), 22 * np.sin(turn) + random.uniform(-3, 3)
            width, depth = random.uniform(5, 12, 2)
            low, high = (x - width / 2, y - depth / 2), (x + width / 2, y + depth / 2)
            parts[f"block-{number}"] = box(*low, 0, *high, random.uniform(6, 30))
    elif kind == "columns":
        for number in range(24):
            turn = number * np.pi / 12
            parts[f"column-{number}"] = pole(14 * np.cos(turn), 14 * np.sin(turn), 12, random.uniform(0.2, 0.8))
    elif kind == "slits":
        for number in range(10):
            gap = random.uniform(0.3, 1.5)
            parts[f"slab-{number}"] = box(-30 + 6 * number, 12, 0, -24 + 6 * number - gap, 14, random.uniform(12, 24))
            parts[f"far-{number}"] = box(-30 + 6 * number, -16, 0, -24 + 6 * number - gap, -14, random.uniform(8, 16))
    else:
        pitch = random.uniform(0.5, 1.0)
        for number in range(int(24 / pitch)):
            y = -12 + number * pitch
            parts[f"beam-{number}"] = box(-15, y, 3.6, 15, y + 0.2, 3.9)
        parts["louvres"] = slats(8, pitch=0.5, depth=0.3, thickness=0.05, length=30, base=0.4, x=-15, y=-14)
    return parts


def small_town(folder: Path, kind: str, seed: int, period: Period, count: int = 40) -> SmallTown:
    """A scene of a kind, with receptors drawn at random."""
    random = np.random.default_rng(seed)
    n = 16
    table = folder / "points.csv"
    turn = np.arange(n) * 360.0 / n
    points = random.uniform((-8, -5, 0.5), (8, 5, 3), (n, 3))
    table.write_text(points_text(points, turn, np.full(n, 90.0)), encoding="utf-8")
    study = make_study(
        folder,
        parts_of(kind, random),
        [
            PointsMeasure(name="points", file=Path("points.csv")),
            GroundMeasure(name="ground", polygon=((-10, -8), (10, -8), (10, 7), (-10, 7)), spacing_m=1.0),
        ],
        [period],
        SITES[seed % len(SITES)],
    )
    prepared = prepare(study)
    faces = prepared.faces
    status = np.full(len(faces), COVERED, dtype=np.uint8)
    status[:n] = MEASURED
    status[n + random.choice(len(faces) - n, count - n, replace=False)] = MEASURED
    some = replace(faces, status=status)
    return SmallTown(prepared, receptors_of(some, extent_m=prepared.scene.extent_m, stand_off_m=1e-3))
