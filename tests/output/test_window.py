"""The window under a display of its own: clicks and keys go through the toolkit's events, as a person's do."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from invented_town import Town

from insol.output.colours import colours_of
from insol.output.face_words import words_of_face
from insol.output.view_data import load_view

DRIVER = Path(__file__).with_name("window_driver.py")
SECONDS = 180
SHADE = 2  # of 255: rounding on the way through the graphics library


@pytest.fixture(scope="module")
def seen(
    display: str, environment: dict[str, str], town: Town, tmp_path_factory: pytest.TempPathFactory
) -> dict[str, Any]:
    """What the window showed after each step of `window_driver`."""
    out = tmp_path_factory.mktemp("window")
    done = subprocess.run(
        [sys.executable, "-W", "error", str(DRIVER), str(town.folder), str(out), *(str(row) for row in rows_of(town))],
        capture_output=True, text=True, timeout=SECONDS, check=False,
        env={**environment, "DISPLAY": display},
    )  # fmt: skip
    assert (done.returncode, done.stderr) == (0, "")
    return {"out": out, **json.loads((out / "seen.json").read_text(encoding="utf-8"))}


def rows_of(town: Town) -> tuple[int, int]:
    """The roof of the tallest measured block, and a façade that the sun-side camera sees."""
    faces = town.faces.query("measure == 'facades' and tilt_deg == 0")
    roof = faces.index[(faces["z_m"] == faces["z_m"].max()).argmax() + 20]
    wall = town.faces.query("part == 'block-18' and face == 70").index[0]
    return int(roof), int(wall)


def test_a_click_on_a_face_says_what_it_has(seen: dict[str, Any], town: Town) -> None:
    data = load_view(town.folder)
    roof, wall = rows_of(town)
    assert seen["start"]["panel"] is None
    assert seen["roof clicked"]["panel"] == words_of_face(data, roof, "equinox").text
    assert seen["wall clicked"]["panel"] == words_of_face(data, wall, "equinox").text
    face = town.faces.loc[wall]
    assert f"{face['part']}, face {face['face']}" in seen["wall clicked"]["panel"]
    assert f"shaded fraction: {face['equinox_shaded_fraction']:.2f}" in seen["wall clicked"]["panel"]
    assert "sun: 08:00:00 to" in seen["wall clicked"]["panel"]


def test_a_drag_is_no_click(seen: dict[str, Any]) -> None:
    assert seen["dragged"]["panel"] == seen["wall clicked"]["panel"]
    assert seen["dragged"]["towards"] != seen["wall clicked"]["towards"]


def test_surroundings_hide_what_lies_behind_them(seen: dict[str, Any]) -> None:
    assert seen["surroundings clicked"]["panel"] is None


def test_keys(seen: dict[str, Any]) -> None:
    assert [seen[key]["period"] for key in ("key n", "key n again", "key b")] == ["winter", "year", "winter"]
    assert (seen["key b"]["quantity"], seen["key h"]["quantity"]) == ("direct_h", "shaded_fraction")
    assert (seen["key h"]["view"], seen["key t"]["view"]) == ("bird", "plan")
    np.testing.assert_allclose(seen["key t"]["towards"], [0, 0, 1], rtol=0, atol=1e-9)


def test_keys_of_the_toolkit_do_nothing(seen: dict[str, Any]) -> None:
    """VTK's w, s, p, 3 and f would show wires, mark a body, part the picture in red and green, fly."""
    assert seen["foreign keys"] == seen["key t"]


def test_buttons(seen: dict[str, Any]) -> None:
    assert seen["button year"]["period"] == "year"
    assert seen["button hours of direct sun"]["quantity"] == "direct_h"
    assert seen["button bird"]["view"] == "bird"


def test_plates_follow_the_windows_size(seen: dict[str, Any]) -> None:
    (wide, high), corners = seen["resized"]["size"], seen["resized"]["corners"]
    assert [wide, high] == [1100, 760] != seen["start"]["size"]
    assert corners["head"][1] == high - 16 and corners["legend"][2] == wide - 16
    assert seen["button equinox, resized"]["period"] == "equinox"


def test_the_compass_measures_what_is_seen(seen: dict[str, Any]) -> None:
    closer, before = seen["closer"], seen["resized"]
    assert before["across_m"] in {5, 10, 20} and closer["across_m"] < before["across_m"]


def test_colours_on_the_screen_are_the_scales(seen: dict[str, Any], town: Town) -> None:
    from matplotlib.image import imread

    image = np.round(imread(seen["out"] / "roof.png")[::-1, :, :3] * 255)
    roof, _ = rows_of(town)
    scale = load_view(town.folder).scale("equinox", "direct_h")
    wanted = colours_of(town.faces["equinox_direct_h"].to_numpy()[[roof]], scale)[0]
    x, y = seen["roof pixel"]
    np.testing.assert_allclose(image[y, x], wanted, rtol=0, atol=SHADE)


def test_q_closes_it_and_keeps_the_last_sight(seen: dict[str, Any]) -> None:
    from matplotlib.image import imread

    assert seen["closed"] is True
    assert imread(seen["out"] / "last.png").std() > 0.05
