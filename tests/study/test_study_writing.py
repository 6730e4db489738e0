"""A study written down reads as itself; one made in Python is checked like a file."""

from __future__ import annotations

import tomllib
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from insol.errors import StudyError
from insol.study.description import (
    CLOCKS,
    UNITS,
    UPS,
    FacesMeasure,
    GroundMeasure,
    Model,
    Period,
    PointsMeasure,
    Site,
    Study,
)
from insol.study.keys import SECTIONS, TOP_KEYS
from insol.study.reading import load_study
from insol.study.writing import check_study, study_text, toml_value


def test_the_valid_study_reads_as_itself(written: Callable[[str], Path], valid: str) -> None:
    study = load_study(written(valid))
    assert load_study(written(study_text(study))) == study
    assert check_study(study) == study


def numbers(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_nan=False)


letters = st.characters(codec="utf-8", categories=["L", "N", "P", "S", "Zs"]).filter(str.isprintable)
patterns = st.text(letters, max_size=9)
sites = st.builds(
    Site,
    latitude=numbers(-90, 90),
    longitude=numbers(-180, 180),
    time_zone=st.sampled_from(["Europe/London", "Asia/Kolkata", "+05:30", "-14:00"]),
    elevation_m=numbers(-500, 9000),
    north_deg=numbers(-360, 360),
)
models = st.builds(
    Model,
    file=st.sampled_from([Path("surroundings.obj"), Path("proposed.obj")]),
    units=st.sampled_from(UNITS),
    up=st.sampled_from(UPS),
    role=st.just("proposed"),
)
faces = st.builds(
    FacesMeasure,
    name=st.just("facades"),
    spacing_m=numbers(0.001, 1e4) | st.just(0.0),
    parts=st.lists(patterns, min_size=1, max_size=3).map(tuple),
    roles=st.sampled_from([(), ("proposed",)]),
)
ground = st.builds(
    GroundMeasure,
    name=st.just("ground"),
    spacing_m=numbers(0.001, 1e4),
    height_m=numbers(-100, 100),
    polygon=numbers(1, 1e6).map(lambda size: ((0.0, 0.0), (size, 0.0), (size, size / 3), (0.5, size))),
)
points = st.builds(PointsMeasure, name=st.just("windows"), file=st.just(Path("windows.csv")))
periods = st.builds(
    Period,
    name=st.just("période-1"),
    days=st.sampled_from(["03-21", "year", "10-01/03-31", "june-solstice"]),
    year=st.integers(1900, 2100),
    start=st.sampled_from([None, "00:00", "09:30"]),
    end=st.sampled_from([None, "15:00", "24:00"]),
    clock=st.sampled_from(CLOCKS),
    step_min=st.sampled_from([1, 6, 60]),
    lowest_altitude_deg=numbers(0, 89),
)


@given(
    title=patterns,
    site=sites,
    models=st.lists(models, min_size=1, max_size=3).map(tuple),
    measures=st.tuples(faces, ground, points),
    period=periods,
    hours=st.lists(st.integers(0, 24).map(float), unique=True, max_size=4).map(tuple),
)
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=60, deadline=None)
def test_every_study_reads_as_itself(folder: Path, title, site, models, measures, period, hours) -> None:  # type: ignore[no-untyped-def]
    study = Study(
        title=title, site=site, models=models, measures=measures, periods=(period,), hours_per_day=hours,
        folder=folder, file=folder / "study.toml",
    )  # fmt: skip
    path = folder / "study.toml"
    path.write_text(study_text(study), encoding="utf-8")
    assert load_study(path) == study


@given(st.text(st.characters(exclude_categories=["Cs"])))
def test_every_text_is_written_as_toml_reads_it(text: str) -> None:
    assert tomllib.loads(f"text = {toml_value(text)}")["text"] == text


def test_a_study_made_in_python_is_checked_like_a_file(written: Callable[[str], Path], valid: str) -> None:
    study = load_study(written(valid))
    wrong = replace(study, site=replace(study.site, latitude=95.0), file=None)
    with pytest.raises(StudyError, match=r"^study, site\.latitude: must be a number from -90 to 90 .* not 95\.0$"):
        check_study(wrong)


def test_every_field_of_the_description_has_a_key_and_every_key_a_field() -> None:
    from dataclasses import fields

    for section in SECTIONS:
        for table in section.tables:
            named = {table.field_of(key) for key in table.keys}
            assert named == {field.name for field in fields(table.make)} - {"kind"}
            assert all(key.meaning for key in table.keys)
    known = {section.field for section in SECTIONS} | {key.name for key in TOP_KEYS}
    assert known == {field.name for field in fields(Study)} - {"folder", "file"}
