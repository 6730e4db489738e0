"""`insol check`: what will be read, with doubts as warnings and the exit code 0."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from click.testing import Result

Run = Callable[..., Result]


def squeezed(text: str) -> str:
    """Lines without the blanks that align them."""
    return "\n".join(" ".join(line.split()) for line in text.split("\n"))


def test_a_study_is_told_from_site_to_rays(insol: Run, place: Path) -> None:
    done = insol("check", "study.toml")
    assert done.exit_code == 0, done.output
    said = squeezed(done.stdout)
    assert said.startswith("A small place (study.toml)\n")
    assert "place 51.5° N, 0° E, 0.00 m above sea level" in said
    assert "clock Europe/London, UTC+00:00, in summer UTC+01:00" in said
    assert "block.obj proposed m, z up 1 12 10.0 x 12.0 x 18.0" in said
    assert "together 3 36 40.0 x 57.0 x 18.0" in said
    # Four walls and a roof of 10 x 12 x 18 m, and the floor.
    assert "block proposed 12 10.0 x 12.0 x 18.0 1,032.0 outward" in said
    assert "facades faces of role proposed 4 m" in said
    assert "square level ground at 0.00 m in 4 corners 2.5 m 24 150.0 0" in said
    assert "Nothing looks doubtful." in said


def test_the_sun_of_a_day_is_that_of_the_almanac(insol: Run, place: Path) -> None:
    """Geometric day length and noon altitude at latitude 51.5, computed with pvlib 0.16.1 (NREL SPA)."""
    study = place / "study.toml"
    text = study.read_text(encoding="utf-8")
    for day, hours, noon in (("06-21", 16.40, 61.9), ("12-21", 7.60, 15.1)):
        study.write_text(text.replace("03-21", day), encoding="utf-8")
        row = next(line for line in insol("check", "study.toml").stdout.splitlines() if f"2025-{day}" in line)
        cells = row.split()
        # Two decimals are shown, and the source gives two: half a hundredth of an hour each.
        assert abs(float(cells[6]) - hours) <= 0.0101
        assert abs(float(cells[3].rstrip("°")) - noon) <= 0.101


def test_millimetres_taken_for_metres_are_a_warning(insol: Run, place: Path) -> None:
    obj = (place / "block.obj").read_text(encoding="utf-8")
    lines = [" ".join([f, *(str(float(c) * 1000) for c in rest)]) if f == "v" else " ".join([f, *rest])
             for f, *rest in (line.split() for line in obj.splitlines() if line)]  # fmt: skip
    (place / "block.obj").write_text("\n".join(lines), encoding="utf-8")
    study = place / "study.toml"
    study.write_text(study.read_text(encoding="utf-8").replace("spacing_m = 4", "spacing_m = 4000"), encoding="utf-8")
    done = insol("check", "study.toml")
    assert done.exit_code == 0
    assert "warning: block.obj measures" in done.stdout
    assert "is it in mm?" in done.stdout


def test_a_clock_that_does_not_fit_the_place_is_a_warning(insol: Run, place: Path) -> None:
    study = place / "study.toml"
    study.write_text(study.read_text(encoding="utf-8").replace("longitude = 0", "longitude = 120"), encoding="utf-8")
    said = " ".join(insol("check", "study.toml").stdout.split())
    assert (
        'warning: time_zone "Europe/London" is 8.0 h behind the sun at longitude 120: '
        "is the sign of the longitude right, and the zone?"
    ) in said


def test_models_alone_are_told_in_every_unit(insol: Run, place: Path) -> None:
    done = insol("check", "block.obj", "around.obj")
    assert done.exit_code == 0
    assert "block.obj: 1 part, 12 triangles; which axis is up, it does not tell" in done.stdout
    assert "m 10.0 x 12.0 x 18.0 as large as buildings are" in squeezed(done.stdout)
    assert "west 12" in squeezed(done.stdout)
    assert "insol new block.obj around.obj writes a starter study" in done.stdout


def test_a_polar_night_is_one_line(insol: Run, place: Path) -> None:
    study = place / "study.toml"
    text = study.read_text(encoding="utf-8").replace("51.5", "80").replace("03-21", "12-21")
    study.write_text(text, encoding="utf-8")
    done = insol("check", "study.toml")
    assert done.exit_code == 2
    assert done.stdout == ""
    assert "the sun is not up" in done.stderr
    assert done.stderr.count("\n") == 1


def test_a_doubt_that_many_parts_share_is_said_once(insol: Run, place: Path) -> None:
    open_boxes = []
    for number, name in enumerate(["a", "b", "c", "d", "e"]):
        low, first = 20 * number, 5 * number
        corners = [(low, 0, 0), (low + 10, 0, 0), (low + 10, 10, 0), (low, 10, 0), (low + 5, 5, 12)]
        open_boxes += [f"o {name}", *(f"v {x} {y} {z}" for x, y, z in corners)]
        # A tent without its floor; the last lacks a side, too.
        sides = [(1, 2, 5), (2, 3, 5), (3, 4, 5), (4, 1, 5)][: 3 if name == "e" else 4]
        open_boxes += ["f " + " ".join(str(corner + first) for corner in side) for side in sides]
    (place / "around.obj").write_text("\n".join(open_boxes), encoding="utf-8")
    brief, whole = insol("check", "study.toml"), insol("check", "study.toml", "--all")
    assert brief.exit_code == whole.exit_code == 0, brief.output
    assert len([line for line in whole.stdout.splitlines() if "warning: " in line]) >= 5
    assert "warning: 5 parts, most of all" in brief.stdout or "warning: 4 parts, most of all" in brief.stdout
