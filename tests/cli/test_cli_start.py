"""The command line answers at once: help, version, and the first mistake in a study."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable
from importlib import import_module
from pathlib import Path
from time import perf_counter

import click
import pytest
from click.testing import Result

import insol as package
from insol.cli.main import COMMANDS

HEAVY = {"numpy", "scipy", "pandas", "pvlib", "shapely", "trimesh", "embreex", "pyvista", "matplotlib"}

BUSY = 3.0
"""The bars hold on an idle machine; the tests may share theirs with others."""


def started(*args: str, cwd: Path | None = None) -> tuple[float, subprocess.CompletedProcess[str]]:
    """The shortest time of three starts, and what was said."""
    environment = {**os.environ, "PYTHONPATH": str(Path(package.__file__).parents[1])}
    best = float("inf")
    for _ in range(3):
        begun = perf_counter()
        done = subprocess.run(
            [sys.executable, "-m", "insol", *args], capture_output=True, text=True, check=False, cwd=cwd,
            env=environment,
        )  # fmt: skip
        best = min(best, perf_counter() - begun)
    return best, done


def test_help_answers_within_a_third_of_a_second() -> None:
    seconds, done = started("--help")
    assert done.returncode == 0
    assert "insol run study.toml --out result" in done.stdout
    assert seconds < 0.3 * BUSY


def test_a_mistake_in_a_study_answers_soon(place: Path) -> None:
    (place / "study.toml").write_text("[site]\nlatitude = 100\n", encoding="utf-8")
    seconds, done = started("run", "study.toml", "--out", "result", cwd=place)
    assert done.returncode == 2
    said = "study.toml, line 2, site.latitude: must be a number from -90 to 90 [degrees], not 100"
    assert done.stderr == f"insol: {said}\n"
    assert seconds < 0.6 * BUSY


def test_no_command_imports_anything_heavy_to_show_its_help() -> None:
    code = (
        "import sys\nfrom importlib import import_module\n"
        f"for name in {list(COMMANDS)}: import_module(f'insol.cli.{{name}}').command\n"
        f"sys.exit(str({HEAVY} & set(sys.modules)) if {HEAVY} & set(sys.modules) else 0)"
    )
    environment = {**os.environ, "PYTHONPATH": str(Path(package.__file__).parents[1])}
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False, env=environment)
    assert done.returncode == 0, done.stderr


def test_version(insol: Callable[..., Result]) -> None:
    assert insol("--version").output == f"insol {package.__version__}\n"


def test_without_a_command_the_help_is_shown(insol: Callable[..., Result]) -> None:
    assert insol().exit_code == 0
    assert insol().output == insol("--help").output


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_explains_itself_with_examples(insol: Callable[..., Result], name: str) -> None:
    command = import_module(f"insol.cli.{name}").command
    assert isinstance(command, click.Command)
    said = insol(name, "--help").output
    assert f"insol {name} " in said.split("Examples:")[1]
    assert all(param.help for param in command.params if isinstance(param, click.Option))
