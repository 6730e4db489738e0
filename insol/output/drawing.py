"""Whether this machine can draw: asked in a process of its own, since a bare machine does not say no, it crashes."""

from __future__ import annotations

import logging
import os
import subprocess
import sys
from functools import cache

from insol.errors import MissingPackage

PROBE = """
import vtkmodules.vtkRenderingOpenGL2
from vtkmodules.vtkRenderingCore import vtkRenderer, vtkRenderWindow
window = vtkRenderWindow()
window.SetOffScreenRendering(1)
window.SetSize(8, 8)
window.AddRenderer(vtkRenderer())
window.Render()
print(window.GetClassName())
"""
"""Draws nothing on a canvas of 8 by 8 pixels and says through what; sooner than pyvista is imported."""

PROBE_SECONDS = 120

CHOICE = "VTK_DEFAULT_OPENGL_WINDOW"
"""The variable by which VTK is told through what to draw."""

OFF_SCREEN = ("vtkEGLRenderWindow", "vtkOSOpenGLRenderWindow")
"""What draws without a display: EGL, then Mesa's off-screen library, which needs no graphics driver at all."""

INSTALL = (
    "on Debian or Ubuntu: apt-get install libegl1 libgl1 libxcursor1 libxrender1 "
    "(or libosmesa6, which draws without a graphics driver)"
)


def require_drawing() -> None:
    """Return when off-screen drawing works here; VTK is told the way that does.

    Raises
    ------
    MissingPackage
        With the names of what to install.
    """
    _require_packages()
    for way in _ways():
        if _drawn_through(way, os.environ.get("DISPLAY", "")):
            if way:
                os.environ[CHOICE] = way
            _be_quiet()
            return
    raise MissingPackage("this machine cannot draw: its OpenGL libraries are missing or do not work", hint=INSTALL)


def require_display() -> None:
    """Return when a window can be opened here.

    Raises
    ------
    MissingPackage
        There is no display, or drawing does not work.
    """
    if sys.platform.startswith("linux") and not (os.environ.get("DISPLAY") or os.environ.get("WAYLAND_DISPLAY")):
        raise _no_display("there is no display to open a window on")
    require_drawing()
    # Without an answer from the display VTK goes off screen, and the window would be closed before it is seen.
    if _drawn_through(_chosen(), os.environ.get("DISPLAY", "")) in OFF_SCREEN:
        raise _no_display(f'the display "{os.environ.get("DISPLAY", "")}" does not answer')


def _no_display(what: str) -> MissingPackage:
    return MissingPackage(
        what,
        hint="draw a picture instead: insol view DIR --picture FILE.png; or run under a display, as xvfb-run gives",
    )


def _chosen() -> str:
    return os.environ.get(CHOICE, "")


def _ways() -> tuple[str, ...]:
    """What to try, best first. Without a display VTK's own choice would complain before it turns to EGL."""
    if _chosen() or not sys.platform.startswith("linux"):
        return (_chosen(),)
    return ("", *OFF_SCREEN) if os.environ.get("DISPLAY") else OFF_SCREEN


def _require_packages() -> None:
    try:
        import matplotlib  # noqa: F401
        import pyvista  # noqa: F401
    except ImportError as missing:
        raise MissingPackage(f"drawing needs the package {missing.name}", hint='pip install "insol[view]"') from missing


def _be_quiet() -> None:
    """What VTK, Mesa and matplotlib would say of themselves is nothing that the person at the keyboard can act on."""
    from vtkmodules.vtkCommonCore import vtkLogger, vtkObject

    vtkObject.GlobalWarningDisplayOff()
    vtkLogger.SetStderrVerbosity(vtkLogger.VERBOSITY_OFF)
    os.environ.setdefault("EGL_LOG_LEVEL", "fatal")
    logging.getLogger("matplotlib").setLevel(logging.ERROR)


@cache
def _drawn_through(way: str, display: str) -> str:
    """What a drawing was made on, empty where none can be made; another display may give another answer."""
    surroundings = {name: value for name, value in os.environ.items() if name != CHOICE}
    if way:
        surroundings[CHOICE] = way
    try:
        probe = subprocess.run(
            [sys.executable, "-c", PROBE], capture_output=True, text=True, timeout=PROBE_SECONDS, check=False,
            env=surroundings,
        )  # fmt: skip
    except (OSError, subprocess.TimeoutExpired):
        return ""
    return probe.stdout.strip() if probe.returncode == 0 else ""
