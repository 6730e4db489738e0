"""The legend: a bar of the scale with round numbers and its unit, drawn by matplotlib for picture and window."""

from __future__ import annotations

import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import numpy as np

from insol.output.colours import NO_VALUE, NO_VALUE_STRIPE, Quantity, Scale, colours_of

INK = "#2b2926"
PALE_INK = "#6d6963"
LINE = "#5b5853"

TYPEFACES = (
    "DejaVu Sans", "Noto Sans CJK JP", "Hiragino Sans", "PingFang SC", "Microsoft YaHei", "Yu Gothic", "Malgun Gothic",
    "Noto Sans Arabic", "Noto Sans Hebrew", "Noto Sans Devanagari", "Arial Unicode MS",
)  # fmt: skip
"""The typeface that matplotlib brings; then, for letters that it lacks, those of them that are installed."""

HATCH = "/////"

NO_VALUE_SAID: dict[Quantity, str] = {"direct_h": "covered", "shaded_fraction": "covered, or never sunlit"}
"""Why a face has no value."""


@contextmanager
def own_style() -> Iterator[None]:
    """Draw the same on every machine.

    No style of the user's, no name taken for a formula, no complaint of letters that no typeface has.
    """
    import matplotlib
    from matplotlib import font_manager

    with matplotlib.rc_context(), warnings.catch_warnings():
        matplotlib.rcdefaults()
        installed = set(font_manager.get_font_names())
        matplotlib.rcParams["font.family"] = [name for name in TYPEFACES if name in installed]
        matplotlib.rcParams["text.parse_math"] = False
        matplotlib.rcParams["hatch.linewidth"] = 0.9
        warnings.filterwarnings("ignore", message="Glyph .* missing from")
        yield


def draw_legend(figure: Any, box: tuple[float, float, float, float], scale: Scale, *, no_value: str) -> None:
    """Draw the bar into a box (left, bottom, width, height) of a figure.

    Parameters
    ----------
    no_value : what the hatched faces are; empty where there are none
    """
    axes = figure.add_axes(box)
    steps = np.linspace(scale.low, scale.high, 256)
    axes.imshow(colours_of(steps, scale)[None], aspect="auto", extent=(scale.low, scale.high, 0, 1))
    axes.set_yticks([])
    axes.set_xticks(scale.ticks, [f"{tick:,.4g}" for tick in scale.ticks])
    axes.tick_params(labelsize=9, colors=INK, length=3, color=LINE)
    for side in axes.spines.values():
        side.set(color=LINE, linewidth=0.6)
    axes.set_title(scale.label, size=9.5, color=INK, loc="left", pad=6)
    if no_value:
        name = axes.set_title(no_value, size=8.5, color=PALE_INK, loc="right", pad=6)
        _draw_swatch(axes, name)


def _draw_swatch(axes: Any, name: Any) -> None:
    """A hatched patch before a word."""
    from matplotlib.offsetbox import AnnotationBbox, DrawingArea
    from matplotlib.patches import Rectangle

    area = DrawingArea(15, 7.5)
    area.add_artist(Rectangle((0, 0), 15, 7.5, facecolor=_unit(NO_VALUE), edgecolor=_unit(NO_VALUE_STRIPE), hatch=HATCH,
                              linewidth=0.6))  # fmt: skip
    axes.add_artist(AnnotationBbox(area, (0, 0.5), xycoords=name, xybox=(-6, 0), boxcoords="offset points",
                                   box_alignment=(1, 0.5), frameon=False, pad=0, annotation_clip=False))  # fmt: skip


def _unit(colour: tuple[int, int, int]) -> tuple[float, ...]:
    return tuple(channel / 255 for channel in colour)
