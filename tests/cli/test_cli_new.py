"""`insol new`: what the files tell is written down, what they cannot tell is asked for."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from click.testing import Result

from insol.cli.up_axis import likely_up
from insol.errors import StudyError
from insol.study.description import FacesMeasure, GroundMeasure
from insol.study.reading import load_study

Run = Callable[..., Result]
Boxes = Callable[..., str]
SITE = ["--latitude", "51.5", "--longitude", "0", "--time-zone", "Europe/London"]


def test_with_everything_known_the_study_can_be_read_at_once(insol: Run, place: Path) -> None:
    (place / "proposed.obj").write_text((place / "block.obj").read_text(encoding="utf-8"), encoding="utf-8")
    done = insol("new", "around.obj", "proposed.obj", "--out", "new.toml", "--units", "m", "--year", "2025", *SITE)
    assert done.exit_code == 0, done.output
    study = load_study(place / "new.toml")
    assert [(str(model.file), model.units, model.up, model.role) for model in study.models] == [
        ("around.obj", "m", "z", "surroundings"),
        ("proposed.obj", "m", "z", "proposed"),
    ]
    facades, ground = study.measures
    assert isinstance(facades, FacesMeasure)
    assert facades.roles == ("proposed",)
    assert isinstance(ground, GroundMeasure)
    # 10 m around the block, which stands from (0, 0) to (10, 12).
    assert ground.polygon == ((-10.0, -10.0), (20.0, -10.0), (20.0, 22.0), (-10.0, 22.0))
    assert {period.year for period in study.periods} == {2025}


def test_what_is_not_known_is_refused_key_by_key_until_it_is_filled_in(insol: Run, place: Path) -> None:
    done = insol("new", "block.obj", "--out", "new.toml")
    assert "to be filled in there: latitude, longitude, time_zone, units" in done.output
    path = place / "new.toml"
    for key in ("latitude", "longitude", "time_zone", "units"):
        with pytest.raises(StudyError, match=f"{key} is missing"):
            load_study(path)
        text = path.read_text(encoding="utf-8")
        path.write_text(text.replace(f"# {key} =", f"{key} ="), encoding="utf-8")
    assert load_study(path).models[0].units == "m"


def test_the_unit_is_proposed_by_size_and_never_set(insol: Run, place: Path, boxes: Boxes) -> None:
    millimetres = boxes({"block": (0, 0, 0, 10_000, 12_000, 18_000)})
    (place / "mm.obj").write_text(millimetres, encoding="utf-8")
    done = insol("new", "mm.obj", "--out", "new.toml")
    assert "10 x 12 x 18 m  if its unit is mm" in done.output
    text = (place / "new.toml").read_text(encoding="utf-8")
    assert '# units = "mm"' in text
    assert "#   mm  10 x 12 x 18 m  <- likely" in text
    assert "#   m   10,000 x 12,000 x 18,000 m\n" in text


def test_files_are_named_from_the_studys_folder(insol: Run, place: Path) -> None:
    (place / "studies").mkdir()
    assert insol("new", "block.obj", "--out", "studies/new.toml", "--units", "m", *SITE).exit_code == 0
    assert load_study(place / "studies" / "new.toml").models[0].file == Path("../block.obj")


def test_a_wrong_model_leaves_no_study(insol: Run, place: Path) -> None:
    (place / "empty.obj").touch()
    done = insol("new", "empty.obj", "--out", "new.toml")
    assert done.exit_code == 2
    assert "empty.obj: the file is empty" in done.stderr
    assert not (place / "new.toml").exists()


def test_force_replaces(insol: Run, place: Path) -> None:
    assert insol("new", "block.obj", "--force").exit_code == 0
    assert "A study for insol" in (place / "study.toml").read_text(encoding="utf-8")


def test_hostile_part_names_stay_in_their_comment(insol: Run, place: Path, boxes: Boxes) -> None:
    name = 'x"""\u2028]=1'
    (place / "odd.obj").write_text(boxes({name: (0, 0, 0, 10, 10, 10)}), encoding="utf-8")
    assert insol("new", "odd.obj", "--out", "new.toml", "--units", "m", *SITE).exit_code == 0
    assert load_study(place / "new.toml").models[0].units == "m"


def turned_boxes(count: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Boxes of several heights, each turned about z by an angle of its own: vertices, triangles, parts."""
    from itertools import product

    random = np.random.default_rng(3)
    unit = np.array(list(product((0.0, 1.0), repeat=3)))
    quads = np.array([(0, 1, 3, 2), (4, 6, 7, 5), (0, 4, 5, 1), (2, 3, 7, 6), (0, 2, 6, 4), (1, 5, 7, 3)])
    triangles = np.concatenate([quads[:, :3], quads[:, [0, 2, 3]]])
    vertices = []
    for _ in range(count):
        turn, size = random.uniform(0, np.pi), random.uniform(5, 30, 3)
        spin = np.array([[np.cos(turn), np.sin(turn), 0], [-np.sin(turn), np.cos(turn), 0], [0, 0, 1]])
        vertices.append(unit * size @ spin + [*random.uniform(-200, 200, 2), random.uniform(-20, 20)])
    all_triangles = np.concatenate([triangles + 8 * number for number in range(count)])
    return np.concatenate(vertices), all_triangles.astype(np.int32), np.repeat(np.arange(count), 12).astype(np.int32)


def test_walls_tell_which_axis_is_up() -> None:
    vertices, triangles, part = turned_boxes(12)
    assert likely_up(vertices, triangles, part) == "z"
    y_up = np.stack([vertices[:, 0], vertices[:, 2], -vertices[:, 1]], axis=1)
    assert likely_up(y_up, triangles, part) == "y"
    from itertools import product

    straight = np.array(list(product((0.0, 10.0), (0.0, 20.0), (0.0, 30.0))))
    assert likely_up(straight, triangles[:12], part[:12]) is None
