"""Five scenes on which hours are held against the truth, each with its place, its days and what is measured."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from pathlib import Path

import numpy as np
from builders import Solid, arch, box, court, ell, gable, joined, make_study, moved, pole, prism, slats, turned
from main_job.truth import Minutes, sun_minutes, triangles_of

from insol.study.description import FacesMeasure, GroundMeasure, Measure, Period, Site, Study


@dataclass(frozen=True)
class TestScene:
    """Solids on a place, the faces that are measured, and the days."""

    __test__ = False  # its name only sounds like one

    parts: dict[str, Solid]
    site: Site
    measures: Sequence[Measure]
    period: Period
    first: date
    last: date
    window: tuple[int, int] = (0, 24)
    taken: int = 45  # faces that are held against the truth

    def study(self, folder: Path) -> Study:
        return make_study(folder, self.parts, self.measures, [self.period], self.site)

    def triangles(self) -> np.ndarray:
        return triangles_of(list(self.parts.values()))

    def minutes(self) -> Minutes:
        return sun_minutes(
            self.site.latitude, self.site.longitude, zone=self.site.time_zone, first=self.first, last=self.last,
            elevation_m=self.site.elevation_m, north_deg=self.site.north_deg, window=self.window,
        )  # fmt: skip


def courtyard() -> TestScene:
    """A block around a yard with a shed in it, in the middle latitudes, on an equinox."""
    return TestScene(
        parts={"court": court(0, 0, 40, 34, 11, 15), "shed": box(17, 12, 0, 22, 16, 3)},
        site=Site(latitude=52.5, longitude=13.4, time_zone="Europe/Berlin", elevation_m=35, north_deg=12),
        measures=[
            FacesMeasure(name="walls", parts=("*",), spacing_m=2.0),
            GroundMeasure(name="yard", polygon=((11, 11), (29, 11), (29, 23), (11, 23)), spacing_m=1.5),
        ],
        period=Period(name="day", days="03-20", year=2025),
        first=date(2025, 3, 20),
        last=date(2025, 3, 20),
    )


def street() -> TestScene:
    """A street between two rows, askew, in the southern hemisphere, over the month of midwinter."""
    return TestScene(
        parts={
            "left": box(-14, -60, 0, 0, 60, 16),
            "right": joined([box(12, -60, 0, 26, -8, 12), box(12, 2, 0, 26, 60, 19)]),
        },
        site=Site(latitude=-33.87, longitude=151.2, time_zone="Australia/Sydney", elevation_m=20, north_deg=-37),
        measures=[
            FacesMeasure(name="walls", parts=("left",), spacing_m=4.0),
            GroundMeasure(name="floor", polygon=((0, -20), (12, -20), (12, 20), (0, 20)), spacing_m=2.0),
        ],
        period=Period(name="month", days="06-01/06-30", year=2025, step_min=10),
        first=date(2025, 6, 1),
        last=date(2025, 6, 30),
    )


def tower_and_row() -> TestScene:
    """A tower with cut corners south of a row of houses, midwinter, from nine to three."""
    tower = prism([(3, 0), (15, 0), (18, 3), (18, 15), (15, 18), (3, 18), (0, 15), (0, 3)], 0, 46)
    row = joined([gable(-20 + 8 * k, 34, -12 + 8 * k, 46, 6 + k % 3, 10 + k % 3) for k in range(7)])
    return TestScene(
        parts={"tower": tower, "row": row, "mast": pole(-6, 28, 18, 0.4)},
        site=Site(latitude=40.0, longitude=-3.7, time_zone="Europe/Madrid", elevation_m=650),
        measures=[
            FacesMeasure(name="houses", parts=("row",), spacing_m=1.5),
            FacesMeasure(name="tower", parts=("tower",), spacing_m=4.0),
            GroundMeasure(name="gardens", polygon=((-20, 22), (36, 22), (36, 33), (-20, 33)), spacing_m=2.0),
        ],
        period=Period(name="window", days="12-21", year=2025, start="09:00", end="15:00"),
        first=date(2025, 12, 21),
        last=date(2025, 12, 21),
        window=(9, 15),
        taken=60,
    )


def gable_town() -> TestScene:
    """Gabled houses turned every way around an L, at 60 degrees north, on the longest day."""
    houses = {
        f"house-{k}": moved(turned(gable(-4, -6, 4, 6, 5, 9.5), 37.0 * k), (18 * np.cos(k), 18 * np.sin(k), 0))
        for k in range(6)
    }
    return TestScene(
        parts={"ell": ell(-6, -6, 12, 5, 8), **houses},
        site=Site(latitude=60.2, longitude=24.9, time_zone="Europe/Helsinki", elevation_m=10, north_deg=200),
        measures=[FacesMeasure(name="all", parts=("*",), spacing_m=2.0)],
        period=Period(name="midsummer", days="06-21", year=2025, step_min=15),
        first=date(2025, 6, 21),
        last=date(2025, 6, 21),
        taken=60,
    )


def slats_and_arcade() -> TestScene:
    """Sun-breakers before a wall and an arcade beside it, near the equator: many short spells."""
    arcade = joined([moved(arch(0, 0, 0.8, span=3, pier=0.6, spring=2.6, height=5), (4.2 * k, 0, 0)) for k in range(4)])
    return TestScene(
        parts={
            "wall": box(0, 6, 0, 12, 9, 9),
            "slats": slats(12, pitch=0.6, depth=0.4, thickness=0.06, length=12, base=1.2, y=5.5),
            "arcade": arcade,
        },
        site=Site(latitude=1.35, longitude=103.8, time_zone="Asia/Singapore", north_deg=90),
        measures=[
            FacesMeasure(name="wall", parts=("wall",), spacing_m=0.8),
            GroundMeasure(name="walk", polygon=((-2, 0.9), (14, 0.9), (14, 5), (-2, 5)), spacing_m=0.8),
        ],
        period=Period(name="day", days="09-10", year=2025, step_min=5),
        first=date(2025, 9, 10),
        last=date(2025, 9, 10),
    )


SCENES = (courtyard, street, tower_and_row, gable_town, slats_and_arcade)
