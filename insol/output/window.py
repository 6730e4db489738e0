"""The window: look around, change period and quantity, click a face and read what it has."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from insol.output.colours import Quantity
from insol.output.drawing import require_display
from insol.output.face_words import words_of_face
from insol.output.ground_ring import ground_ring
from insol.output.legend import INK, LINE, PALE_INK, font_file, legend_image
from insol.output.stage import BACKGROUND, VIEWS, aim, camera_of, framed, put_on_stage, reach, soup
from insol.output.view_data import ViewData, load_view, said

KEYS = (
    ("n", "next period"),
    ("b", "period before"),
    ("h", "hours / shaded fraction"),
    ("t", "bird / plan"),
    ("q", "close"),
)

STILL_PIXELS = 4
"""A press and release no farther apart than this is a click, not a turn of the camera."""

MARKED = "#c2185b"
SIZE = (1400, 900)


def show_window(
    folder: Path | str, *, period: str | None = None, quantity: Quantity = "direct_h", screenshot: Path | None = None
) -> None:
    """Open a window on a result and wait until it is closed.

    Parameters
    ----------
    screenshot : where the window's last sight is kept when it closes

    Raises
    ------
    ResultError
        The folder is no result, or has no such period.
    MissingPackage
        There is no display, or this machine cannot draw.
    """
    data = load_view(Path(folder))
    chosen = data.period(period)["name"]
    require_display()
    ResultWindow(data, chosen, quantity).show(screenshot)


class ResultWindow:
    """A plotter and what it shows now."""

    def __init__(self, data: ViewData, period: str, quantity: Quantity) -> None:
        import pyvista

        self.data = data
        self.period = period
        self.quantity: Quantity = quantity
        self.view = VIEWS[0]
        self.picked: int | None = None
        self.plotter: Any = pyvista.Plotter(window_size=list(SIZE), title=f"{data.title} - insol", lighting="none")
        self._pressed = (0, 0)
        _ = data.spells  # read now, so that the first click answers at once
        self._legend: Any = None
        self._font = font_file()
        self._faces = put_on_stage(self.plotter, data, period, quantity)
        self._ring = ground_ring(data)
        self._put_ring()
        self._aim()
        self._write()
        self._listen()

    def show(self, screenshot: Path | None = None) -> None:
        """Hand over to the person; returns when the window is closed."""
        self.plotter.show(screenshot=str(screenshot) if screenshot else False)

    def step_period(self, by: int) -> None:
        """Go to the next period, or to the one before."""
        names = self.data.period_names
        self.period = names[(names.index(self.period) + by) % len(names)]
        self._recolour()

    def swap_quantity(self) -> None:
        """Show the other of hours and shaded fraction."""
        self.quantity = "shaded_fraction" if self.quantity == "direct_h" else "direct_h"
        self._recolour()

    def swap_view(self) -> None:
        """Look as a bird or from straight above."""
        self.view = VIEWS[(VIEWS.index(self.view) + 1) % len(VIEWS)]
        self._aim()
        self.plotter.render()

    def pick(self, x: int, y: int) -> None:
        """Mark the face at a pixel, counted from the lower left, and say what it has."""
        from vtkmodules.vtkRenderingCore import vtkCellPicker

        picker = vtkCellPicker()
        picker.SetTolerance(0.0)
        picker.Pick(x, y, 0, self.plotter.renderer)
        cell = picker.GetCellId()
        self.picked = int(self.data.face_row[cell]) if 0 <= cell < len(self.data.face_row) else None
        self._mark()
        self._write()
        self.plotter.render()

    def _aim(self) -> None:
        camera = camera_of(self.view, self.data)
        centre, half_height = framed(self.data, camera, SIZE[0] / SIZE[1], 0.16, also=self._ring.points)
        aim(self.plotter, camera, centre, half_height, reach(self.data))

    def _recolour(self) -> None:
        self._faces.cell_data["colour"] = self.data.colours(self.period, self.quantity)
        self._write()
        self.plotter.render()

    def _mark(self) -> None:
        if self.picked is None:
            self.plotter.remove_actor("marked")
            return
        outline = soup(self.data.triangles[self.data.face_row == self.picked]).clean()
        rim = outline.extract_feature_edges(boundary_edges=True, feature_edges=False, manifold_edges=False)
        self.plotter.add_mesh(rim, color=MARKED, line_width=4, lighting=False, pickable=False, name="marked")

    def _write(self) -> None:
        """All words of the window."""
        period = self.data.period(self.period)
        height = SIZE[1]
        self._text("title", self.data.title, (24, height - 46), 15, INK)
        self._text("period", f"{self.period}: {said(period)}", (24, height - 74), 10, PALE_INK)
        self._text("keys", "   ".join(f"{key}  {what}" for key, what in KEYS), (24, 18), 9, PALE_INK)
        hint = "click a face" if self.picked is None else words_of_face(self.data, self.picked, self.period)
        self._text("face", hint, (24, height - 110 - 21 * len(hint.splitlines())), 10, INK)
        holes = bool(np.isnan(self.data.values(self.period, self.quantity)).any())
        self._put_legend(legend_image(self.data.scale(self.period, self.quantity), holes=holes, background=BACKGROUND))

    def _text(self, name: str, text: str, place: tuple[int, int], size: int, colour: str) -> None:
        actor = self.plotter.add_text(
            text, position=place, font_size=size, color=colour, name=name, shadow=False, font_file=self._font
        )
        actor.prop.background_color, actor.prop.background_opacity = BACKGROUND, 0.8

    def _put_ring(self) -> None:
        """The ring that shows north and a length, lying on the ground beside the faces."""
        ring = self._ring
        self.plotter.add_lines(ring.points, color=LINE, width=2, connected=True, name="ring")
        self.plotter.add_mesh(soup(ring.needle), color=INK, lighting=False, pickable=False, name="needle")
        self.plotter.add_point_labels(
            np.stack([ring.north, ring.foot]), ["N", f"{ring.across_m:g} m across"], name="ring words",
            font_size=16, text_color=INK, font_file=self._font, shape=None, show_points=False,
            always_visible=True, justification_horizontal="center", justification_vertical="center",
        )  # fmt: skip

    def _put_legend(self, image: NDArray[np.uint8]) -> None:
        """Lay the legend's pixels over the lower right corner."""
        import pyvista
        from vtkmodules.vtkRenderingCore import vtkActor2D, vtkImageMapper

        if self._legend is not None:
            self.plotter.renderer.RemoveViewProp(self._legend)
        height, width = image.shape[:2]
        pixels = pyvista.ImageData(dimensions=(width, height, 1))
        pixels.point_data["pixels"] = image[::-1].reshape(-1, 3)
        mapper = vtkImageMapper()
        mapper.SetInputData(pixels)
        mapper.SetColorWindow(255)
        mapper.SetColorLevel(127.5)
        self._legend = vtkActor2D()
        self._legend.SetMapper(mapper)
        self._legend.SetPosition(SIZE[0] - width - 24, 40)
        self.plotter.renderer.AddViewProp(self._legend)

    def _listen(self) -> None:
        for key, action in (
            ("n", lambda: self.step_period(1)),
            ("b", lambda: self.step_period(-1)),
            ("h", self.swap_quantity),
            ("t", self.swap_view),
        ):
            self.plotter.add_key_event(key, action)
        self.plotter.iren.add_observer("LeftButtonPressEvent", self._press)
        self.plotter.iren.add_observer("LeftButtonReleaseEvent", self._release)

    def _press(self, *_: Any) -> None:
        self._pressed = self.plotter.iren.get_event_position()

    def _release(self, *_: Any) -> None:
        x, y = self.plotter.iren.get_event_position()
        if abs(x - self._pressed[0]) <= STILL_PIXELS and abs(y - self._pressed[1]) <= STILL_PIXELS:
            self.pick(x, y)
