"""The sample models: what is known of them by hand, and that they are what their maker makes."""

from __future__ import annotations

import re
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

import insol
from insol.casting.engines import build
from insol.faces.make import make_faces
from insol.output.results import PeriodResult
from insol.scene.assemble import load_scene
from insol.study.description import Study

ROOT = Path(__file__).resolve().parents[2]
SAMPLES = ROOT / "sample_models"
MADE = ("surroundings.obj", "proposed.obj", "proposed-mm-yup.obj", "windows.csv", "known-by-hand/wall.obj",
        "known-by-hand/points.csv")  # fmt: skip


PLACE = ["x_m", "y_m", "z_m"]

HAND = np.arange(7.0, 12.0)
"""Hours of the five points behind the wall: from sunrise at 6 to 1, 2, ... 5 hours after noon, solar time."""


def the_wall(period: str, engine: str = "auto") -> PeriodResult:
    study = insol.load_study(SAMPLES / "known-by-hand" / "study.toml")
    (wanted,) = (found for found in study.periods if found.name == period)
    (result,) = insol.run(replace(study, periods=(wanted,)), engine=engine).periods
    return result


def test_a_day_behind_the_wall_on_the_equator_is_as_known_by_hand(engine: str) -> None:
    """The reasoning stands in the study file."""
    day = the_wall("midsummer", engine)
    # The equation of time and the declination change during a day: 5 s. The stand-off of 1 mm on 2.68 m: 2 s.
    assert np.allclose(day.direct_h, HAND, rtol=0, atol=10 / 3600)
    assert np.allclose(day.possible_h, 12.0, rtol=0, atol=10 / 3600)


def test_a_year_behind_the_wall_on_the_equator_is_as_known_by_hand() -> None:
    year = the_wall("year")
    assert (np.abs(year.direct_h - 365 * HAND) <= year.error_h).all()
    # Every edge falls on the end of a half hour, to within the seconds above: nearly nothing is left of the step.
    assert np.allclose(year.direct_h, 365 * HAND, rtol=0, atol=1.0)


def coarse(name: str) -> Study:
    """A sample study at a spacing that takes no time, its days alone."""
    study = insol.load_study(SAMPLES / name)
    measures = [
        replace(m, spacing_m=6.0) if m.kind != "points" else m
        for m in study.measures
        if m.name != "neighbours"
    ]  # fmt: skip
    days = tuple(period for period in study.periods if period.days != "year")
    return replace(study, measures=tuple(measures), periods=days)


def test_millimetres_with_y_up_give_the_hours_of_metres_with_z_up() -> None:
    metres, millimetres = (insol.run(coarse(name)) for name in ("study.toml", "study-mm-yup.toml"))
    one, other = metres.table(), millimetres.table()
    assert list(one["part"]) == list(other["part"])
    assert np.allclose(one["area_m2"], other["area_m2"], rtol=0, atol=2e-3)  # four decimals of a metre, twice
    away = np.linalg.norm(one[PLACE].to_numpy() - other[PLACE].to_numpy(), axis=1)
    # A face that an arch cuts may be asked at another of its points.
    same = away < 1e-4
    assert same.mean() > 0.99
    for column in [name for name in one.columns if name.endswith(("_deg", "_direct_h", "_possible_h"))]:
        assert np.allclose(one[column][same], other[column][same], rtol=0, atol=1e-2, equal_nan=True), column


def test_parts_are_named_as_a_designer_would() -> None:
    scene = load_scene(insol.load_study(SAMPLES / "study.toml"))
    names = {part.name for part in scene.parts}
    assert {"block-a/floor-01/south", "block-a/roof", "block-b/floor-09/north-east", "lantern-hall/nave"} <= names
    buildings = {part.name.split("/")[0] for part in scene.parts if part.role == "surroundings"}
    assert 25 <= len(buildings) <= 40
    assert {part.sidedness for part in scene.parts} == {"outward"}


def test_every_window_lies_on_a_wall_that_it_looks_out_of() -> None:
    """From a metre before the window, back towards it: the first surface met is the window's own wall."""
    results = insol.run(coarse("study.toml"))
    scene = results.scene
    windows = np.flatnonzero(np.array(results.faces.names) != "")
    assert len(windows) >= 12
    assert (results.faces.status[windows] == 0).all()
    ahead = results.faces.normals[windows]
    origins = (results.faces.points[windows] + 0.1 * ahead).astype(np.float32)
    met = build(scene.vertices, scene.triangles).first(origins, (-ahead).astype(np.float32))
    corners = scene.vertices[scene.triangles[met]]
    away = np.einsum("ij,ij->i", corners[:, 0] - results.faces.points[windows], ahead)
    assert np.abs(away).max() < 1e-4


def test_the_demo_has_some_twenty_thousand_faces() -> None:
    study = insol.load_study(SAMPLES / "study.toml")
    faces = make_faces(load_scene(study), study, None)
    assert 15_000 <= len(faces) <= 25_000
    assert {"facades", "square", "windows"} <= set(faces.measure_names)
    assert {period.name for period in study.periods} == {"equinox", "winter_solstice", "year"}
    assert study.site.north_deg != 0


def words(text: str) -> Iterator[str | float]:
    for word in re.split(r"[\s,]+", text.strip()):
        try:
            yield float(word)
        except ValueError:
            yield word


@pytest.fixture(scope="module")
def made_anew(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("samples")
    subprocess.run([sys.executable, str(ROOT / "scripts" / "make_samples.py"), str(folder)], check=True)
    return folder


@pytest.mark.parametrize("name", MADE)
def test_the_models_are_what_their_maker_makes(name: str, made_anew: Path) -> None:
    kept, anew = (list(words((folder / name).read_text(encoding="utf-8"))) for folder in (SAMPLES, made_anew))
    assert len(kept) == len(anew)
    # The last digit may fall either way on another machine.
    assert all(
        abs(a - b) <= 2e-4 if isinstance(a, float) and isinstance(b, float) else a == b
        for a, b in zip(kept, anew, strict=True)
    )
