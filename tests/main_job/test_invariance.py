"""What may not change the hours: scale, place and bearing of the frame. What may change them one way only: occluders.

A scale model tells the truth (common practice, no source): a scene at 1:100 has the same hours.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import pytest
from builders import Solid, box, ell, gable, make_study, moved, points_text, pole, turned, turned_points
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

import insol
from insol.study.description import FacesMeasure, GroundMeasure, Period, PointsMeasure, Site

SITE = Site(latitude=51.1, longitude=4.4, time_zone="Europe/Brussels", north_deg=17)
DAY = Period(name="day", days="10-05", year=2025)
MONTH = Period(name="weeks", days="10-01/10-12", year=2025, step_min=30)

TOWN: dict[str, Solid] = {
    "ell": ell(-12, -10, 20, 7, 11),
    "house": turned(gable(10, 8, 18, 20, 5, 9), 23),
    "mast": pole(2, 16, 14, 0.5),
    "slab": box(-20, 14, 0, -8, 19, 16),
}
SQUARE = ((-4.0, -2.0), (9.0, -2.0), (9.0, 13.0), (-4.0, 13.0))


@dataclass(frozen=True)
class Spots:
    """Named points: where they are, and the true azimuth and tilt that they look in."""

    points: NDArray[np.float64]
    azimuth: NDArray[np.float64]
    tilt: NDArray[np.float64]


def hours(
    parts: dict[str, Solid], spots: Spots, periods: list[Period], *, site: Site = SITE, **model: object
) -> list[NDArray[np.float64]]:
    """Direct hours of named points in each period, 0 where a body covers them."""
    with TemporaryDirectory() as name:
        folder = Path(name)
        (folder / "points.csv").write_text(points_text(spots.points, spots.azimuth, spots.tilt), encoding="utf-8")
        measures = [PointsMeasure(name="points", file=Path("points.csv"))]
        results = insol.run(make_study(folder, parts, measures, periods, site, **model))
    return [np.nan_to_num(period.direct_h) for period in results.periods]


def spots_of_town(folder: Path) -> Spots:
    """Sixty points on the town's walls, roofs and square."""
    measures = [
        FacesMeasure(name="walls", parts=("*",), spacing_m=3.0),
        GroundMeasure(name="square", polygon=SQUARE, spacing_m=2.0),
    ]
    results = insol.run(make_study(folder, TOWN, measures, [DAY], SITE))
    shaded = results.periods[0].shaded_fraction
    some = np.random.default_rng(3).permutation(np.flatnonzero((shaded > 0.02) & (shaded < 0.98)))[:60]
    table = results.table().iloc[some]
    points = results.faces.points[some] + results.scene.origin
    return Spots(points, table["azimuth_deg"].fillna(0).to_numpy(), table["tilt_deg"].to_numpy())


SECONDS_H = 6.0 / 3600
"""Each of at most some six edges is found to a second, from whichever side."""


def assert_same(before: list[NDArray[np.float64]], after: list[NDArray[np.float64]]) -> None:
    (day, weeks), (other_day, other_weeks) = before, after
    assert np.ptp(day) > 2, "the points should differ"
    assert np.allclose(day, other_day, rtol=0, atol=SECONDS_H)
    # An instant may fall in the edge band of single precision: one interval, on one point in sixty.
    off = np.abs(weeks - other_weeks)
    assert off.max() <= MONTH.step_min / 60 + 1e-9
    assert (off > 1e-9).sum() <= 1


def test_a_town_moved_by_5000_km_has_the_same_hours(tmp_path: Path) -> None:
    spots = spots_of_town(tmp_path)
    far = np.array([4.0e6, -3.0e6, 120.0])
    assert np.hypot(*far[:2]) == 5.0e6
    there = hours({name: moved(solid, far) for name, solid in TOWN.items()},
                  replace(spots, points=spots.points + far), [DAY, MONTH])  # fmt: skip
    assert_same(hours(TOWN, spots, [DAY, MONTH]), there)


