"""The window: look around, change period and quantity, click a face and read what it has."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np

from insol.output.colours import Quantity
from insol.output.drawing import require_display
from insol.output.face_words import FaceWords, words_of_face
from insol.output.legend import NO_VALUE_SAID
from insol.output.overlay import Overlay
from insol.output.plates import Button, face_plate, head_plate, legend_plate, lines_plate
from insol.output.stage import SCREEN_EDGES, VIEWS, aim, bring_forward, camera_of, framed, put_on_stage, reach, soup
from insol.output.view_data import ViewData, load_view, said, shortened
from insol.output.window_compass import WindowCompass

KEYS = (
    ("n / b", "next period / the one before"),
    ("h", "hours / shaded fraction"),
    ("t", "bird / plan"),
    ("r", "all in sight"),
    ("q", "close"),
)
MOUSE = (("drag", "turn"), ("shift-drag", "move"), ("wheel", "closer"), ("click a face", "its hours"))

QUANTITIES: dict[Quantity, str] = {"direct_h": "hours of direct sun", "shaded_fraction": "shaded fraction"}

STILL_PIXELS = 4
"""A press and release no farther apart than this is a click, not a turn of the camera."""

LONGEST_TITLE, LONGEST_PERIOD = 80, 28
MARKED = "#c2185b"
SIZE = (1400, 900)
HEAD_SHARE = 0.6
"""Of the window's width, at most, for a row of buttons."""

