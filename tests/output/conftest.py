"""Results to look at, made without a run, and whether this machine can draw them."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parent))  # invented_town is imported by the tests beside it

from invented_town import Town, write_town

from insol.errors import MissingPackage

SCREEN = "1600x1100x24"
XVFB_SECONDS = 20


def cannot(reason: str) -> None:
    """Skip a test that draws; fail it where drawing is required, as on the project's own machines."""
    if os.environ.get("INSOL_REQUIRE_DRAWING") == "1":
        pytest.fail(f"INSOL_REQUIRE_DRAWING=1, and {reason}")
    pytest.skip(reason)


@pytest.fixture(scope="session")
def drawing_available() -> None:
    """Off-screen drawing works here."""
    from insol.output.drawing import require_drawing

    try:
        require_drawing()
    except MissingPackage as missing:
        cannot(str(missing))


@pytest.fixture(scope="session")
def display(drawing_available: None) -> Iterator[str]:
    """The name of an X display with nothing else on it.

    Under Xvfb even where there is a screen: a test must not take a person's mouse.
    """
    if shutil.which("Xvfb") is None:
        cannot("Xvfb is not installed (Debian: xvfb)")
    read, write = os.pipe()
    server = subprocess.Popen(
        ["Xvfb", "-displayfd", str(write), "-screen", "0", SCREEN, "-nolisten", "tcp"],
        pass_fds=(write,), stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL,
    )  # fmt: skip
    os.close(write)
    with os.fdopen(read) as stream:
        number = stream.readline().strip()  # written when the server is ready; empty when it died
    if not number:
        server.wait(XVFB_SECONDS)
        cannot("Xvfb does not start")
    yield f":{number}"
    server.terminate()
    server.wait(XVFB_SECONDS)


@pytest.fixture(scope="session")
def environment() -> dict[str, str]:
    """For a process of its own: this package can be imported, and VTK has not been told how to draw."""
    found = {name: value for name, value in os.environ.items() if name != "VTK_DEFAULT_OPENGL_WINDOW"}
    root = str(Path(__file__).resolve().parents[2])
    return {**found, "PYTHONPATH": os.pathsep.join([root, *filter(None, [found.get("PYTHONPATH")])])}


@pytest.fixture(scope="session")
def town(tmp_path_factory: pytest.TempPathFactory) -> Town:
    """A result of an invented town, read only."""
    return write_town(tmp_path_factory.mktemp("town") / "result")


@pytest.fixture
def own_town(tmp_path: Path) -> Callable[..., Town]:
    """A result of a test's own, to be changed."""
    return lambda **how: write_town(tmp_path / "result", **how)
