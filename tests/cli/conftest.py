"""A small invented place: a block among two neighbours, and the command line run within this process."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

BOX = "v {x0} {y0} {z0}\nv {x1} {y0} {z0}\nv {x1} {y1} {z0}\nv {x0} {y1} {z0}\n" \
      "v {x0} {y0} {z1}\nv {x1} {y0} {z1}\nv {x1} {y1} {z1}\nv {x0} {y1} {z1}\n"  # fmt: skip
SIDES = ((4, 3, 2, 1), (5, 6, 7, 8), (1, 2, 6, 5), (2, 3, 7, 6), (3, 4, 8, 7), (4, 1, 5, 8))


def obj_of_boxes(named: dict[str, tuple[float, float, float, float, float, float]]) -> str:
    """An OBJ text of boxes, each from low x, y, z to high x, y, z."""
    lines = []
    for number, (name, (x0, y0, z0, x1, y1, z1)) in enumerate(named.items()):
        lines.append(f"o {name}\n" + BOX.format(x0=x0, y0=y0, z0=z0, x1=x1, y1=y1, z1=z1))
        lines += ["f " + " ".join(str(corner + 8 * number) for corner in side) for side in SIDES]
    return "\n".join(lines) + "\n"


@pytest.fixture
def boxes() -> Callable[..., str]:
    """Write boxes as OBJ."""
    return obj_of_boxes


STUDY = """\
title = "A small place"
[site]
latitude = 51.5
longitude = 0
time_zone = "Europe/London"
[[model]]
file = "around.obj"
units = "m"
[[model]]
file = "block.obj"
units = "m"
role = "proposed"
[[measure]]
name = "facades"
kind = "faces"
roles = ["proposed"]
spacing_m = 4
[[measure]]
name = "square"
kind = "ground"
polygon = [[0, -20], [10, -20], [10, -5], [0, -5]]
spacing_m = 2.5
[[period]]
name = "equinox"
days = "03-21"
year = 2025
step_min = 30
"""


@pytest.fixture
def place(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with two models and a study, which is also the working folder."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.delenv("INSOL_TRACEBACK", raising=False)
    around = obj_of_boxes({"west": (-30, 0, 0, -12, 12, 15), "south": (0, -45, 0, 10, -30, 9)})
    (tmp_path / "around.obj").write_text(around, encoding="utf-8")
    (tmp_path / "block.obj").write_text(obj_of_boxes({"block": (0, 0, 0, 10, 12, 18)}), encoding="utf-8")
    (tmp_path / "study.toml").write_text(STUDY, encoding="utf-8")
    return tmp_path


@pytest.fixture
def insol() -> Callable[..., Result]:
    """Run the command line as a person would, in this process."""

    def run(*args: str) -> Result:
        from insol.cli.main import insol as command

        return CliRunner().invoke(command, list(args))

    return run
