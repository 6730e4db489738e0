"""A machine that cannot draw says what to install; it does not crash."""

from __future__ import annotations

import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest
from invented_town import Town

from insol.errors import MissingPackage
from insol.output import drawing
from insol.output.picture import draw_picture
from insol.output.window import show_window

LINUX = pytest.mark.skipif(
    not sys.platform.startswith("linux"), reason="other systems have a display or say so themselves"
)


@pytest.fixture
def asked_anew(monkeypatch: pytest.MonkeyPatch) -> Iterator[pytest.MonkeyPatch]:
    """Nothing is known of the machine, and nothing learnt here is kept."""
    pytest.importorskip("pyvista")
    monkeypatch.delenv(drawing.CHOICE, raising=False)
    drawing._drawn_through.cache_clear()
    yield monkeypatch
    drawing._drawn_through.cache_clear()


@pytest.mark.parametrize("package", ["pyvista", "matplotlib"])
def test_a_missing_package_is_named(monkeypatch: pytest.MonkeyPatch, package: str) -> None:
    monkeypatch.setitem(sys.modules, package, None)
    with pytest.raises(MissingPackage, match=rf'drawing needs the package {package}\. pip install "insol\[view\]"'):
        drawing.require_drawing()


@pytest.mark.parametrize(
    "probe", ["import os; os.abort()", "raise SystemExit(1)", "import os, signal; os.kill(os.getpid(), 11)"]
)
def test_a_crash_of_the_libraries_is_an_answer(
    asked_anew: pytest.MonkeyPatch, town: Town, tmp_path: Path, probe: str
) -> None:
    """As where the OpenGL libraries are missing: there VTK ends the process with a segmentation fault."""
    asked_anew.setattr(drawing, "PROBE", probe)
    picture = tmp_path / "picture.png"
    with pytest.raises(
        MissingPackage, match=r"cannot draw.*libegl1 libgl1 libxcursor1 libxrender1.*libosmesa6"
    ) as caught:
        draw_picture(town.folder, picture)
    assert caught.value.exit_code == 2 and not picture.exists()


def test_the_machine_is_asked_once(asked_anew: pytest.MonkeyPatch, drawing_available: None) -> None:
    drawing.require_drawing()
    begin = time.perf_counter()
    drawing.require_drawing()
    assert time.perf_counter() - begin < 0.05  # a process takes longer to begin


@LINUX
def test_without_a_display_there_is_no_window(asked_anew: pytest.MonkeyPatch, town: Town) -> None:
    for name in ("DISPLAY", "WAYLAND_DISPLAY"):
        asked_anew.delenv(name, raising=False)
    with pytest.raises(MissingPackage, match=r"no display to open a window on\..*--picture FILE\.png"):
        show_window(town.folder)


@LINUX
def test_a_display_that_does_not_answer(asked_anew: pytest.MonkeyPatch, drawing_available: None, town: Town) -> None:
    asked_anew.delenv("WAYLAND_DISPLAY", raising=False)
    asked_anew.setenv("DISPLAY", ":4077")
    with pytest.raises(MissingPackage, match='the display ":4077" does not answer'):
        show_window(town.folder)
