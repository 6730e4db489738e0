"""Shadows on level ground held against their closed forms, drawn with shapely.

A point at height z throws its shadow z / tan(altitude) away from the sun (common practice, no
source). So the shadow of an upright body is its plan swept along one vector; that of a profile
drawn out along an axis is the profile's own shadow swept along the axis; that of a convex body is
the hull of its corners' shadows.
"""

from __future__ import annotations

from collections.abc import Callable
from datetime import UTC, datetime
from itertools import pairwise
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import shapely
from builders import Solid, arch, box, ell, gable, make_study, pole
from numpy.typing import NDArray
from pvlib.solarposition import spa_python

import insol
from insol.casting.engines import build
from insol.scene.assemble import load_scene
from insol.study.description import GroundMeasure, Period, Site

SITE = Site(latitude=47.4, longitude=8.5, time_zone="Europe/Zurich", elevation_m=430)
INSTANTS = ("2025-03-20 07:10", "2025-06-21 11:25", "2025-09-03 15:40", "2025-12-21 13:05")
"""UTC: altitudes of 8 to 66 degrees, morning and afternoon."""

HEIGHT_M = 1e-3
"""The rays begin this far above the ground, as in a run: the shadows are drawn on that level."""

Shadow = Callable[[NDArray[np.float64]], shapely.Geometry]


def swept(polygon: shapely.Polygon, vector: NDArray[np.float64]) -> shapely.Geometry:
    """What a polygon passes over on its way along a vector."""
    corners = np.asarray(polygon.exterior.coords)
    sides = [shapely.Polygon([a, b, b + vector, a + vector]).convex_hull for a, b in pairwise(corners)]
    return shapely.union_all([polygon, shapely.transform(polygon, lambda at: at + vector), *sides])


def away_m(direction: NDArray[np.float64], height: float) -> NDArray[np.float64]:
    """Where the shadow of a point at a height lies from its foot [m]."""
    return -direction[:2] / direction[2] * (height - HEIGHT_M)


def upright(plan: list[tuple[float, float]], height: float) -> Shadow:
    return lambda direction: swept(shapely.Polygon(plan), away_m(direction, height))


def corner_hull(solid: Solid) -> Shadow:
    def shadow(direction: NDArray[np.float64]) -> shapely.Geometry:
        standing = solid[0] + [0, 0, HEIGHT_M] * (solid[0][:, 2:] == 0)  # what lies below the level throws none on it
        return shapely.MultiPoint([at[:2] + away_m(direction, at[2]) for at in standing]).convex_hull

    return shadow


def along_y(profile: list[tuple[float, float]], start: float, end: float) -> Shadow:
    def shadow(direction: NDArray[np.float64]) -> shapely.Geometry:
        cast = shapely.Polygon([np.array([x, start]) + away_m(direction, z) for x, z in profile])
        return swept(cast, np.array([0.0, end - start]))

    return shadow


ARCH = {"span": 3.0, "pier": 0.8, "spring": 2.5, "height": 5.0}


def arch_profile() -> list[tuple[float, float]]:
    """The same arch, its feet on the level of the ground points."""
    angles = np.linspace(np.pi, 0, 17)
    head = [(1.5 * np.cos(a), 2.5 + 1.5 * np.sin(a)) for a in angles]
    low = HEIGHT_M
    return [(-2.3, low), (-1.5, low), *head, (1.5, low), (2.3, low), (2.3, 5.0), (-2.3, 5.0)]


CASES: dict[str, tuple[Solid, Shadow]] = {
    "pole": (pole(0, 0, 12.0), upright([(-0.05, -0.05), (0.05, -0.05), (0.05, 0.05), (-0.05, 0.05)], 12.0)),
    "box": (box(-4, -3, 0, 4, 3, 9), upright([(-4, -3), (4, -3), (4, 3), (-4, 3)], 9.0)),
    "ell": (ell(-5, -5, 12, 4, 7), upright([(-5, -5), (7, -5), (7, -1), (-1, -1), (-1, 7), (-5, 7)], 7.0)),
    "arch": (arch(0, -0.4, 0.4, **ARCH), along_y(arch_profile(), -0.4, 0.4)),
    "gable": (gable(-4, -6, 4, 6, 5, 9), corner_hull(gable(-4, -6, 4, 6, 5, 9))),
}