@pytest.mark.parametrize("degrees", [33.0, 90.0, -141.5])
def test_a_town_turned_with_its_north_has_the_same_hours(degrees: float, tmp_path: Path) -> None:
    spots = spots_of_town(tmp_path)
    there = hours(
        {name: turned(solid, degrees) for name, solid in TOWN.items()},
        replace(spots, points=turned_points(spots.points, degrees)),
        [DAY, MONTH],
        site=replace(SITE, north_deg=SITE.north_deg + degrees),
    )
    assert_same(hours(TOWN, spots, [DAY, MONTH]), there)


def test_a_town_at_1_to_100_has_the_same_hours(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The same numbers taken as centimetres, the stand-off scaled with them."""
    spots = spots_of_town(tmp_path)
    full = hours(TOWN, spots, [DAY, MONTH])
    monkeypatch.setattr("insol.pipeline.STAND_OFF_M", 1e-5)
    assert_same(full, hours(TOWN, replace(spots, points=spots.points / 100), [DAY, MONTH], units="cm"))


def test_faces_and_cells_of_a_turned_town_have_the_same_hours(tmp_path: Path) -> None:
    """A quarter turn, so that the ground's cells fall on one another."""
    found = []
    for degrees in (0.0, 90.0):
        measures = [
            FacesMeasure(name="walls", parts=("ell", "slab"), spacing_m=2.0),
            GroundMeasure(
                name="square", polygon=tuple((x, y) for x, y, _ in turned_points([(*at, 0) for at in SQUARE], degrees)),
                spacing_m=1.0,
            ),
        ]  # fmt: skip
        parts = {name: turned(solid, degrees) for name, solid in TOWN.items()}
        site = replace(SITE, north_deg=SITE.north_deg + degrees)
        results = insol.run(make_study(tmp_path, parts, measures, [DAY], site))
        there = turned_points(results.faces.points + results.scene.origin, -degrees)
        order = np.lexsort(np.round(there, 3).T)
        found.append((there[order], np.nan_to_num(results.periods[0].direct_h[order])))
    (points, direct), (turned_back, other) = found
    assert np.allclose(points, turned_back, rtol=0, atol=1e-6)  # m; text and rotation round at 1e-9
    off = np.abs(direct - other)
    # The corners of some cells lie on one line with an edge of the model for a while: the edge band.
    assert (off > SECONDS_H).mean() < 0.005


coordinates = st.floats(-25, 25, allow_nan=False)
occluders = st.builds(
    lambda x, y, z, size, degrees: turned(box(x, y, z, x + size[0], y + size[1], z + size[2]), degrees),
    coordinates, coordinates, st.floats(0, 12), st.tuples(*[st.floats(0.3, 15)] * 3), st.floats(0, 90),
)  # fmt: skip
some_spots = st.lists(
    st.tuples(coordinates, coordinates, st.floats(0.1, 20), st.floats(0, 359.9), st.sampled_from([0.0, 35.0, 90.0])),
    min_size=3, max_size=8,
)  # fmt: skip


@settings(max_examples=25)
@given(first=occluders, second=occluders, spots=some_spots)
def test_adding_an_occluder_never_adds_an_hour(first: Solid, second: Solid, spots: list[tuple[float, ...]]) -> None:
    table = np.array(spots)
    asked = Spots(table[:, :3], table[:, 3], table[:, 4])
    # Far below, so that the local origin does not move with the second body.
    anchors = box(-60, -60, -40, 60, 60, -39)
    before = hours({"anchor": anchors, "first": first}, asked, [DAY, MONTH])
    after = hours({"anchor": anchors, "first": first, "second": second}, asked, [DAY, MONTH])
    assert (after[1] <= before[1] + 1e-9).all()
    # Each edge is found to a second; two edges within one step may be found the one or the other.
    assert (after[0] <= before[0] + DAY.step_min / 60).all()
