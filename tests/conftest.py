"""What all tests share: how hypothesis looks for examples, which engines there are, and how models are written."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest
from builders import Solid, obj_text
from hypothesis import settings

# No deadline: a first example pays for imports. The same examples each time: a run that passed passes again.
settings.register_profile("insol", deadline=None, derandomize=True, database=None)
settings.load_profile("insol")


@pytest.fixture(params=["embree", "numpy"])
def engine(request: pytest.FixtureRequest) -> str:
    """Each engine in turn; Embree only where it has a wheel."""
    if request.param == "embree":
        pytest.importorskip("embreex")
    return str(request.param)


@pytest.fixture
def write_obj(tmp_path: Path) -> Callable[[str, dict[str, Solid]], Path]:
    """A writer of solids as an OBJ file in the test's own folder."""

    def write(name: str, parts: dict[str, Solid]) -> Path:
        path = tmp_path / name
        path.write_text(obj_text(parts), encoding="utf-8")
        return path

    return write
