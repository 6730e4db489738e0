"""What the panel says of a face, held against its row of the table."""

from __future__ import annotations

from collections.abc import Callable

import pandas as pd
import pytest
from invented_town import Town

from insol.output.face_words import MOST_SPELLS, facing, hours, words_of_face
from insol.output.view_data import load_view


def row_of(town: Town, question: str) -> int:
    return int(town.faces.query(question, engine="python").index[0])


def test_a_facade_on_a_day(town: Town) -> None:
    row = row_of(town, "part == 'block-18' and face == 40")
    face = town.faces.loc[row]
    spells = pd.read_csv(town.folder / "spells.csv").query("part == 'block-18' and face == 40")
    lines = words_of_face(load_view(town.folder), row, "equinox").text.splitlines()
    assert lines[0] == "block-18, face 40"
    assert lines[1] == "facing: 197° (south), upright"
    assert lines[2].startswith("size: 3.") and lines[2].endswith(f"m², at z = {face['z_m']:.1f} m")
    assert lines[3] == f"direct sun: {hours(face['equinox_direct_h'])} ± 5 min"
    assert lines[4] == f"possible: {hours(face['equinox_possible_h'])}"
    assert lines[5] == f"shaded fraction: {face['equinox_shaded_fraction']:.2f}"
    begins, ends = list(spells["begin"]), list(spells["end"])
    assert lines[6:] == [f"sun: {begins[0]} to {ends[0]} local time", f"{begins[1]} to {ends[1]}"]


def test_a_long_period_has_hours_and_no_spells(town: Town) -> None:
    row = row_of(town, "part == 'block-18' and tilt_deg == 0")
    text = words_of_face(load_view(town.folder), row, "year").text
    face = town.faces.loc[row]
    assert f"direct sun: {face['year_direct_h']:,.0f} h ± {face['year_error_h']:.0f} h\n" in text
    assert f"possible: {town.faces.loc[row, 'year_possible_h']:,.0f} h" in text
    assert "facing: up" in text and "\nsun:" not in text and text.count("\n") == 5


def test_a_ground_cell_is_named_by_its_measure_and_has_its_own_spells(town: Town) -> None:
    row = row_of(town, "measure == 'square' and face == 3")
    words = words_of_face(load_view(town.folder), row, "equinox")
    assert words.heading == "square, face 3"
    assert sum(" to " in said for _, said in words.rows) == 2  # not those of every part's third face


def test_a_point_is_called_by_its_name(town: Town) -> None:
    words = words_of_face(load_view(town.folder), row_of(town, "name == 'stair'"), "equinox")
    assert words.heading == "windows, stair"
    assert dict(words.rows)["size"].startswith("a point, at z =")
    assert dict(words.rows)["direct sun"] == "3 h 00 min ± 5 min"


def test_a_covered_face_has_no_hours(town: Town) -> None:
    text = words_of_face(load_view(town.folder), row_of(town, "status == 'covered'"), "equinox").text
    assert "covered: it lies against or inside another body" in text
    assert "nan" not in text and "direct" not in text


def test_a_face_that_never_sees_the_sun_has_no_fraction(town: Town) -> None:
    row = row_of(town, "winter_possible_h == 0")
    text = words_of_face(load_view(town.folder), row, "winter").text
    assert "possible: 0 min" in text and "fraction" not in text and "nan" not in text


def test_many_spells_are_cut(own_town: Callable[..., Town]) -> None:
    town = own_town()
    row = row_of(town, "part == 'block-18' and face == 40")
    path = town.folder / "spells.csv"
    spells = pd.read_csv(path, dtype=str)
    mine = spells[(spells["part"] == "block-18") & (spells["face"] == "40")]
    pd.concat([spells, *[mine] * 4]).to_csv(path, index=False)
    rows = words_of_face(load_view(town.folder), row, "equinox").rows
    assert sum(" to " in said for _, said in rows) == MOST_SPELLS - 1
    assert rows[-1] == ("", "and 5 spells more")


def test_hostile_names_stay_one_line(own_town: Callable[..., Town]) -> None:
    town = own_town(part="one\ntwo\t$\\frac{1}{" + "9" * 200)
    words = words_of_face(load_view(town.folder), 0, "equinox")
    assert words.heading.isprintable() and len(words.heading) < 100


@pytest.mark.parametrize(
    ("azimuth", "tilt", "words"),
    [
        (0.0, 90.0, "0° (north), upright"), (337.4, 90.2, "337° (north-west), upright"),
        (337.6, 45.0, "338° (north), tilted 45°"), (float("nan"), 0.0, "up"),
        (float("nan"), 180.0, "down"), (90.0, 135.0, "90° (east), tilted 135°"),
    ],
)  # fmt: skip
def test_which_way(azimuth: float, tilt: float, words: str) -> None:
    assert facing(azimuth, tilt) == words


@pytest.mark.parametrize(
    ("value", "words"),
    [(0.0, "0 min"), (0.9999, "1 h 00 min"), (59.5 / 60, "1 h 00 min"), (99.9, "99 h 54 min"), (4406.8, "4,407 h"),
     (float("nan"), "unknown")],
)  # fmt: skip
def test_hours_in_words(value: float, words: str) -> None:
    assert hours(value) == words
