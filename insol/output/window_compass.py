"""The window's compass: a ground ring in the corner that turns with the scene and measures it."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from insol.output.ground_ring import ground_ring
from insol.output.legend import INK, LINE
from insol.output.overlay import EDGE, plate_actor
from insol.output.plates import Plate, bare_word
from insol.output.stage import Camera

RADIUS = 46.0
"""Pixels, at most."""

CENTRE = (EDGE + 190.0, EDGE + 152.0)
"""Pixels from the window's lower right corner."""

LETTER = 11.0
"""Pixels from the needle's tip to the middle of its N."""


class WindowCompass:
    """Draws itself anew, for the camera as it stands, before every frame."""

    def __init__(self, plotter: Any, north_deg: float, zoom: float) -> None:
        self._plotter, self._north_deg, self._zoom = plotter, north_deg, zoom
        self._rim, self._needle = _flat_actor(LINE), _flat_actor(INK)
        self._letter = bare_word("N", zoom=zoom, bold=True)
        self._letter_actor = plate_actor(self._letter)
        self._words: Plate | None = None
        self._words_actor: Any = None
        self.across_m = 0.0
        for actor in (self._rim, self._needle, self._letter_actor):
            plotter.renderer.AddViewProp(actor)
        plotter.renderer.AddObserver("StartEvent", lambda *_: self._draw())

    def _draw(self) -> None:
        wide, high = self._plotter.render_window.GetSize()
        view = self._plotter.camera
        pixels_per_m = high / (2 * view.parallel_scale)
        ring = ground_ring(camera_now(view), self._north_deg, RADIUS * self._zoom / pixels_per_m)
        centre = np.array([wide - CENTRE[0] * self._zoom, CENTRE[1] * self._zoom])
        needle = centre + ring.needle * pixels_per_m
        rim = centre + ring.rim * pixels_per_m
        _put_points(self._rim, rim, closed=False)
        _put_points(self._needle, needle, closed=True)
        _put_middle(self._letter_actor, self._letter, needle[1] + ring.letter * LETTER * self._zoom)
        self._write(ring.across_m, np.array([rim[:, 0].max(), centre[1]]))

    def _write(self, across_m: float, left: NDArray[np.float64]) -> None:
        """How wide the ring is, right of it."""
        if self._words is None or across_m != self.across_m:
            if self._words_actor is not None:
                self._plotter.renderer.RemoveViewProp(self._words_actor)
            self.across_m = across_m
            self._words = bare_word(f"ring {across_m:g} m\nacross", zoom=self._zoom)
            self._words_actor = plate_actor(self._words)
            self._plotter.renderer.AddViewProp(self._words_actor)
        width = self._words.image.shape[1]
        _put_middle(self._words_actor, self._words, left + np.array([width / 2 + 8 * self._zoom, 0.0]))


def camera_now(view: Any) -> Camera:
    """The camera of a window as it stands."""
    towards = -np.array(view.direction)
    right = np.cross(np.array(view.up), towards)
    right /= np.linalg.norm(right)
    return Camera(right, np.cross(towards, right), towards)


def _flat_actor(colour: str) -> Any:
    """Something drawn in the window's plane."""
    import pyvista
    from vtkmodules.vtkRenderingCore import vtkActor2D, vtkPolyDataMapper2D

    mapper = vtkPolyDataMapper2D()
    mapper.SetInputData(pyvista.PolyData())
    actor = vtkActor2D()
    actor.SetMapper(mapper)
    actor.GetProperty().SetColor(pyvista.Color(colour).float_rgb)
    actor.GetProperty().SetLineWidth(1.5)
    return actor


def _put_points(actor: Any, points: NDArray[np.float64], *, closed: bool) -> None:
    """Let an actor draw a line (p, 2), or the area within it, in pixels."""
    import pyvista

    flat = np.column_stack([points, np.zeros(len(points))])
    cell = np.array([len(flat), *range(len(flat))])
    actor.GetMapper().SetInputData(pyvista.PolyData(flat, faces=cell) if closed else pyvista.PolyData(flat, lines=cell))


def _put_middle(actor: Any, plate: Plate, middle: NDArray[np.float64]) -> None:
    height, width = plate.image.shape[:2]
    actor.SetPosition(round(middle[0] - width / 2), round(middle[1] - height / 2))
