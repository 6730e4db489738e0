"""A picture of a result, drawn off screen: the scene by VTK, all that is written by matplotlib."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from insol.errors import ResultError
from insol.output.colours import Quantity
from insol.output.drawing import require_drawing
from insol.output.ground_ring import ground_ring
from insol.output.legend import INK, LINE, NO_VALUE_SAID, PALE_INK, draw_legend, own_style
from insol.output.stage import BACKGROUND, Camera, View, aim, camera_of, framed, put_on_stage, reach
from insol.output.view_data import ViewData, load_view, said, shortened

PAGE = (1800, 1200, 150)
"""The page that sizes of letters are made for: pixels, and dots per inch. A smaller picture has smaller letters."""

SIDES = (200, 8192)
"""Pixels that a side of a picture may have: below, words cannot be read; above, drawing libraries give up."""

MARGIN = 0.15
"""Of the picture, left free around the measured faces: context, and over it title and legend."""

BANDS = ((0.85, 0.90), (0.15, 0.105))
"""Heights between which the surroundings fade into the page, behind the words at the top and at the foot."""

LEGEND_BOX = (0.70, 0.058, 0.265, 0.02)
VEIL = 0.93
"""How far they fade."""

COMPASS_SHARE = 0.058
"""Radius of the compass over the picture's height, at most."""

LONGEST_TITLE = 64
"""Letters that fit beside the compass; a longer title is set smaller, then cut."""

CAUTION = "Geometric hours of direct sun, cloudless sky. Check local rules; not a certificate."


@dataclass(frozen=True)
class Frame:
    """What part of the scene a picture shows.

    Attributes
    ----------
    centre : (3,) float64 [m]
    height_m : of the picture
    size : width and height in pixels
    """

    camera: Camera
    centre: NDArray[np.float64]
    height_m: float
    size: tuple[int, int]

    def pixels(self, points: NDArray[np.float64]) -> NDArray[np.float64]:
        """Where points (n, 3) [m] lie in the picture (n, 2), from its lower left corner."""
        return np.array(self.size) / 2 + self.camera.flat(points - self.centre) * (self.size[1] / self.height_m)


def draw_picture(
    folder: Path | str,
    path: Path | str,
    *,
    period: str | None = None,
    quantity: Quantity = "direct_h",
    view: View = "bird",
    size: tuple[int, int] = PAGE[:2],
) -> None:
    """Draw a result into a PNG file.

    Parameters
    ----------
    period : name of one of the result's periods; the first by default
    view : from above at an angle, from the side of the noon sun; or straight down
    size : width and height in pixels

    Raises
    ------
    ResultError
        The folder is no result, or has no such period; the picture cannot be written.
    MissingPackage
        This machine cannot draw.
    """
    if Path(path).suffix.lower() != ".png":
        raise ResultError("a picture is written as PNG", where=str(path), hint="give it a name that ends in .png")
    if not all(SIDES[0] <= side <= SIDES[1] for side in size):
        raise ResultError(f"a picture of {size[0]} by {size[1]} pixels; a side may have {SIDES[0]} to {SIDES[1]}")
    data = load_view(Path(folder))
    chosen = data.period(period)
    require_drawing()
    frame = frame_of(data, view, size)
    image = _scene_image(data, chosen["name"], quantity, frame)
    _compose(image, data, chosen, quantity, frame, Path(path))


def frame_of(data: ViewData, view: View, size: tuple[int, int]) -> Frame:
    """The frame that holds all measured faces, with room for the words."""
    camera = camera_of(view, data)
    centre, half_height = framed(data, camera, size[0] / size[1], MARGIN)
    return Frame(camera, centre, 2 * half_height, size)


def _scene_image(data: ViewData, period: str, quantity: Quantity, frame: Frame) -> NDArray[np.uint8]:
    """The scene alone (height, width, 3)."""
    import pyvista

    plotter = pyvista.Plotter(off_screen=True, window_size=list(frame.size), lighting="none")
    try:
        plotter.enable_anti_aliasing("ssaa")
        put_on_stage(plotter, data, period, quantity)
        aim(plotter, frame.camera, frame.centre, frame.height_m / 2, reach(data))
        image = plotter.screenshot(return_img=True)
    finally:
        plotter.close()
    return np.asarray(image)


