"""Plates laid over a window's scene: kept in their corners when its size changes, asked where a click fell."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from insol.output.plates import Button, Plate

EDGE = 16
"""Pixels from the window's edge to a plate."""


@dataclass(frozen=True)
class Laid:
    """A plate, what draws it, and where it belongs."""

    plate: Plate
    actor: Any
    corner: str  # "left top", "right bottom", ...


class Overlay:
    """All plates of a window."""

    def __init__(self, plotter: Any) -> None:
        self._plotter = plotter
        self._laid: dict[str, Laid] = {}

    def put(self, name: str, plate: Plate, corner: str) -> None:
        """Lay a plate into a corner, in the place of the one that had its name."""
        self.remove(name)
        actor = plate_actor(plate)
        self._plotter.renderer.AddViewProp(actor)
        self._laid[name] = Laid(plate, actor, corner)
        self._place(self._laid[name])

    def remove(self, name: str) -> None:
        """Take a plate away, if it is there."""
        if name in self._laid:
            self._plotter.renderer.RemoveViewProp(self._laid.pop(name).actor)

    def place_all(self) -> None:
        """Put every plate where it belongs in a window of this size."""
        for laid in self._laid.values():
            self._place(laid)

    def button_at(self, x: float, y: float) -> Button | None:
        """The button under a pixel, counted from the window's lower left."""
        for laid in self._laid.values():
            left, bottom = self._origin(laid)
            for (x0, y0, x1, y1), button in laid.plate.buttons:
                if x0 <= x - left <= x1 and y0 <= y - bottom <= y1:
                    return button
        return None

    def covers(self, x: float, y: float) -> bool:
        """Whether a plate lies over a pixel."""
        for laid in self._laid.values():
            left, bottom = self._origin(laid)
            height, width = laid.plate.image.shape[:2]
            if left <= x < left + width and bottom <= y < bottom + height:
                return True
        return False

    def _place(self, laid: Laid) -> None:
        laid.actor.SetPosition(*self._origin(laid))

    def _origin(self, laid: Laid) -> tuple[float, float]:
        """Lower left corner of a plate."""
        wide, high = self._plotter.render_window.GetSize()
        height, width = laid.plate.image.shape[:2]
        left = EDGE if "left" in laid.corner else wide - EDGE - width
        bottom = high - EDGE - height if "top" in laid.corner else EDGE
        return left, bottom


def plate_actor(plate: Plate) -> Any:
    """A rectangle in the window's plane that shows the plate's pixels one to one."""
    import pyvista
    from vtkmodules.vtkRenderingCore import vtkPolyDataMapper2D, vtkTexturedActor2D

    height, width = plate.image.shape[:2]
    corners = np.array([[0, 0, 0], [width, 0, 0], [width, height, 0], [0, height, 0]], dtype=np.float64)
    sheet = pyvista.PolyData(corners, faces=[4, 0, 1, 2, 3])
    sheet.active_texture_coordinates = np.array([[0, 0], [1, 0], [1, 1], [0, 1]], dtype=np.float64)
    mapper = vtkPolyDataMapper2D()
    mapper.SetInputData(sheet)
    actor = vtkTexturedActor2D()
    actor.SetMapper(mapper)
    texture: Any = pyvista.Texture(plate.image)  # type: ignore[no-untyped-call]
    texture.interpolate = False
    actor.SetTexture(texture)
    return actor
