"""The legend: a bar of the scale with round numbers and its unit, drawn by matplotlib for picture and window."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from insol.output.colours import NO_VALUE, Scale, colours_of

INK = "#2b2926"
PALE_INK = "#6d6963"
LINE = "#5b5853"


def draw_legend(figure: Any, box: tuple[float, float, float, float], scale: Scale, *, holes: bool) -> None:
    """Draw the bar into a box (left, bottom, width, height) of a figure.

    Parameters
    ----------
    holes : whether some faces have no value; then their tone is named
    """
    axes = figure.add_axes(box)
    steps = np.linspace(scale.low, scale.high, 256)
    axes.imshow(colours_of(steps, scale)[None], aspect="auto", extent=(scale.low, scale.high, 0, 1))
    axes.set_yticks([])
    axes.set_xticks(scale.ticks, [f"{tick:,.4g}" for tick in scale.ticks])
    axes.tick_params(labelsize=9, colors=INK, length=3, color=LINE)
    for side in axes.spines.values():
        side.set(color=LINE, linewidth=0.6)
    axes.set_title(scale.label, size=9.5, color=INK, loc="left", pad=5)
    if holes:
        axes.set_title("■ no value", size=8.5, color=np.array(NO_VALUE) / 255, loc="right", pad=5)


def font_file() -> str:
    """The typeface that matplotlib brings, for words that VTK writes."""
    from matplotlib import font_manager

    return str(font_manager.findfont("DejaVu Sans"))


def legend_image(scale: Scale, *, holes: bool, background: str) -> NDArray[np.uint8]:
    """The legend as pixels (height, width, 3), for the window."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    figure = Figure(figsize=(3.6, 0.72), dpi=100, facecolor=background)
    canvas = FigureCanvasAgg(figure)
    draw_legend(figure, (0.05, 0.38, 0.9, 0.22), scale, holes=holes)
    canvas.draw()
    return np.asarray(canvas.buffer_rgba())[..., :3].copy()
