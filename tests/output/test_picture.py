"""Pictures off screen: pixels hold the scale's colours, words do no harm, errors are one line."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from invented_town import Town
from numpy.typing import NDArray

from insol.errors import ResultError
from insol.output.colours import NO_VALUE, NO_VALUE_STRIPE, colours_of
from insol.output.picture import MARGIN, SIDES, draw_picture, frame_of
from insol.output.view_data import load_view

SHADE = 2  # of 255: rounding on the way through the graphics library and the supersampling
SECONDS = 120
SMALL, LARGE = (720, 480), (1800, 1200)

pytestmark = pytest.mark.usefixtures("drawing_available")


def pixels_of(path: Path) -> NDArray[np.int64]:
    """A picture (height, width, 3), rows from the bottom, as the frame counts them."""
    from matplotlib.image import imread

    return np.round(imread(path)[::-1, :, :3] * 255).astype(np.int64)


def drawn(town: Town, path: Path, **how: Any) -> NDArray[np.int64]:
    how = {"size": SMALL, **how}
    draw_picture(town.folder, path, **how)
    return pixels_of(path)


@pytest.mark.parametrize(
    ("period", "quantity"), [("equinox", "direct_h"), ("year", "direct_h"), ("winter", "shaded_fraction")]
)
def test_roofs_have_the_colours_of_their_values(town: Town, tmp_path: Path, period: str, quantity: Any) -> None:
    """No light, no shading, no texture comes between a value and its colour."""
    image = drawn(town, tmp_path / "plan.png", view="plan", period=period, quantity=quantity, size=(1200, 800))
    data = load_view(town.folder)
    scale = data.scale(period, quantity)
    roofs = town.faces.query("measure == 'facades' and tilt_deg == 0")
    places = roofs[["x_m", "y_m", "z_m"]].to_numpy() - data.offset
    x, y = np.floor(frame_of(data, "plan", (1200, 800)).pixels(places)).astype(int).T
    wanted = colours_of(roofs[f"{period}_{quantity}"].to_numpy(), scale)
    assert len(roofs) > 500 and np.ptp(wanted.astype(int), axis=0).max() > 50
    np.testing.assert_allclose(image[y, x], wanted, rtol=0, atol=SHADE)


@pytest.mark.parametrize("hours", [0.0, 10.0, 12.0])
def test_a_value_looks_the_same_from_every_side(own_town: Callable[..., Town], tmp_path: Path, hours: float) -> None:
    """All faces at one value: the measured part of the bird's view has one colour, walls and roofs alike."""
    town = own_town()
    town.faces.assign(equinox_direct_h=hours).to_csv(town.folder / "faces.csv", index=False)
    high = LARGE[1]
    image = drawn(town, tmp_path / "bird.png", size=LARGE)[int(MARGIN * high) : int((1 - MARGIN) * high)].reshape(-1, 3)
    data = load_view(town.folder)
    wanted = colours_of(np.array([hours]), data.scale("equinox", "direct_h"))[0].astype(int)
    coloured = image[np.ptp(image, axis=1) > 40]
    same = np.abs(coloured - wanted).max(axis=1) <= SHADE
    assert len(coloured) > 0.1 * len(image)
    assert same.mean() > 0.96  # the lines along edges have the rest


def test_covered_faces_are_hatched(town: Town, tmp_path: Path) -> None:
    image = drawn(town, tmp_path / "bird.png", size=LARGE)
    data = load_view(town.folder)
    covered = town.faces.query("status == 'covered'")
    places = covered[["x_m", "y_m", "z_m"]].to_numpy() - data.offset
    x, y = np.floor(frame_of(data, "bird", LARGE).pixels(places)).astype(int).T
    inside = np.concatenate([image[y + up, x + across] for up in range(-6, 7) for across in range(-6, 7)])
    rose = inside[np.ptp(inside, axis=1) < 45]
    assert len(rose) > 0.98 * len(inside)  # nothing of the scale's
    between, stripe = (np.percentile(rose, share, axis=0) for share in (90, 10))
    np.testing.assert_allclose(between, NO_VALUE, rtol=0, atol=6)
    np.testing.assert_allclose(stripe, NO_VALUE_STRIPE, rtol=0, atol=30)  # thin, and smoothed by the supersampling


