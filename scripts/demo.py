"""Make the environment, run the demo study in it, draw the pictures: `python scripts/demo.py`.

The place is an invented one: a new block by a small square, among its neighbours.
"""

from __future__ import annotations

import sys
from pathlib import Path

from environment import ROOT, environment_python, run, say

STUDY = ROOT / "sample_models" / "study.toml"
RESULTS = ROOT / "sample_models" / "results"

CANNOT = 2
"""The exit code of `insol` for what is not its own fault: here, a machine without the libraries to draw with."""


def demo() -> int:
    """Hours of sun on the demo's faces, a picture for each period, and where they are."""
    python = environment_python("view")
    failed = run(python, "-m", "insol", "run", str(STUDY), "--out", str(RESULTS))
    if failed:
        return failed
    pictures = [RESULTS / f"{period}.png" for period in period_names(STUDY)]
    for picture in pictures:
        failed = run(python, "-m", "insol", "view", str(RESULTS), "--period", picture.stem, "--picture", str(picture))
        if failed == CANNOT:
            say(f"\nThe hours are in {RESULTS}, but nothing can be drawn here: the line above says what to install.")
            return 0
        if failed:
            return failed
    say("\nPictures:")
    for picture in pictures:
        say(f"  {picture}")
    say(f"Tables and the coloured mesh:\n  {RESULTS}")
    say(f"To look around in it:\n  {python} -m insol view {RESULTS}")
    return 0


def period_names(study: Path) -> list[str]:
    """The names of the study's periods, in its order."""
    import tomllib  # here, so that a Python without it is told its age first

    return [period["name"] for period in tomllib.loads(study.read_text(encoding="utf-8"))["period"]]


if __name__ == "__main__":
    sys.exit(demo())
