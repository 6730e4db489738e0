"""Whether this machine can draw: asked in a process of its own, since a bare machine does not say no, it crashes."""

from __future__ import annotations

import os
import subprocess
import sys
from functools import cache

from insol.errors import MissingPackage

PROBE = "import pyvista as p; q = p.Plotter(off_screen=True, window_size=(8, 8)); q.add_mesh(p.Cube()); q.screenshot()"

PROBE_SECONDS = 120

LIBRARIES = "libegl1 libgl1 libxcursor1 libxrender1"


def require_drawing() -> None:
    """Return when off-screen drawing works here.

    Raises
    ------
    MissingPackage
        With the names of what to install.
    """
    _require_packages()
    _quiet_without_display()
    if not _draws():
        raise MissingPackage(
            "this machine cannot draw: its OpenGL libraries are missing or do not work",
            hint=f"on Debian or Ubuntu: apt-get install {LIBRARIES}",
        )


def require_display() -> None:
    """Return when a window can be opened here.

    Raises
    ------
    MissingPackage
        There is no display, or drawing does not work.
    """
    if sys.platform.startswith("linux") and not (os.environ.get("DISPLAY") or os.environ.get("WAYLAND_DISPLAY")):
        raise MissingPackage(
            "there is no display to open a window on",
            hint="draw a picture instead: insol view DIR --picture FILE.png; or run under a display, as xvfb-run gives",
        )
    require_drawing()


def _quiet_without_display() -> None:
    """Go to EGL at once where there is no display: VTK would first try one and complain on stderr."""
    if sys.platform.startswith("linux") and not os.environ.get("DISPLAY"):
        os.environ.setdefault("VTK_DEFAULT_OPENGL_WINDOW", "vtkEGLRenderWindow")


def _require_packages() -> None:
    try:
        import matplotlib  # noqa: F401
        import pyvista  # noqa: F401
    except ImportError as missing:
        raise MissingPackage(
            f"drawing needs the package {missing.name}", hint='pip install "insol[view]"'
        ) from missing


@cache
def _draws() -> bool:
    try:
        probe = subprocess.run([sys.executable, "-c", PROBE], capture_output=True, timeout=PROBE_SECONDS, check=False)
    except (OSError, subprocess.TimeoutExpired):
        return False
    return probe.returncode == 0
