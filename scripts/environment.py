"""The project's own virtual environment, made when it is missing and brought up to date when it is not.

Standard library only, and no word of Python that an older one could not read: a machine that has
nothing but an old Python is told so in one line.
"""

from __future__ import annotations

import hashlib
import json
import shutil
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
ENVIRONMENT = ROOT / ".venv"
STAMP = ENVIRONMENT / "installed.json"
OLDEST = (3, 11)


def environment_python(*extras: str) -> Path:
    """The environment's Python, with the project and these extras of it installed.

    The installation is editable: a change of the sources needs no new one, only a change of
    pyproject.toml does, or of the Python that runs this.

    Raises
    ------
    SystemExit
        This Python is too old, or the environment or an installation failed; one line says why.
    """
    if sys.version_info < OLDEST:
        found = ".".join(str(number) for number in sys.version_info[:3])
        sys.exit("Python {}.{} or newer is needed, this is {} ({})".format(*OLDEST, found, sys.executable))
    inside = python_of(ENVIRONMENT)
    made = read_stamp()
    if made.get("python") != sys.version or not works(inside):
        make_environment()
        made = {}
    wanted = {"python": sys.version, "project": fingerprint(ROOT / "pyproject.toml")}
    extras_there = set(made.get("extras", [])) if made.get("project") == wanted["project"] else set()
    if not made or not set(extras) <= extras_there or made.get("project") != wanted["project"]:
        every = sorted(extras_there | set(extras))
        install(inside, every)
        STAMP.write_text(json.dumps({**wanted, "extras": every}), encoding="utf-8")
    return inside


def python_of(environment: Path) -> Path:
    """Where a virtual environment keeps its Python."""
    return environment / ("Scripts/python.exe" if sys.platform == "win32" else "bin/python")


def works(python: Path) -> bool:
    """Whether a Python starts: one whose folder or base was moved does not."""
    try:
        return subprocess.run([str(python), "-c", ""], capture_output=True, check=False).returncode == 0
    except OSError:
        return False


def make_environment() -> None:
    """Make the environment anew."""
    say(f"making an environment in {ENVIRONMENT}")
    if ENVIRONMENT.exists():
        shutil.rmtree(ENVIRONMENT)
    made = subprocess.run([sys.executable, "-m", "venv", str(ENVIRONMENT)], capture_output=True, text=True, check=False)
    if made.returncode:
        shutil.rmtree(ENVIRONMENT, ignore_errors=True)
        said = (made.stdout + made.stderr).strip()
        hint = " Install python3-venv." if "ensurepip" in said else f" It said: {said}"
        sys.exit(f"the environment could not be made.{hint}")


def install(python: Path, extras: list[str]) -> None:
    """Install the project with extras, showing what pip does."""
    what = str(ROOT) + (f"[{','.join(extras)}]" if extras else "")
    say("installing insol and what it needs: some minutes the first time")
    options = ["--quiet", "--disable-pip-version-check", "--no-input"]
    done = subprocess.run([str(python), "-m", "pip", "install", *options, "--editable", what], check=False)
    if done.returncode:
        sys.exit("the installation failed; what pip says above tells why. It needs a connection to a package index.")


def run(python: Path, *arguments: str) -> int:
    """Run the environment's Python in the project's folder; its exit code."""
    try:
        return subprocess.run([str(python), *arguments], cwd=ROOT, check=False).returncode
    except KeyboardInterrupt:
        return 130


def read_stamp() -> dict:
    """What was installed, and by which Python; empty when nothing was, or when it was cut short."""
    try:
        made = json.loads(STAMP.read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return {}
    return made if isinstance(made, dict) else {}


def fingerprint(path: Path) -> str:
    """The SHA-256 of a file."""
    return hashlib.sha256(path.read_bytes()).hexdigest()


def say(line: str) -> None:
    """Tell how far it is, at once and before what a child process prints."""
    print(line, flush=True)
