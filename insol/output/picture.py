"""A picture of a result, drawn off screen: the scene by VTK, all that is written by matplotlib."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from insol.errors import ResultError
from insol.output.colours import Quantity
from insol.output.drawing import require_drawing
from insol.output.ground_ring import north_of, ring_points, round_length
from insol.output.legend import INK, LINE, PALE_INK, draw_legend
from insol.output.stage import BACKGROUND, Camera, View, aim, camera_of, framed, put_on_stage, reach
from insol.output.view_data import ViewData, load_view, said

DOTS_PER_INCH = 150
MARGIN = 0.13
"""Of the picture, left free around the measured faces: context, title, legend."""

CAUTION = "Geometric hours of direct sun, cloudless sky. Check local rules; not a certificate."


def draw_picture(
    folder: Path | str,
    path: Path | str,
    *,
    period: str | None = None,
    quantity: Quantity = "direct_h",
    view: View = "bird",
    size: tuple[int, int] = (1800, 1200),
) -> None:
    """Draw a result into a PNG file.

    Parameters
    ----------
    period : name of one of the result's periods; the first by default
    size : width and height in pixels

    Raises
    ------
    ResultError
        The folder is no result, or has no such period; the picture cannot be written.
    MissingPackage
        This machine cannot draw.
    """
    data = load_view(Path(folder))
    chosen = data.period(period)
    if Path(path).suffix.lower() != ".png":
        raise ResultError("a picture is written as PNG", where=str(path), hint="give it a name that ends in .png")
    require_drawing()
    camera = camera_of(view, data)
    centre, half_height = framed(data, camera, size[0] / size[1], MARGIN)
    image = _scene_image(data, chosen["name"], quantity, camera, centre, half_height, size)
    _compose(image, data, chosen, quantity, camera, 2 * half_height, size, Path(path))


def _scene_image(
    data: ViewData,
    period: str,
    quantity: Quantity,
    camera: Camera,
    centre: NDArray[np.float64],
    half_height: float,
    size: tuple[int, int],
) -> NDArray[np.uint8]:
    """The scene alone (height, width, 3)."""
    import pyvista

    plotter = pyvista.Plotter(off_screen=True, window_size=list(size), lighting="none")
    try:
        plotter.enable_anti_aliasing("ssaa")
        put_on_stage(plotter, data, period, quantity)
        aim(plotter, camera, centre, half_height, reach(data))
        image = plotter.screenshot(return_img=True)
    finally:
        plotter.close()
    return np.asarray(image)


def _compose(
    image: NDArray[np.uint8],
    data: ViewData,
    period: dict[str, Any],
    quantity: Quantity,
    camera: Camera,
    height_m: float,
    size: tuple[int, int],
    path: Path,
) -> None:
    """Title, legend, compass and caution put over the scene."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    figure = Figure(figsize=(size[0] / DOTS_PER_INCH, size[1] / DOTS_PER_INCH), dpi=DOTS_PER_INCH, facecolor=BACKGROUND)
    FigureCanvasAgg(figure)
    whole = figure.add_axes((0, 0, 1, 1))
    whole.imshow(image, interpolation="none", aspect="auto", extent=(0, size[0], 0, size[1]))
    whole.set(xlim=(0, size[0]), ylim=(0, size[1]))
    whole.axis("off")
    plate = {"facecolor": BACKGROUND, "edgecolor": "none", "alpha": 0.82, "pad": 4}
    figure.text(0.03, 0.955, data.title, size=15, color=INK, va="top", weight="bold", bbox=plate)
    figure.text(0.03, 0.912, f"{said(period)}", size=10, color=PALE_INK, va="top", bbox=plate)
    figure.text(0.03, 0.025, CAUTION, size=7, color=PALE_INK, va="bottom", bbox=plate)
    holes = bool(np.isnan(data.values(period["name"], quantity)).any())
    draw_legend(figure, (0.70, 0.075, 0.26, 0.022), data.scale(period["name"], quantity), holes=holes)
    _compass(whole, camera, data.north_deg, size[1] / height_m, size)
    try:
        figure.savefig(path, dpi=DOTS_PER_INCH, metadata={"Software": None})
    except OSError as failure:
        raise ResultError(f"the picture cannot be written: {failure.strerror}", where=str(path)) from failure


def _compass(axes: Any, camera: Camera, north_deg: float, pixels_per_m: float, size: tuple[int, int]) -> None:
    """A ring that lies on the ground of the scene: it shows north, and how long a round length is."""
    radius_m = round_length(0.075 * size[1] / pixels_per_m)
    ring, north = ring_points(radius_m), north_of(north_deg) * radius_m
    centre = np.array([0.90 * size[0], 0.88 * size[1]])
    flat = centre + camera.flat(ring) * pixels_per_m
    tip = centre + camera.flat(north[None])[0] * pixels_per_m
    across = np.array([north[1], -north[0], 0.0]) * 0.16
    wings = centre + camera.flat(np.stack([across, -across])) * pixels_per_m
    axes.fill(flat[:, 0], flat[:, 1], color=BACKGROUND, alpha=0.82, linewidth=0)
    axes.plot(flat[:, 0], flat[:, 1], color=LINE, linewidth=0.9)
    axes.fill(*np.stack([wings[0], tip, wings[1]]).T, color=INK, linewidth=0)
    outward = (tip - centre) / max(float(np.linalg.norm(tip - centre)), 1e-9)
    axes.text(*(tip + outward * 16), "N", ha="center", va="center", size=10, color=INK, weight="bold")
    axes.text(
        centre[0], flat[:, 1].min() - 26, f"ring {2 * radius_m:g} m across", ha="center", va="top", size=8, color=PALE_INK
    )
