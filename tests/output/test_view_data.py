"""A result folder read again for looking at: whole ones, damaged ones, and where the camera stands."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest
from invented_town import NORTH_DEG, OFFSET, Town

from insol.conventions import azimuth_tilt
from insol.errors import ResultError
from insol.output.ground_ring import ground_ring
from insol.output.stage import CAMERA_ALTITUDE_DEG, camera_of, framed, unit_normals
from insol.output.view_data import DISC_CORNERS, load_view, said

EXACT_M = 1e-6  # rounding of float64 in a national grid, twice
TURN = 1e-9  # rounding of float64 in unit vectors


def rewrite(folder: Path, change: Callable[[dict[str, Any]], Any]) -> None:
    path = folder / "result.json"
    facts = json.loads(path.read_text(encoding="utf-8"))
    change(facts)
    path.write_text(json.dumps(facts), encoding="utf-8")


def test_faces_lie_where_they_were(town: Town) -> None:
    data = load_view(town.folder)
    drawn = len(town.triangles)
    np.testing.assert_allclose(data.triangles[:drawn] + data.offset, town.triangles, rtol=0, atol=EXACT_M)
    assert np.abs(data.triangles).max() < 500  # near the origin: the drawing library counts in single precision
    assert np.array_equal(data.face_row[:drawn], town.face_row)
    assert data.place == "53.79° N, 1.55° W"


def test_a_measured_point_is_a_disc_before_its_wall(town: Town) -> None:
    data = load_view(town.folder)
    rows = np.flatnonzero(town.faces["measure"] == "windows")
    assert set(data.face_row[len(town.triangles) :]) == set(rows)
    for row in rows:
        disc = data.triangles[data.face_row == row] + data.offset
        assert len(disc) == DISC_CORNERS
        azimuth, tilt = azimuth_tilt(unit_normals(disc), NORTH_DEG)
        np.testing.assert_allclose(azimuth, (180 + NORTH_DEG) % 360, rtol=0, atol=1e-4)
        np.testing.assert_allclose(tilt, 90, rtol=0, atol=1e-4)
        away = disc.reshape(-1, 3).mean(axis=0) - town.faces.loc[row, ["x_m", "y_m", "z_m"]].to_numpy(dtype=float)
        assert -0.2 < away[1] < 0 and np.hypot(away[0], away[2]) < 0.1  # that wall looks along -y


def test_a_result_of_points_alone_can_be_seen(own_town: Callable[..., Town]) -> None:
    from insol.output.ply import write_ply

    town = own_town()
    town.faces[town.faces["measure"] == "windows"].to_csv(town.folder / "faces.csv", index=False)
    write_ply(town.folder / "faces.ply", np.zeros((0, 3, 3)), np.zeros((0, 3), dtype=np.uint8), scalars={},
              ints={"face_row": np.zeros(0, dtype=int)})  # fmt: skip
    assert sorted(set(load_view(town.folder).face_row)) == [0, 1, 2]


def test_colours_are_those_of_the_row(town: Town) -> None:
    data = load_view(town.folder)
    row = int(np.nanargmax(town.faces["year_direct_h"]))
    scale = data.scale("year", "direct_h")
    assert scale.high == 5000
    from insol.output.colours import colours_of

    wanted = colours_of(town.faces["year_direct_h"].to_numpy()[[row]], scale)
    assert (data.colours("year", "direct_h")[data.face_row == row] == wanted).all()


def test_parts_may_be_called_like_nothing(own_town: Callable[..., Town]) -> None:
    """Readers of tables take "NA" for a gap."""
    data = load_view(own_town(part="NA").folder)
    assert set(data.faces["part"].dropna()) == {"NA"}
    assert data.faces["part"].isna().sum() == (data.faces["measure"] != "facades").sum()


@pytest.mark.parametrize("name", ["result.json", "faces.csv", "faces.ply", "context.ply"])
def test_a_missing_file_is_named(own_town: Callable[..., Town], name: str) -> None:
    folder = own_town().folder
    (folder / name).unlink()
    with pytest.raises(ResultError, match=rf"not a result folder: {name} is not there. insol run STUDY --out DIR"):
        load_view(folder)


def test_no_folder_at_all(tmp_path: Path) -> None:
    with pytest.raises(ResultError, match="not a result folder"):
        load_view(tmp_path / "nowhere")


@pytest.mark.parametrize(
    "content", ["", "[1, 2]", "{", '{"title": "x"}', '{"periods": []}', '{"periods": [3]}', "\u0000"]
)
def test_a_damaged_result_json(own_town: Callable[..., Town], content: str) -> None:
    folder = own_town().folder
    (folder / "result.json").write_text(content, encoding="utf-8")
    with pytest.raises(ResultError, match="the result cannot be read"):
        load_view(folder)


@pytest.mark.parametrize("content", [b"", b"\xff\xfe\x00", b'a,b\n"1'])
def test_a_damaged_table(own_town: Callable[..., Town], content: bytes) -> None:
    folder = own_town().folder
    (folder / "faces.csv").write_bytes(content)
    with pytest.raises(ResultError):
        load_view(folder)


def test_files_of_two_results(own_town: Callable[..., Town]) -> None:
    town = own_town()
    town.faces.head(20).to_csv(town.folder / "faces.csv", index=False)
    with pytest.raises(ResultError, match="do not belong together"):
        load_view(town.folder)
    town.faces.drop(columns="winter_error_h").to_csv(town.folder / "faces.csv", index=False)
    with pytest.raises(ResultError, match='no column "winter_error_h"'):
        load_view(town.folder)


def test_an_older_result_json_will_do(own_town: Callable[..., Town]) -> None:
    """What only serves to say more may be missing."""
    folder = own_town().folder
    rewrite(
        folder, lambda facts: [facts.pop("site"), facts.pop("title"), *(p.pop("last_day") for p in facts["periods"])]
    )
    data = load_view(folder)
    assert (data.title, data.place, data.north_deg, data.northern) == ("result", "", 0.0, True)
    assert said(data.period("equinox")) == "march-equinox, sunrise to sunset"


def test_an_unknown_period_has_its_neighbours_named(town: Town) -> None:
    with pytest.raises(
        ResultError, match=r'no period "equinoxe"; it has "equinox", "winter", "year".*did you mean "equinox"'
    ):
        load_view(town.folder).period("equinoxe")


@pytest.mark.parametrize(
    ("facts", "words"),
    [
        ({"first_day": "2025-03-21", "last_day": "2025-03-21", "clock": "local", "from": "09:00", "to": "15:00"},
         "21 March 2025, 09:00 to 15:00 local time"),
        ({"first_day": "2025-10-01", "last_day": "2026-03-31", "clock": "solar", "from": None, "to": "12:00"},
         "1 October 2025 to 31 March 2026, 00:00 to 12:00 true solar time"),
        ({"first_day": "2024-01-01", "last_day": "2024-12-31", "clock": "standard"}, "all of 2024, sunrise to sunset"),
        ({"days": "03-21"}, "03-21, sunrise to sunset"),
    ],
)  # fmt: skip
def test_a_period_in_a_line(facts: dict[str, Any], words: str) -> None:
    assert said(facts) == words


@pytest.mark.parametrize(("latitude", "bearing"), [(53.8, 150.0), (-33.9, 30.0)])
@pytest.mark.parametrize("north_deg", [0.0, 17.0, 250.0])
def test_the_bird_looks_from_the_sunny_side(town: Town, latitude: float, bearing: float, north_deg: float) -> None:
    """South-south-east of the scene in the north, north-north-east of it in the south, wherever +y points."""
    data = load_view(town.folder)
    site = {**data.facts["site"], "latitude": latitude, "north_deg": north_deg}
    camera = camera_of("bird", replace(data, facts={**data.facts, "site": site}))
    azimuth, tilt = azimuth_tilt(camera.towards[None], north_deg)
    np.testing.assert_allclose([azimuth[0], 90 - tilt[0]], [bearing, CAMERA_ALTITUDE_DEG], rtol=0, atol=1e-6)
    frame = np.stack([camera.right, camera.up, camera.towards])
    np.testing.assert_allclose(frame @ frame.T, np.eye(3), rtol=0, atol=TURN)
    assert np.linalg.det(frame) == pytest.approx(1.0, abs=TURN)  # not seen in a mirror
    assert camera.up[2] > 0


@pytest.mark.parametrize("view", ["bird", "plan"])
def test_the_frame_holds_all_measured_faces(town: Town, view: Any) -> None:
    data = load_view(town.folder)
    camera = camera_of(view, data)
    centre, half = framed(data, camera, 1.5, 0.15)
    flat = np.abs(camera.flat(data.triangles.reshape(-1, 3) - centre)) / (half * np.array([1.5, 1.0]))
    assert flat.max() == pytest.approx(0.7, abs=1e-9)  # the free margin on both sides, and no more


def test_the_ring_shows_true_north_and_a_length(town: Town) -> None:
    """In plan +y is up and bears 17° east of north, so that north lies 17° left of up."""
    data = load_view(town.folder)
    plan = ground_ring(camera_of("plan", data), NORTH_DEG, 12.0)
    tip = plan.needle[1]
    assert np.degrees(np.arctan2(-tip[0], tip[1])) == pytest.approx(NORTH_DEG, abs=1e-9)
    np.testing.assert_allclose(np.linalg.norm(plan.rim, axis=1), 10.0, rtol=0, atol=TURN)
    assert plan.across_m == 20.0
    bird = ground_ring(camera_of("bird", data), NORTH_DEG, 12.0)
    wide, high = np.ptp(bird.rim, axis=0)
    # Of a level circle a parallel projection keeps the width and shows the height times the sine of the altitude.
    assert wide == pytest.approx(20.0, abs=0.02)
    assert high == pytest.approx(20.0 * np.sin(np.radians(CAMERA_ALTITUDE_DEG)), abs=0.02)


def test_spells_are_read(town: Town) -> None:
    spells = load_view(town.folder).spells
    assert isinstance(spells, pd.DataFrame) and set(spells["period"]) == {"equinox"}
    assert OFFSET[0] > 400_000  # the town stands in a national grid
