"""`insol run` and `insol view`: a result, its closing lines, and refusals that leave nothing behind."""

from __future__ import annotations

import csv
import json
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from click.testing import Result

import insol as package

Run = Callable[..., Result]


def test_a_run_writes_the_folder_and_says_what_it_found(insol: Run, place: Path) -> None:
    done = insol("run", "study.toml", "--out", "result", "--engine", "numpy", "--threads", "1")
    assert done.exit_code == 0, done.output
    assert json.loads((place / "result" / "result.json").read_text(encoding="utf-8"))["engine"] == "numpy"
    with (place / "result" / "faces.csv").open(encoding="utf-8", newline="") as stream:
        rows = [row for row in csv.DictReader(stream) if row["measure"] == "square" and row["status"] == "measured"]
    hours = [float(row["equinox_direct_h"]) for row in rows]
    said = next(line.split() for line in done.stdout.splitlines() if line.strip().startswith("square"))
    # square, equinox, faces, mean h, least h, most h, shaded %; all cells are of one size.
    assert said[:3] == ["square", "equinox", str(len(rows))]
    assert float(said[3]) == pytest.approx(np.mean(hours), rel=0, abs=0.0051)  # two decimals are shown
    assert float(said[5]) == pytest.approx(min(hours), rel=0, abs=0.0051)
    assert float(said[7]) == pytest.approx(max(hours), rel=0, abs=0.0051)
    assert "written to result: faces.csv" in done.stdout
    assert done.stdout.endswith("insol view result shows it\n")


def test_no_progress_where_there_is_no_terminal(insol: Run, place: Path) -> None:
    assert insol("run", "study.toml", "--out", "result").stderr == ""


def test_python_finds_what_the_command_line_finds(insol: Run, place: Path) -> None:
    assert insol("run", "study.toml", "--out", "result").exit_code == 0
    results = package.run(package.load_study("study.toml"))
    with (place / "result" / "faces.csv").open(encoding="utf-8", newline="") as stream:
        written = [float(row["equinox_direct_h"] or "nan") for row in csv.DictReader(stream)]
    np.testing.assert_allclose(written, results.periods[0].direct_h, rtol=0, atol=5.1e-5)  # four decimals are written


@pytest.mark.parametrize(
    ("right", "wrong", "said"),
    [
        ('roles = ["proposed"]', 'parts = ["blok"]', 'did you mean "block"'),
        ('file = "block.obj"', 'file = "study.toml"', "study.toml"),
        ('days = "03-21"', 'days = "13-01"', "is not a day of 2025"),
        ("[10, -5], [0, -5]", "[0, -5], [10, -5]", "crosses or touches itself"),
    ],
)
def test_bad_input_leaves_an_earlier_result_as_it_was(
    insol: Run, place: Path, right: str, wrong: str, said: str
) -> None:
    assert insol("run", "study.toml", "--out", "result").exit_code == 0
    before = {path: path.read_bytes() for path in place.rglob("*") if path.is_file()}
    study = place / "study.toml"
    study.write_text(study.read_text(encoding="utf-8").replace(right, wrong), encoding="utf-8")
    before[study] = study.read_bytes()
    done = insol("run", "study.toml", "--out", "result")
    assert done.exit_code == 2
    assert said in done.stderr
    assert done.stderr.count("\n") == 1
    assert {path: path.read_bytes() for path in place.rglob("*") if path.is_file() and path.suffix != ".lock"} == {
        path: data for path, data in before.items() if path.suffix != ".lock"
    }


def test_a_folder_of_other_things_is_left_alone(insol: Run, place: Path) -> None:
    (place / "photos").mkdir()
    (place / "photos" / "holiday.jpg").write_bytes(b"1")
    done = insol("run", "study.toml", "--out", "photos")
    assert done.exit_code == 2
    assert "the folder is not empty and holds no result of this program" in done.stderr
    assert [path.name for path in (place / "photos").iterdir()] == ["holiday.jpg"]


def test_warnings_go_to_stderr(insol: Run, place: Path) -> None:
    assert insol("run", "study.toml", "--out", "result").exit_code == 0
    study = place / "study.toml"
    study.write_text(study.read_text(encoding="utf-8").replace("spacing_m = 4", "spacing_m = 5"), encoding="utf-8")
    done = insol("run", "study.toml", "--out", "result")
    assert done.exit_code == 0
    assert done.stderr.startswith("warning: casting anew")


def test_view_of_something_else_is_one_line(insol: Run, place: Path) -> None:
    done = insol("view", "nothing", "--picture", "a.png")
    assert done.exit_code == 2
    assert done.stderr == (
        "insol: nothing: this is not a result folder: result.json is not there. insol run STUDY --out DIR makes one\n"
    )


def test_view_asks_for_the_picture_it_is_asked_for(insol: Run, place: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    from insol.output import picture

    asked: dict[str, object] = {}
    monkeypatch.setattr(picture, "draw_picture", lambda folder, path, **settings: asked.update(settings, to=path))
    done = insol("view", "result", "--picture", "a.png", "--period", "equinox", "--show", "shaded", "--view", "plan")
    assert done.output == "wrote a.png\n"
    assert asked == {"period": "equinox", "quantity": "shaded_fraction", "view": "plan", "to": Path("a.png")}
