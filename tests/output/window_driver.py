"""Opens the window on a result and does what a person would; started by `test_window` in a process of its own.

python window_driver.py RESULT OUT ROOF_ROW WALL_ROW
"""

from __future__ import annotations

import json
import sys
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import numpy as np
from scipy.spatial import cKDTree

from insol.output.drawing import require_display
from insol.output.stage import camera_of
from insol.output.view_data import ViewData, load_view
from insol.output.window import ResultWindow

STEP_MS, MOST_STEPS = 60, 400
FOREIGN_KEYS = ("w", "s", "p", "3", "f", "v", "C", "e", "i", "u")


class Person:
    """Hands on a window's mouse and keys, and eyes that write down what it shows."""

    def __init__(self, window: ResultWindow, out: Path) -> None:
        self.window, self.out = window, out
        self.plotter = window.plotter
        self.interactor = window.plotter.iren.interactor
        self.seen: dict[str, Any] = {}

    def pixel(self, point: np.ndarray) -> tuple[int, int]:
        """Where a point of the scene is seen."""
        renderer = self.plotter.renderer
        renderer.SetWorldPoint(*point, 1.0)
        renderer.WorldToDisplay()
        x, y, _ = renderer.GetDisplayPoint()
        return round(x), round(y)

    def face(self, row: int) -> tuple[int, int]:
        return self.pixel(self.window.data.triangles[self.window.data.face_row == row].mean(axis=(0, 1)))

    def press(self, x: int, y: int) -> None:
        self.interactor.SetEventInformation(x, y)
        self.interactor.InvokeEvent("LeftButtonPressEvent")

    def release(self, x: int, y: int) -> None:
        self.interactor.SetEventInformation(x, y)
        self.interactor.InvokeEvent("MouseMoveEvent")
        self.interactor.InvokeEvent("LeftButtonReleaseEvent")

    def click(self, x: int, y: int) -> None:
        self.press(x, y)
        self.release(x, y)

    def key(self, symbol: str) -> None:
        self.interactor.SetKeyEventInformation(0, 0, symbol, 0, symbol)
        self.interactor.InvokeEvent("KeyPressEvent")
        self.interactor.InvokeEvent("CharEvent")
        self.interactor.InvokeEvent("KeyReleaseEvent")

    def button(self, text: str) -> None:
        """Click the middle of a button."""
        for laid in self.window._overlay._laid.values():
            left, _, _, bottom = self.corner(laid)
            for (x0, y0, x1, y1), button in laid.plate.buttons:
                if button.text == text:
                    return self.click(round(left + (x0 + x1) / 2), round(bottom + (y0 + y1) / 2))
        raise LookupError(text)

    def look(self, name: str) -> None:
        window, camera = self.window, self.plotter.camera
        self.seen[name] = {
            "panel": window.panel.text if window.panel else None,
            "period": window.period, "quantity": window.quantity, "view": window.view,
            "size": list(self.plotter.render_window.GetSize()), "across_m": window.compass.across_m,
            "towards": (-np.array(camera.direction)).tolist(), "scale": camera.parallel_scale,
            "wires": self.window._stage.actor.GetProperty().GetRepresentation(),
            "stereo": self.plotter.render_window.GetStereoRender(),
            "corners": {name: self.corner(laid) for name, laid in window._overlay._laid.items()},
        }  # fmt: skip

    def corner(self, laid: Any) -> list[float]:
        """Left, top, right and bottom of a plate."""
        left, bottom = laid.actor.GetPosition()
        height, width = laid.plate.image.shape[:2]
        return [left, bottom + height, left + width, bottom]

    def note_pixel(self, name: str, row: int) -> None:
        """Keep where a face is seen, and a picture of the window."""
        from matplotlib.image import imsave

        self.seen[f"{name} pixel"] = self.face(row)
        imsave(self.out / f"{name}.png", self.plotter.screenshot(return_img=True))


def deeds(person: Person, roof: int, wall: int) -> Iterator[Callable[[], object]]:
    """What is done, one thing a turn of the window's loop."""
    window, canvas = person.window, person.plotter.render_window

    def then_look(name: str, do: Callable[[], object]) -> Callable[[], object]:
        return lambda: (do(), person.look(name))

    yield then_look("start", lambda: None)
    yield lambda: person.note_pixel("roof", roof)
    yield then_look("roof clicked", lambda: person.click(*person.face(roof)))
    yield then_look("wall clicked", lambda: person.click(*person.face(wall)))
    yield then_look("dragged", lambda: (person.press(700, 450), person.release(760, 470)))
    yield lambda: person.key("r")
    yield then_look("surroundings clicked", lambda: person.click(*person.pixel(hiding_point(window.data))))
    for name, symbol in (("key n", "n"), ("key n again", "n"), ("key b", "b"), ("key h", "h"), ("key t", "t")):
        yield then_look(name, lambda symbol=symbol: person.key(symbol))
    yield then_look("foreign keys", lambda: [person.key(symbol) for symbol in FOREIGN_KEYS])
    for text in ("year", "hours of direct sun", "bird"):
        yield then_look(f"button {text}", lambda text=text: person.button(text))
    yield then_look("resized", lambda: (canvas.SetSize(1100, 760), person.plotter.render()))
    yield then_look("button equinox, resized", lambda: person.button("equinox"))
    yield then_look("closer", lambda: (person.plotter.camera.zoom(5), person.plotter.render()))
    yield lambda: person.key("q")


def hiding_point(data: ViewData) -> np.ndarray:
    """A point of the surroundings behind which, for the bird, a measured face lies: the one nearest to the eye."""
    camera = camera_of("bird", data)
    inside = np.random.default_rng(1).dirichlet([2, 2, 2], size=60)  # shares of a triangle's corners
    context = np.einsum("sk,tkx->tsx", inside, data.context).reshape(-1, 3)
    measured = data.triangles.mean(axis=1)
    away, nearest = cKDTree(camera.flat(measured)).query(camera.flat(context))
    before = (context - measured[nearest]) @ camera.towards
    hiding = np.flatnonzero((away < 0.5) & (before > 5.0))
    return context[hiding[np.argmax(context[hiding] @ camera.towards)]]


def main() -> None:
    folder, out, roof, wall = Path(sys.argv[1]), Path(sys.argv[2]), int(sys.argv[3]), int(sys.argv[4])
    require_display()
    window = ResultWindow(load_view(folder), "equinox", "direct_h")
    person = Person(window, out)
    left = deeds(person, roof, wall)

    def turn(_: int) -> None:
        do = next(left, None)
        if do is not None:
            do()

    window.plotter.add_timer_event(max_steps=MOST_STEPS, duration=STEP_MS, callback=turn)
    window.show(out / "last.png")
    person.seen["closed"] = next(left, None) is None
    (out / "seen.json").write_text(json.dumps(person.seen), encoding="utf-8")


if __name__ == "__main__":
    main()
