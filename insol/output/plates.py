"""Plates: words, buttons and legend as pixels, to stand over the window's scene.

Set by matplotlib, as in the pictures: VTK would take a name with two dollar signs for a formula.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from insol.output.colours import Scale
from insol.output.face_words import FaceWords
from insol.output.legend import INK, LINE, PALE_INK, draw_legend, own_style
from insol.output.stage import BACKGROUND

DOTS_PER_INCH = 96.0
PAD = 8
"""Pixels around the words of a plate."""

LEGEND = (360, 75)
BUTTON_PAD = 0.35
"""Between a button's word and its frame, over the size of the letters."""

CANVAS = (1300, 560)
"""Pixels to draw on before the plate is cut out."""

ALPHA = 0.9
LABEL_SHARE = 118
"""Pixels from a label to its words."""

BUTTONS_LEFT = 62.0
"""Pixels from a row's label to its first button."""


@dataclass(frozen=True)
class Button:
    """A word that may be pressed: one of several, of which one is chosen."""

    text: str
    chosen: bool
    press: Callable[[], None]


@dataclass(frozen=True)
class Plate:
    """Pixels, and where they may be pressed.

    Attributes
    ----------
    image : (height, width, 4) uint8, top row first
    buttons : left, bottom, right, top in pixels from the lower left corner, and the button
    """

    image: NDArray[np.uint8]
    buttons: tuple[tuple[tuple[float, float, float, float], Button], ...] = ()


def lines_plate(lines: Sequence[str], *, zoom: float) -> Plate:
    """Quiet lines."""
    with own_style():
        figure = _figure(zoom)
        boxes = [_word(figure, line, (PAD, PAD + 12 + 20 * n), 9, PALE_INK, zoom) for n, line in enumerate(lines)]
        return Plate(_cut(figure, boxes, zoom))


def face_plate(words: FaceWords, *, zoom: float) -> Plate:
    """What is said of a face: its name over a table of labels and words."""
    with own_style():
        figure = _figure(zoom)
        boxes = [_word(figure, words.heading, (PAD, PAD + 13), 10.5, INK, zoom, bold=True)]
        for number, (label, said) in enumerate(words.rows):
            line = PAD + 40 + 21 * number
            boxes.append(_word(figure, label, (PAD, line), 9.5, PALE_INK, zoom))
            boxes.append(_word(figure, said, (PAD + LABEL_SHARE, line), 9.5, INK, zoom))
        return Plate(_cut(figure, boxes, zoom))


def head_plate(
    title: str, line: str, rows: Sequence[tuple[str, Sequence[Button]]], *, zoom: float, most_wide: float
) -> Plate:
    """The study's title, a line that says what is shown, and rows of buttons; a row that is too wide goes on below."""
    with own_style():
        figure = _figure(zoom)
        boxes = [_word(figure, title, (PAD, PAD + 19), 15, INK, zoom, bold=True),
                 _word(figure, line, (PAD, PAD + 45), 10, PALE_INK, zoom)]  # fmt: skip
        placed: list[tuple[tuple[float, float, float, float], Button]] = []
        down = PAD + 78.0
        for label, buttons in rows:
            boxes.append(_word(figure, label, (PAD, down), 9, PALE_INK, zoom))
            left = PAD + BUTTONS_LEFT
            for button in buttons:
                box = _button(figure, button, (left, down), zoom)
                if box[2] > most_wide * zoom and left > PAD + BUTTONS_LEFT:
                    figure.texts[-1].remove()
                    left, down = PAD + BUTTONS_LEFT, down + 28
                    box = _button(figure, button, (left, down), zoom)
                placed.append((box, button))
                left = box[2] / zoom + 7
            down += 30
        image = _cut(figure, [*boxes, *(box for box, _ in placed)], zoom)
        height = len(image)
        return Plate(image, tuple(((x0, height - y1, x1, height - y0), button) for (x0, y0, x1, y1), button in placed))


def bare_word(text: str, *, zoom: float, bold: bool = False) -> Plate:
    """Small words without a ground."""
    with own_style():
        figure = _figure(zoom)
        figure.patch.set_alpha(0.0)
        word = figure.text(0.5, 0.5, text, size=10 if bold else 8.5, color=INK if bold else PALE_INK, va="center",
                           weight="bold" if bold else "normal")  # fmt: skip
        box = word.get_window_extent().padded(1.0)
        figure.canvas.draw()
        pixels = np.asarray(figure.canvas.buffer_rgba())[::-1]
        return Plate(pixels[int(box.y0) : int(np.ceil(box.y1)), int(box.x0) : int(np.ceil(box.x1))][::-1].copy())


def legend_plate(scale: Scale, *, no_value: str, zoom: float) -> Plate:
    """The legend."""
    with own_style():
        figure = _figure(zoom, LEGEND)
        draw_legend(figure, (0.045, 0.36, 0.9, 0.24), scale, no_value=no_value)
        figure.canvas.draw()
        return Plate(np.asarray(figure.canvas.buffer_rgba()).copy())


def _figure(zoom: float, size: tuple[int, int] = CANVAS) -> Any:
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.colors import to_rgba
    from matplotlib.figure import Figure

    inches = (size[0] / DOTS_PER_INCH, size[1] / DOTS_PER_INCH)
    figure = Figure(figsize=inches, dpi=DOTS_PER_INCH * zoom, facecolor=to_rgba(BACKGROUND, ALPHA))
    FigureCanvasAgg(figure)
    return figure


def _word(
    figure: Any, text: str, place: tuple[float, float], size: float, colour: str, zoom: float, *, bold: bool = False,
    frame: dict[str, Any] | None = None,
) -> tuple[float, float, float, float]:  # fmt: skip
    """Write on a line that begins at a place, counted from the upper left; returns left, top, right, bottom."""
    word = figure.text(place[0] / CANVAS[0], 1 - place[1] / CANVAS[1], text, size=size, color=colour, va="baseline",
                       weight="bold" if bold else "normal", bbox=frame)  # fmt: skip
    box = word.get_window_extent()
    height = CANVAS[1] * zoom
    return box.x0, height - box.y1, box.x1, height - box.y0


def _button(figure: Any, button: Button, place: tuple[float, float], zoom: float) -> tuple[float, float, float, float]:
    """A button whose frame begins at a place of a line; returns the frame."""
    colour, ground, edge = (BACKGROUND, INK, INK) if button.chosen else (INK, BACKGROUND, LINE)
    frame = {"boxstyle": f"round,pad={BUTTON_PAD},rounding_size=0.3", "linewidth": 0.8, "edgecolor": edge,
             "facecolor": ground}  # fmt: skip
    left, top, right, bottom = _word(figure, button.text, (place[0] + 5, place[1]), 9, colour, zoom, frame=frame)
    around = BUTTON_PAD * 9 * DOTS_PER_INCH / 72 * zoom
    return left - around, top - around, right + around, bottom + around


def _cut(figure: Any, boxes: Sequence[tuple[float, float, float, float]], zoom: float) -> NDArray[np.uint8]:
    """The part of the figure that holds all boxes and some space around."""
    figure.canvas.draw()
    right, bottom = (int(np.ceil(max(box[side] for box in boxes) + PAD * zoom)) for side in (2, 3))
    return np.asarray(figure.canvas.buffer_rgba())[:bottom, :right].copy()