USUAL_DPI, MOST_ZOOM = 96, 3.0
"""A finer screen has larger letters, up to so many times."""


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
        self._zoom = self._screen_zoom()
        self._pressed = (0, 0)
        _ = data.spells  # read now, so that the first click answers at once
        self._stage = put_on_stage(self.plotter, data, period, quantity, edges=SCREEN_EDGES)
        self.plotter.enable_anti_aliasing("msaa", multi_samples=4)
        self._overlay = Overlay(self.plotter)
        self.aim()
        self.compass = WindowCompass(self.plotter, data.north_deg, self._zoom)
        help_lines = tuple("   ".join(f"{key}: {what}" for key, what in keys) for keys in (MOUSE, KEYS))
        self._overlay.put("help", lines_plate(help_lines, zoom=self._zoom), "left bottom")
        self._write()
        self._listen()

    def show(self, screenshot: Path | None = None) -> None:
        """Hand over to the person; returns when the window is closed."""
        self.plotter.show(screenshot=str(screenshot) if screenshot else False)

    @property
    def panel(self) -> FaceWords | None:
        """What is said of the face that was clicked last."""
        return None if self.picked is None else words_of_face(self.data, self.picked, self.period)

    def step_period(self, by: int) -> None:
        """Go to the next period, or to the one before."""
        names = self.data.period_names
        self.set_period(names[(names.index(self.period) + by) % len(names)])

    def set_period(self, name: str) -> None:
        """Show another period."""
        self.period = name
        self._recolour()

    def swap_quantity(self) -> None:
        """Show the other of hours and shaded fraction."""
        self.set_quantity("shaded_fraction" if self.quantity == "direct_h" else "direct_h")

    def set_quantity(self, quantity: Quantity) -> None:
        """Show hours or shaded fraction."""
        self.quantity = quantity
        self._recolour()

    def swap_view(self) -> None:
        """Look as a bird or from straight above."""
        self.set_view(VIEWS[(VIEWS.index(self.view) + 1) % len(VIEWS)])

    def set_view(self, view: Any) -> None:
        """Look as a bird or from straight above, with all measured faces in sight."""
        self.view = view
        self.aim()
        self._write()
        self.plotter.render()

    def _screen_zoom(self) -> float:
        canvas: Any = self.plotter.render_window
        canvas.DetectDPI()
        return float(np.clip(canvas.GetDPI() / USUAL_DPI, 1.0, MOST_ZOOM))

    def aim(self) -> None:
        """Bring all measured faces into sight."""
        wide, high = self.plotter.render_window.GetSize()
        camera = camera_of(self.view, self.data)
        centre, half_height = framed(self.data, camera, wide / high, 0.16)
        aim(self.plotter, camera, centre, half_height, reach(self.data))

    def click(self, x: int, y: int) -> None:
        """Press the button at a pixel, counted from the lower left, or pick the face there."""
        button = self._overlay.button_at(x, y)
        if button is not None:
            button.press()
        elif not self._overlay.covers(x, y):
            self.pick(x, y)

    def pick(self, x: int, y: int) -> None:
        """Mark the face at a pixel and say what it has; none where something else stands in front."""
        from vtkmodules.vtkRenderingCore import vtkCellPicker

        picker = vtkCellPicker()
        picker.SetTolerance(0.0)
        picker.Pick(x, y, 0, self.plotter.renderer)
        measured = picker.GetActor() is self._stage.actor
        self.picked = int(self.data.face_row[picker.GetCellId()]) if measured else None
        self._mark()
        self._write_face()
        self.plotter.render()

    def _recolour(self) -> None:
        self._stage.colour(self.data, self.period, self.quantity)
        self._write()
        self.plotter.render()

    def _mark(self) -> None:
        for name in ("marked", "marked point"):
            self.plotter.remove_actor(name, render=False)
        if self.picked is None:
            return
        mine = self.data.triangles[self.data.face_row == self.picked]
        rim = soup(mine).clean().extract_feature_edges(boundary_edges=True, feature_edges=False, manifold_edges=False)
        how = {"color": MARKED, "lighting": False, "pickable": False, "render": False, "reset_camera": False}
        bring_forward(self.plotter.add_mesh(rim, line_width=4, name="marked", **how))
        # From afar a face is smaller than a pixel: the point is as large from everywhere.
        self.plotter.add_points(mine.mean(axis=(0, 1))[None], point_size=9 * self._zoom, name="marked point",
                                render_points_as_spheres=True, **how)  # fmt: skip

    def _write(self) -> None:
        """All words, buttons and the legend."""
        period = self.data.period(self.period)
        holes = bool(np.isnan(self.data.values(self.period, self.quantity)).any())
        scale = self.data.scale(self.period, self.quantity)
        head = head_plate(
            shortened(self.data.title, LONGEST_TITLE), said(period), self._buttons(), zoom=self._zoom,
            most_wide=HEAD_SHARE * SIZE[0],
        )  # fmt: skip
        self._overlay.put("head", head, "left top")
        legend = legend_plate(scale, no_value=NO_VALUE_SAID[self.quantity] * holes, zoom=self._zoom)
        self._overlay.put("legend", legend, "right bottom")
        self._write_face()

    def _write_face(self) -> None:
        words = self.panel
        if words is None:
            self._overlay.remove("face")
        else:
            self._overlay.put("face", face_plate(words, zoom=self._zoom), "right top")

    def _buttons(self) -> tuple[tuple[str, list[Button]], ...]:
        def named(text: str, chosen: bool, act: Callable[[Any], None], what: Any) -> Button:
            return Button(text, chosen, lambda: act(what))

        periods = [named(shortened(name, LONGEST_PERIOD), name == self.period, self.set_period, name)
                   for name in self.data.period_names]  # fmt: skip
        shown = [named(text, key == self.quantity, self.set_quantity, key) for key, text in QUANTITIES.items()]
        views = [named(view, view == self.view, self.set_view, view) for view in VIEWS]
        return ("period", periods), ("show", shown), ("view", views)

    def _listen(self) -> None:
        self.plotter.iren.clear_key_event_callbacks()
        for keys, action in (
            (("n",), lambda: self.step_period(1)),
            (("b",), lambda: self.step_period(-1)),
            (("h",), self.swap_quantity),
            (("t",), self.swap_view),
            (("r",), lambda: self.set_view(self.view)),
            (("q", "Escape"), self.plotter.iren.terminate_app),
        ):
            for key in keys:
                self.plotter.add_key_event(key, action)
        # VTK's own letters would turn the faces into wires or the scene red and green: nobody hears them here.
        self.plotter.iren.style.AddObserver("CharEvent", lambda *_: None)
        self.plotter.iren.add_observer("LeftButtonPressEvent", self._press)
        self.plotter.iren.add_observer("LeftButtonReleaseEvent", self._release)
        self.plotter.render_window.AddObserver("WindowResizeEvent", lambda *_: self._overlay.place_all())

    def _press(self, *_: Any) -> None:
        self._pressed = self.plotter.iren.get_event_position()

    def _release(self, *_: Any) -> None:
        x, y = self.plotter.iren.get_event_position()
        if abs(x - self._pressed[0]) <= STILL_PIXELS and abs(y - self._pressed[1]) <= STILL_PIXELS:
            self.click(x, y)