def sun_at(instant: str) -> NDArray[np.float64]:
    """Unit vector to the sun from pvlib's SPA, +y to the north."""
    position = spa_python(
        pd.DatetimeIndex([pd.Timestamp(instant, tz="UTC")]), SITE.latitude, SITE.longitude,
        altitude=SITE.elevation_m, delta_t=None,
    )  # fmt: skip
    altitude, azimuth = np.radians(position["elevation"].iloc[0]), np.radians(position["azimuth"].iloc[0])
    return np.array([np.cos(altitude) * np.sin(azimuth), np.cos(altitude) * np.cos(azimuth), np.sin(altitude)])


def ground_points(shadow: shapely.Geometry) -> tuple[NDArray[np.float64], NDArray[np.bool_]]:
    """Points around a shadow, and whether each lies in it: a grid, and both sides of the edge a millimetre off it."""
    x0, y0, x1, y1 = shadow.buffer(3).bounds
    grid = np.stack(np.meshgrid(np.arange(x0, x1, 0.41), np.arange(y0, y1, 0.37)), axis=-1).reshape(-1, 2)
    beside = [
        shapely.get_coordinates(shapely.segmentize(shadow.buffer(off, join_style="mitre"), 0.5))
        for off in (-1e-3, 1e-3)
    ]
    points = np.concatenate([grid, *beside])
    clear = shapely.distance(shapely.points(points), shadow.boundary) > 0.9e-3
    points = points[clear]
    return points, shapely.contains_xy(shadow, points[:, 0], points[:, 1])


@pytest.mark.parametrize("instant", INSTANTS)
@pytest.mark.parametrize("name", CASES)
def test_a_cast_finds_the_closed_form_to_a_millimetre(name: str, instant: str, engine: str, tmp_path: Path) -> None:
    solid, shadow_of = CASES[name]
    scene = load_scene(make_study(tmp_path, {name: solid}, [], [], SITE))
    direction = sun_at(instant)
    points, inside = ground_points(shadow_of(direction))
    assert inside.sum() > 20
    assert (~inside).sum() > 20
    origins = np.column_stack([points, np.full(len(points), HEIGHT_M)]) - scene.origin
    caster = build(scene.vertices, scene.triangles, engine)
    assert np.array_equal(caster.blocked(origins.astype(np.float32), direction), inside)


def test_the_shadow_of_a_pole_is_as_long_as_its_height_over_the_tangent() -> None:
    """The closed form itself, held to the plain rule: 12 m at 13:05 UTC on the shortest day."""
    direction = sun_at(INSTANTS[3])
    tip = max(np.hypot(*corner) for corner in CASES["pole"][1](direction).exterior.coords)
    altitude = np.arcsin(direction[2])
    # The far corner of the pole's square top lies half a diagonal farther out at the most; a level of 1 mm.
    assert tip == pytest.approx(12.0 / np.tan(altitude), rel=0, abs=0.05 * np.sqrt(2) + HEIGHT_M / np.tan(altitude))


@pytest.mark.parametrize("name", ["ell", "gable", "arch"])
def test_a_run_draws_the_closed_form_at_every_hour(name: str, tmp_path: Path) -> None:
    """Spells of the cells of a square, read at seven instants of a day."""
    solid, shadow_of = CASES[name]
    square = ((-20.0, -20.0), (20.0, -20.0), (20.0, 20.0), (-20.0, 20.0))
    study = make_study(
        tmp_path, {name: solid},
        [GroundMeasure(name="square", polygon=square, spacing_m=0.8)],
        [Period(name="day", days="04-10", year=2025, step_min=5)], SITE,
    )  # fmt: skip
    results = insol.run(study)
    points = results.faces.points[:, :2] + results.scene.origin[:2]
    spells = results.periods[0].spells
    measured = np.isfinite(results.periods[0].direct_h)
    for hour in (6, 8, 10, 11, 13, 15, 16):
        moment = datetime(2025, 4, 10, hour, 20, tzinfo=UTC)
        during = (spells.begin <= moment.timestamp()) & (moment.timestamp() < spells.end)
        lit = np.bincount(spells.receptor[during], minlength=len(points)) > 0
        shadow = shadow_of(sun_at(moment.strftime("%Y-%m-%d %H:%M")))
        # An edge is found to a second, in which a shadow's edge moves some centimetres when the sun is low.
        clear = shapely.distance(shapely.points(points), shadow.boundary) > 0.05
        held = measured & clear
        assert held.sum() > 0.9 * measured.sum()
        assert np.array_equal(lit[held], ~shapely.contains_xy(shadow, *points[held].T))
