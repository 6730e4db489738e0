"""Hours of `insol.run` held against an exhaustive float64 ray test at one-minute steps, face by face."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import pytest
from builders import make_study, points_text
from main_job.scenes import SCENES, TestScene, gable_town
from main_job.truth import TrueHours, on_surface, sun_minutes, true_hours

import insol
from insol.faces.model import COVERED, MEASURED
from insol.study.description import FacesMeasure, Period, PointsMeasure

HALF_MINUTE_H = 0.5 / 60
"""The truth's own error: an edge lies up to half a step from where a sum over one-minute middles puts it."""

EDGE_H = 1.0 / 3600
"""`insol` finds an edge to a second: conventions.EDGE_SECONDS."""


@dataclass(frozen=True)
class Case:
    """A scene, what `insol` found on it, and the truth of some of its faces."""

    scene: TestScene
    results: insol.Results
    truth: dict[int, TrueHours]  # by index of the face


@cache
def case(name: str, engine: str = "auto") -> Case:
    scene = next(make for make in SCENES if make.__name__ == name)()
    with TemporaryDirectory() as folder:
        results = insol.run(scene.study(Path(folder)), engine=engine)
    triangles, minutes = scene.triangles(), scene.minutes()
    points = results.faces.points + results.scene.origin
    truth = {
        int(face): true_hours(triangles, points[face], results.faces.normals[face], minutes)
        for face in held_faces(results, scene.taken)
    }
    return Case(scene, results, truth)


def held_faces(results: insol.Results, count: int) -> np.ndarray:
    """Faces to hold against the truth: most of those in shade for a part of the time, some others, some covered."""
    dice = np.random.default_rng(20250320)
    order = dice.permutation(len(results.faces))
    status, shaded = results.faces.status[order], results.periods[0].shaded_fraction[order]
    partly = (status == MEASURED) & (shaded > 0.02) & (shaded < 0.98)
    other = (status == MEASURED) & ~partly
    return np.concatenate([order[partly][:count], order[other][:10], order[status == COVERED][:10]])


NAMES = [make.__name__ for make in SCENES]


@pytest.mark.parametrize("name", NAMES)
def test_hours_of_every_face_agree_within_the_stated_error(name: str) -> None:
    found = case(name)
    period = found.results.periods[0]
    off = {
        face: (period.direct_h[face] - true.direct_h, period.error_h[face], true)
        for face, true in found.truth.items()
        if found.results.faces.status[face] == MEASURED
        and abs(period.direct_h[face] - true.direct_h) > period.error_h[face] + true.edges * HALF_MINUTE_H
    }
    assert not off
    assert sum(true.edges > 0 for true in found.truth.values()) >= 20, "too few faces with an edge to say anything"


@pytest.mark.parametrize("name", [name for name in NAMES if name != "street"])
def test_a_day_whose_edges_are_all_found_is_right_to_a_second_for_each(name: str) -> None:
    """Where both count the same spells, only the truth's half minute and the second of each edge are left."""
    found = case(name)
    period = found.results.periods[0]
    spells = np.bincount(period.spells.receptor, minlength=len(found.results.faces))
    same = [face for face, true in found.truth.items() if true.edges == 2 * spells[face]]
    assert len(same) > 0.9 * len(found.truth)
    for face in same:
        true = found.truth[face]
        direct = np.nan_to_num(period.direct_h[face])  # a covered face has none
        assert direct == pytest.approx(true.direct_h, rel=0, abs=max(true.edges, 1) * (HALF_MINUTE_H + EDGE_H))


@pytest.mark.parametrize("name", NAMES)
def test_possible_hours_agree_to_the_minute(name: str) -> None:
    found = case(name)
    period, days = found.results.periods[0], found.results.periods[0].plan.day_count
    for face, true in found.truth.items():
        if found.results.faces.status[face] == MEASURED:
            # Four ends a day: the sun may be in front of a wall twice.
            assert period.possible_h[face] == pytest.approx(true.possible_h, rel=0, abs=4 * days * HALF_MINUTE_H)


