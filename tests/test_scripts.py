"""The scripts that make the environment: they run on a bare machine, and do no more than they must."""

from __future__ import annotations

import ast
import importlib.util
import sys
from pathlib import Path
from types import ModuleType

import pytest

SCRIPTS = Path(__file__).resolve().parent.parent / "scripts"
BARE = ("demo.py", "environment.py", "lint.py", "test.py")
"""What is run before anything is installed."""


@pytest.mark.parametrize("name", BARE)
def test_a_bare_python_can_start_it(name: str) -> None:
    tree = ast.parse((SCRIPTS / name).read_text(encoding="utf-8"), feature_version=(3, 8))
    modules = {
        alias.name.split(".")[0] for node in tree.body if isinstance(node, ast.Import) for alias in node.names
    } | {(node.module or "").split(".")[0] for node in tree.body if isinstance(node, ast.ImportFrom)}
    assert modules <= sys.stdlib_module_names | {"environment"}


@pytest.fixture
def environment(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> ModuleType:
    """The helper on a project of its own, whose making and installing are only noted in `done`."""
    spec = importlib.util.spec_from_file_location("environment_under_test", SCRIPTS / "environment.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    inside = tmp_path / ".venv"
    done: list[object] = []
    monkeypatch.setattr(module, "ROOT", tmp_path)
    monkeypatch.setattr(module, "ENVIRONMENT", inside)
    monkeypatch.setattr(module, "STAMP", inside / "installed.json")
    monkeypatch.setattr(module, "works", lambda python: inside.exists())
    monkeypatch.setattr(module, "make_environment", lambda: (inside.mkdir(), done.append("made")))
    monkeypatch.setattr(module, "install", lambda python, extras: done.append(extras))
    module.done = done  # type: ignore[attr-defined]
    (tmp_path / "pyproject.toml").write_text("one", encoding="utf-8")
    return module


def test_it_is_made_once_and_then_used(environment: ModuleType) -> None:
    first = environment.environment_python("test")
    assert environment.environment_python("test") == first
    assert environment.done == ["made", ["test"]]


def test_another_extra_is_added_to_those_that_are_there(environment: ModuleType) -> None:
    environment.environment_python("test")
    environment.environment_python("view")
    environment.environment_python("test")
    assert environment.done == ["made", ["test"], ["test", "view"]]


def test_a_changed_project_is_installed_again_in_the_same_environment(environment: ModuleType, tmp_path: Path) -> None:
    environment.environment_python("test")
    (tmp_path / "pyproject.toml").write_text("two", encoding="utf-8")
    environment.environment_python("test")
    assert environment.done == ["made", ["test"], ["test"]]


def test_a_stamp_that_was_cut_short_counts_for_nothing(environment: ModuleType) -> None:
    environment.ENVIRONMENT.mkdir()
    environment.STAMP.write_text('{"python": "3', encoding="utf-8")
    assert environment.read_stamp() == {}


def test_an_old_python_is_told_its_age(environment: ModuleType, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(environment, "OLDEST", (99, 0))
    with pytest.raises(SystemExit, match=r"Python 99\.0 or newer is needed, this is 3\."):
        environment.environment_python()