def test_the_surroundings_are_grey_and_have_form(town: Town, tmp_path: Path) -> None:
    from insol.output.ply import read_ply

    image = drawn(town, tmp_path / "bird.png")
    data = load_view(town.folder)
    frame = frame_of(data, "bird", SMALL)
    quads = (read_ply(town.folder / "context.ply").triangles - data.offset).reshape(-1, 6, 3)
    x, y = np.floor(frame.pixels(quads.mean(axis=1))).astype(int).T
    seen = (x > 0) & (x < SMALL[0]) & (y > MARGIN * SMALL[1]) & (y < (1 - MARGIN) * SMALL[1])
    tones = image[y[seen], x[seen]]
    grey = tones[np.ptp(tones, axis=1) < 6]
    assert len(grey) > 20  # others lie behind measured blocks
    assert len(np.unique(grey[:, 0])) >= 3  # a roof and two walls


TITLES = (
    r"Block $\frac{a}{b & $x_{",
    "日照 — Sonne — ☼ — שמש",
    "one\ntwo\t\x00\x1b[31m",
    "A long title " * 40,
    "",
    "<script>alert(1)</script>",
)


@pytest.mark.parametrize("title", TITLES)
def test_titles_do_no_harm(own_town: Callable[..., Town], tmp_path: Path, title: str) -> None:
    """Warnings are errors here: no formula is tried, no missing letter complained of."""
    path = tmp_path / "bird.png"
    image = drawn(own_town(title=title), path)
    assert image.shape == (SMALL[1], SMALL[0], 3)
    compass = image[int(0.86 * SMALL[1]) :, int(0.93 * SMALL[0]) :]
    assert compass.min() < 90  # the needle's ink: a long title does not push it out


@pytest.mark.parametrize("size", [(641, 427), (400, 1000), (1000, 333)])
def test_pictures_have_the_size_asked_for(town: Town, tmp_path: Path, size: tuple[int, int]) -> None:
    assert drawn(town, tmp_path / "bird.png", size=size).shape == (size[1], size[0], 3)


def test_the_same_picture_twice(town: Town, tmp_path: Path) -> None:
    for name in ("one.png", "two.png"):
        draw_picture(town.folder, tmp_path / name, size=SMALL)
    assert (tmp_path / "one.png").read_bytes() == (tmp_path / "two.png").read_bytes()


def test_a_users_style_changes_nothing(town: Town, tmp_path: Path) -> None:
    import matplotlib

    plain = drawn(town, tmp_path / "plain.png")
    with matplotlib.rc_context({"font.size": 30, "text.usetex": True, "figure.facecolor": "red", "axes.titlesize": 40}):
        assert np.array_equal(drawn(town, tmp_path / "styled.png"), plain)
        assert matplotlib.rcParams["font.size"] == 30  # and ours changes nothing of theirs


@pytest.mark.parametrize(
    ("name", "how", "message"),
    [
        ("p.jpg", {}, r"p\.jpg: a picture is written as PNG"),
        ("none/p.png", {}, r"p\.png: the picture cannot be written: No such file"),
        ("p.png", {"size": (0, 480)}, f"0 by 480 pixels; a side may have {SIDES[0]} to {SIDES[1]}"),
        ("p.png", {"period": "summer"}, 'no period "summer"'),
    ],
)  # fmt: skip
def test_what_cannot_be_drawn(town: Town, tmp_path: Path, name: str, how: dict[str, Any], message: str) -> None:
    with pytest.raises(ResultError, match=message):
        draw_picture(town.folder, tmp_path / name, **{"size": SMALL, **how})
    assert list(tmp_path.iterdir()) == []


def test_nothing_is_said_on_stderr(town: Town, environment: dict[str, str], tmp_path: Path) -> None:
    """Neither by VTK nor by what it draws through; only a process of its own shows what they write past Python."""
    call = f"draw_picture({str(town.folder)!r}, {str(tmp_path / 'p.png')!r}, size={SMALL})"
    done = subprocess.run(
        [sys.executable, "-c", f"from insol.output.picture import draw_picture; {call}"],
        capture_output=True, text=True, check=False, timeout=SECONDS, env=environment,
    )  # fmt: skip
    assert (done.returncode, done.stderr, done.stdout) == (0, "", "")
    assert (tmp_path / "p.png").is_file()
