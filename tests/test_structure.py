"""The shape of the program: who may import whom, and how long a function or a file may be."""

from __future__ import annotations

import ast
from collections.abc import Iterator
from pathlib import Path
from statistics import median

import pytest

ROOT = Path(__file__).resolve().parent.parent
PACKAGE = ROOT / "insol"
SOURCES = sorted(PACKAGE.rglob("*.py"))
SCRIPTS = sorted((ROOT / "scripts").glob("*.py"))

ORDER = (
    ("errors", "conventions", "checks"),
    ("study",),
    ("casting",),
    ("scene",),
    ("faces",),
    ("sun",),
    ("visibility",),
    ("measures",),
    ("output",),
    ("pipeline",),
    ("cli",),
)
"""A module imports from its own row and from those above it: the data flows one way."""

RANK = {name: rank for rank, row in enumerate(ORDER) for name in row}
DOOR = {"__init__", "__main__"}
"""The public names and `python -m insol`: they see everything and nobody but the command line imports them."""

LONGEST_FUNCTION, LONGEST_FILE, MEDIAN_FUNCTION = 60, 350, 15


def home(path: Path) -> str:
    """The package or module right under `insol` that a file belongs to."""
    inside = path.relative_to(PACKAGE)
    return inside.parts[0] if len(inside.parts) > 1 else inside.stem


def imported(tree: ast.AST) -> Iterator[str]:
    """The names right under `insol` that a module imports, in functions too."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, "imports are absolute"
            names = [node.module or ""]
            if node.module == "insol":
                names = [f"insol.{alias.name}" for alias in node.names]
        else:
            continue
        yield from (name.split(".")[1] for name in names if name.startswith("insol."))


def functions(path: Path) -> Iterator[tuple[str, int]]:
    """Name and lines of each function in a file, its docstring included."""
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            assert node.end_lineno is not None
            yield f"{path.name}:{node.name}", node.end_lineno - node.lineno + 1


def test_every_package_has_its_place_in_the_order() -> None:
    assert {home(path) for path in SOURCES} - DOOR == set(RANK)


@pytest.mark.parametrize("path", [p for p in SOURCES if home(p) not in DOOR], ids=lambda p: str(p.relative_to(PACKAGE)))
def test_a_module_imports_only_from_what_stands_before_it(path: Path) -> None:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    mine = RANK[home(path)]
    # `__version__` and the public names are the command line's to use.
    names = {name for name in imported(tree) if name in RANK or mine < RANK["cli"]}
    assert {name for name in names if RANK.get(name, len(ORDER)) > mine} == set()


def test_no_function_is_longer_than_a_screen() -> None:
    lengths = [found for path in [*SOURCES, *SCRIPTS] for found in functions(path)]
    assert [found for found in lengths if found[1] > LONGEST_FUNCTION] == []


def test_most_functions_are_short() -> None:
    """Without their docstrings and signatures: the lines that do something."""
    bodies = []
    for path in SOURCES:
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.FunctionDef):
                body = node.body[1:] if ast.get_docstring(node) else node.body
                bodies.append(body[-1].end_lineno - body[0].lineno + 1 if body else 0)  # type: ignore[operator]
    assert median(bodies) < MEDIAN_FUNCTION


def test_no_file_wants_a_table_of_contents() -> None:
    lengths = {
        str(path.relative_to(ROOT)): path.read_text(encoding="utf-8").count("\n") for path in [*SOURCES, *SCRIPTS]
    }
    assert {name: lines for name, lines in lengths.items() if lines > LONGEST_FILE} == {}


def test_test_modules_have_names_of_their_own() -> None:
    names = [path.name for path in (ROOT / "tests").rglob("test_*.py")]
    assert len(names) == len(set(names))
