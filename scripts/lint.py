"""Make the environment, check style, layout and types in it: `python scripts/lint.py`."""

from __future__ import annotations

import sys

from environment import environment_python, run

CHECKS = (
    ("ruff", "check"),
    ("ruff", "format", "--check"),
    ("mypy",),
)


def lint() -> int:
    """Run every check, though an earlier one failed; 1 when one did."""
    python = environment_python("dev")
    failed = [check for check in CHECKS if run(python, "-m", *check)]
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(lint())
