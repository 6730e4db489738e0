"""Hours from answers: facing, spells, steps, the open wall against pvlib, errors that hold."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from builders import box, make_study
from hypothesis import given
from hypothesis import strategies as st

import insol
from insol.measures.by_days import Spells, cut_spells
from insol.measures.by_steps import edge_error
from insol.measures.facing import facing_seconds, lent
from insol.measures.sun_hours import SunHours, joined, on_faces
from insol.study.description import Period, PointsMeasure, Site
from insol.sun.position import sun_track

FAR_BOX = {"far": box(5000, 5000, 0, 5001, 5001, 1)}


def open_walls(folder: Path, site: Site, period: Period) -> insol.PeriodResult:
    """A period on walls of eight directions with nothing before them."""
    lines = [f"w{azimuth},0,0,10,{azimuth},90" for azimuth in range(0, 360, 45)]
    (folder / "walls.csv").write_text("name,x_m,y_m,z_m,azimuth_deg,tilt_deg\n" + "\n".join(lines) + "\n")
    study = make_study(folder, FAR_BOX, [PointsMeasure(name="walls", file=Path("walls.csv"))], [period], site)
    return insol.run(study).periods[0]


@pytest.mark.parametrize("latitude", [-35.0, 1.0, 52.0])
@pytest.mark.parametrize("sampling", ["rows", "steps"])
def test_open_walls_have_the_hours_that_pvlib_counts(tmp_path: Path, latitude: float, sampling: str) -> None:
    """pvlib: minutes of the year with the sun up and its angle of incidence on the wall below 90 degrees."""
    import pandas as pd
    from pvlib.irradiance import aoi
    from pvlib.solarposition import spa_python

    site = Site(latitude=latitude, longitude=15.0, time_zone="+01:00", north_deg=20.0)
    found = open_walls(tmp_path, site, Period(name="year", days="year", year=2025, step_min=60, sampling=sampling))
    times = pd.date_range("2025-01-01", "2025-12-31 23:59", freq="4min", tz="Etc/GMT-1")
    sun = spa_python(times, latitude, 15.0, delta_t=None)
    for face, azimuth in enumerate(range(0, 360, 45)):
        front = aoi(90, azimuth, 90 - sun["elevation"], sun["azimuth"]) < 90
        expected = float((front & (sun["elevation"] > 0)).sum()) * 4 / 60
        # A four-minute step counts each of some hundreds of edges a year to two minutes.
        assert found.possible_h[face] == pytest.approx(expected, abs=1.5)
        assert found.direct_h[face] == pytest.approx(found.possible_h[face], abs=0.01)


def test_facing_seconds_are_those_of_many_small_pieces() -> None:
    site = Site(latitude=47.0, longitude=8.0, time_zone="+01:00")
    start = 1750464000.0 + np.arange(4, 20) * 3600
    track = sun_track(site, start[0], start[-1] + 3600)
    turn = np.radians(np.arange(0, 360, 30))
    normals = np.stack([np.sin(turn), np.cos(turn), np.zeros_like(turn)], axis=1)
    fine = start[:, None] + (np.arange(720) + 0.5) * 5
    plain = (normals @ track.directions(fine.ravel()).T > 0).reshape(len(turn), len(start), 720).sum(axis=2) * 5.0
    found = facing_seconds(normals, start, start + 3600, track)
    np.testing.assert_allclose(found, plain, rtol=0, atol=12)  # [s] steps of five, and four straight pieces an hour


@given(st.lists(st.tuples(st.floats(0, 3600), st.booleans()), min_size=2, max_size=12), st.data())
def test_lending_keeps_every_second(cells: list[tuple[float, bool]], data: st.DataObject) -> None:
    seconds = np.array([[cell[0] for cell in cells]])
    front = np.array([[cell[1] for cell in cells]])
    follows = np.array(data.draw(st.lists(st.booleans(), min_size=len(cells) - 1, max_size=len(cells) - 1)))
    given_, lost = lent(seconds, front, follows)
    assert given_.sum() + lost.sum() == pytest.approx(seconds.sum(), abs=1e-6)
    assert not given_[~front].any()


spell = st.tuples(st.integers(0, 4), st.floats(0, 1e5), st.floats(2, 2e4))


@given(st.lists(spell, max_size=12), st.floats(0, 1e5), st.floats(10, 5e4))
def test_cut_spells_lie_in_the_span_and_cut_by_halves_add_up(
    pieces: list[tuple[int, float, float]], begin: float, length: float
) -> None:
    rows = sorted(pieces)
    spells = Spells(
        np.array([row[0] for row in rows], dtype=np.int64),
        np.array([row[1] for row in rows], dtype=float),
        np.array([row[1] + row[2] for row in rows], dtype=float),
    )
    middle = begin + length / 2
    whole = cut_spells(spells, np.array([[begin, begin + length]]))
    halves = cut_spells(spells, np.array([[begin, middle], [middle, begin + length]]))
    assert np.all(whole.begin >= begin)
    assert np.all(whole.end <= begin + length)
    # A piece shorter than half a second is left out.
    tolerance = 1.01 * (len(pieces) + 1)
    assert (halves.end - halves.begin).sum() == pytest.approx((whole.end - whole.begin).sum(), abs=tolerance)


def test_more_edges_never_make_the_error_smaller() -> None:
    few, many = np.array([[1.0], [2.0]]), np.array([[3.0], [2.0]])
    assert edge_error(few, 600.0) <= edge_error(many, 600.0)
    assert edge_error(np.zeros((1, 1)), 600.0)[0] == 600.0


def test_shaded_fraction_is_empty_where_nothing_is_possible() -> None:
    hours = SunHours(np.array([0.0, 2.0, 4.0]), np.array([0.0, 4.0, 4.0]), np.zeros(3))
    np.testing.assert_array_equal(hours.shaded_fraction, [np.nan, 0.5, 0.0])
    over = on_faces(hours, np.array([4, 0, 2]), 6)
    np.testing.assert_array_equal(over.direct_h, [2.0, np.nan, 4.0, np.nan, 0.0, np.nan])
    assert len(joined([hours, hours]).direct_h) == 6


def test_spells_of_a_day_add_up_to_its_hours(tmp_path: Path) -> None:
    site = Site(latitude=52.0, longitude=10.0, time_zone="Europe/Berlin")
    (tmp_path / "p.csv").write_text(
        "name,x_m,y_m,z_m,azimuth_deg,tilt_deg\nn,0,0,1,0,90\ns,0,0,1,180,90\nu,0,0,1,0,0\n"
    )
    parts = {f"b{n}": box(x, -8, 0, x + 2, -6, 9) for n, x in enumerate(range(-12, 12, 5))}
    period = Period(name="day", days="06-21", year=2025, start="05:30", end="20:15")
    study = make_study(tmp_path, parts, [PointsMeasure(name="p", file=Path("p.csv"))], [period], site)
    found = insol.run(study).periods[0]
    assert found.spells is not None
    total = np.bincount(found.spells.receptor, found.spells.end - found.spells.begin, minlength=3) / 3600
    np.testing.assert_allclose(total, found.direct_h, rtol=0, atol=1e-9)
    assert np.bincount(found.spells.receptor, minlength=3)[0] == 2  # a north wall has the morning and the evening


def test_the_steps_of_a_month_lie_within_their_error_of_its_days(tmp_path: Path) -> None:
    site = Site(latitude=52.0, longitude=10.0, time_zone="Europe/Berlin")
    lines = [f"p{n},{x},0,{z},180,90" for n, (x, z) in enumerate((x, z) for x in range(-9, 10, 3) for z in (1, 4))]
    (tmp_path / "p.csv").write_text("name,x_m,y_m,z_m,azimuth_deg,tilt_deg\n" + "\n".join(lines) + "\n")
    parts = {f"b{n}": box(x, -14, 0, x + 4, -8, 6 + n) for n, x in enumerate(range(-20, 20, 7))}
    month = Period(name="month", days="02-10/03-09", year=2025, step_min=2, sampling="days")
    coarse = replace(month, name="steps", step_min=30, sampling="steps")
    rows = replace(month, name="rows", step_min=30, sampling="rows")
    study = make_study(tmp_path, parts, [PointsMeasure(name="p", file=Path("p.csv"))], [month, coarse, rows], site)
    days, steps, along = insol.run(study).periods
    np.testing.assert_allclose(steps.possible_h, days.possible_h, rtol=0, atol=0.05)
    assert np.mean(np.abs(steps.direct_h - days.direct_h) <= steps.error_h + days.error_h) >= 0.95
    assert np.mean(np.abs(along.direct_h - days.direct_h) <= along.error_h + days.error_h) >= 0.95


@pytest.mark.parametrize("step_min", [1, 5, 30, 60])
def test_a_short_visit_is_not_lost_to_a_coarse_step(tmp_path: Path, step_min: int) -> None:
    """A roof turned from the low winter sun is in front of it for 45 minutes: found whatever the step."""
    site = Site(latitude=53.41, longitude=-2.99, time_zone="Europe/London")
    (tmp_path / "p.csv").write_text("name,x_m,y_m,z_m,azimuth_deg,tilt_deg\nroof,0,0,10,0,13.05\n")
    measure = PointsMeasure(name="p", file=Path("p.csv"))
    period = Period(name="day", days="12-21", year=2025, step_min=step_min)
    found = insol.run(make_study(tmp_path, FAR_BOX, [measure], [period], site)).periods[0]
    assert found.possible_h[0] == pytest.approx(0.7439, abs=2e-4)  # [h] at a step of one minute
    assert found.direct_h[0] == pytest.approx(found.possible_h[0], abs=1e-6)
    assert 0 < found.error_h[0] <= found.possible_h[0]