@pytest.mark.parametrize("name", NAMES)
def test_faces_lie_on_the_solids_and_look_outward(name: str) -> None:
    found = case(name)
    faces, triangles = found.results.faces, found.scene.triangles()
    kinds = {m.name: m.kind for m in found.scene.measures}
    points = faces.points + found.results.scene.origin
    on_parts = [face for face in found.truth if kinds[faces.measure_names[faces.measure[face]]] == "faces"]
    assert on_parts
    assert all(on_surface(triangles, points[face], faces.normals[face]) for face in on_parts)


def test_covered_faces_have_no_sun_and_there_are_some() -> None:
    hours = [
        true.direct_h
        for name in NAMES
        for face, true in case(name).truth.items()
        if case(name).results.faces.status[face] == COVERED
    ]
    assert len(hours) >= 15
    assert max(hours) == 0.0


def test_a_year_agrees_within_the_stated_error(tmp_path: Path) -> None:
    """Eight points of the gabled town, every minute of 2025."""
    town = gable_town()
    chosen = insol.run(make_study(tmp_path, town.parts, [FacesMeasure(name="f", parts=("*",), spacing_m=5)],
                                  [town.period], town.site))  # fmt: skip
    dice = np.random.default_rng(7)
    shaded = chosen.periods[0].shaded_fraction
    some = dice.permutation(np.flatnonzero((shaded > 0.05) & (shaded < 0.9)))[:8]
    table = chosen.table().iloc[some]
    azimuth = table["azimuth_deg"].fillna(0.0)
    points = chosen.faces.points[some] + chosen.scene.origin
    (tmp_path / "points.csv").write_text(points_text(points, azimuth, table["tilt_deg"]), encoding="utf-8")
    period = Period(name="year", days="year", year=2025, step_min=30)
    measures = [PointsMeasure(name="points", file=Path("points.csv"))]
    results = insol.run(make_study(tmp_path, town.parts, measures, [period], town.site))
    first, last = (
        results.periods[0].plan.intervals.resolved_days[0],
        results.periods[0].plan.intervals.resolved_days[-1],
    )
    minutes = sun_minutes(
        town.site.latitude, town.site.longitude, zone=town.site.time_zone, first=first, last=last,
        elevation_m=town.site.elevation_m, north_deg=town.site.north_deg,
    )  # fmt: skip
    triangles = town.triangles()
    truth = np.array([
        true_hours(triangles, point, normal, minutes).direct_h
        for point, normal in zip(points, chosen.faces.normals[some], strict=True)
    ])  # fmt: skip
    off = np.abs(results.periods[0].direct_h - truth)
    # Half a minute an edge, of either sign, over some thousand edges: far below a tenth of an hour a month.
    assert (off <= results.periods[0].error_h + 1.2).all()
    assert np.median(results.periods[0].error_h / truth) < 0.1, "an error so large says nothing"


@pytest.mark.parametrize("name", NAMES)
def test_both_engines_agree(name: str) -> None:
    pytest.importorskip("embreex")
    scene = case(name).scene
    with TemporaryDirectory() as folder:
        study = scene.study(Path(folder))
        if scene.first != scene.last:  # a month: every half hour of it is enough
            study = replace(study, periods=tuple(replace(period, step_min=30) for period in study.periods))
        embree, plain = (insol.run(study, engine=engine) for engine in ("embree", "numpy"))
    assert (embree.engine, plain.engine) == ("embree", "numpy")
    assert np.array_equal(embree.faces.status, plain.faces.status)
    seconds = 3600 * np.abs(np.nan_to_num(embree.periods[0].direct_h - plain.periods[0].direct_h))
    if embree.periods[0].spells is None:
        # A ray may pass so near an edge that float32 and float64 differ: one interval, on one face in a hundred.
        assert seconds.max() <= 60 * study.periods[0].step_min
        assert (seconds > 1).mean() <= 0.01
    else:
        edges = 2 * np.bincount(embree.periods[0].spells.receptor, minlength=len(seconds))
        assert (seconds <= 2 * np.maximum(edges, 1)).all()  # each finds an edge to a second
