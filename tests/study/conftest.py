"""A valid study with every key, in a folder with the files that it names."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

VALID = """\
title = "New block at the tannery"
hours_per_day = [1, 2.5]

[site]
latitude = 53.41            # degrees
longitude = -2.99
time_zone = "Europe/London" # IANA name or "+05:30"
elevation_m = 12
north_deg = 0

[[model]]
file = "surroundings.obj"
units = "m"
up = "z"
role = "surroundings"

[[model]]
file = "proposed.obj"
units = "mm"
up = "y"
role = "proposed"

[[measure]]
name = "facades"
kind = "faces"
parts = ["block-*"]
roles = ["proposed"]
spacing_m = 1.0

[[measure]]
name = "square"
kind = "ground"
polygon = [[0, 0], [40, 0], [40, 30], [0, 30]]
height_m = 0.5
spacing_m = 2

[[measure]]
name = "windows"
kind = "points"
file = "windows.csv"

[[period]]
name = "equinox"
days = "03-21"
year = 2025
from = "09:00"
to = "15:00"
clock = "local"
step_min = 60
lowest_altitude_deg = 5

[[period]]
name = "winter"
days = "10-01/03-31"
year = 2024
"""


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A folder with the files that the valid study names."""
    for name in ("surroundings.obj", "proposed.obj", "windows.csv"):
        (tmp_path / name).touch()
    return tmp_path


@pytest.fixture
def written(folder: Path) -> Callable[[str], Path]:
    """Write a text as study.toml."""

    def write(text: str) -> Path:
        path = folder / "study.toml"
        path.write_text(text, encoding="utf-8")
        return path

    return write


@pytest.fixture
def valid() -> str:
    """The text of the valid study."""
    return VALID