def _compose(
    image: NDArray[np.uint8], data: ViewData, period: dict[str, Any], quantity: Quantity, frame: Frame, path: Path
) -> None:
    """Title, legend, compass and caution put over the scene."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    width, height = frame.size
    dots = PAGE[2] * min(width / PAGE[0], height / PAGE[1])
    with own_style():
        # A hundredth of a pixel more: rounding must not cost a whole one.
        figure = Figure(figsize=((width + 0.01) / dots, (height + 0.01) / dots), dpi=dots, facecolor=BACKGROUND)
        FigureCanvasAgg(figure)
        whole = figure.add_axes((0, 0, 1, 1))
        whole.imshow(_veiled(image), interpolation="none", aspect="auto", extent=(0, width, 0, height))
        whole.set(xlim=(0, width), ylim=(0, height))
        whole.axis("off")
        _write_words(figure, data, period)
        holes = bool(np.isnan(data.values(period["name"], quantity)).any())
        scale = data.scale(period["name"], quantity)
        draw_legend(figure, LEGEND_BOX, scale, no_value=NO_VALUE_SAID[quantity] * holes)
        _draw_compass(whole, data.north_deg, frame, dots / 72)
        try:
            figure.savefig(path, dpi=dots, metadata={"Software": None})
        except OSError as failure:
            raise ResultError(f"the picture cannot be written: {failure.strerror}", where=str(path)) from failure


def _veiled(image: NDArray[np.uint8]) -> NDArray[np.uint8]:
    """The scene fading into the page at top and foot, where words stand; between them it stays as it is."""
    from matplotlib.colors import to_rgb

    page = 255 * np.array(to_rgb(BACKGROUND))
    place = 1 - (np.arange(len(image)) + 0.5) / len(image)
    ways = np.stack([np.clip((place - begin) / (end - begin), 0.0, 1.0) for begin, end in BANDS])
    # Smoothly, so that no edge is seen where it begins.
    share = (VEIL * ways**2 * (3 - 2 * ways)).max(axis=0)[:, None, None]
    return np.round(image * (1 - share) + page * share).astype(np.uint8)


def _write_words(figure: Any, data: ViewData, period: dict[str, Any]) -> None:
    title = shortened(data.title, 2 * LONGEST_TITLE)
    figure.text(0.03, 0.969, title, size=15 * min(1.0, LONGEST_TITLE / len(title)), color=INK, va="top", weight="bold")
    name = str(period["name"]).replace("_", " ")
    figure.text(0.03, 0.929, f"{name}: {said(period)}", size=10, color=PALE_INK, va="top")
    figure.text(0.03, 0.903, data.place, size=8, color=PALE_INK, va="top")
    figure.text(0.03, 0.03, CAUTION, size=7.5, color=PALE_INK, va="bottom")


def _draw_compass(axes: Any, north_deg: float, frame: Frame, point: float) -> None:
    """A ring that lies on the ground of the scene: it shows north, and how long a round length is.

    Parameters
    ----------
    point : pixels of a typographic point
    """
    width, height = frame.size
    pixels_per_m = height / frame.height_m
    ring = ground_ring(frame.camera, north_deg, COMPASS_SHARE * height / pixels_per_m)
    centre = np.array([0.925 * width, 0.92 * height])
    rim, needle = centre + ring.rim * pixels_per_m, centre + ring.needle * pixels_per_m
    axes.plot(*rim.T, color=LINE, linewidth=0.9)
    axes.fill(*needle.T, color=INK, linewidth=0)
    letter = needle[1] + ring.letter * 7 * point
    axes.text(*letter, "N", ha="center", va="center", size=9, color=INK, weight="bold")
    left = rim[:, 0].min() - 9 * point
    axes.text(left, centre[1], f"ring {ring.across_m:g} m\nacross", ha="right", va="center", size=8, color=PALE_INK)
