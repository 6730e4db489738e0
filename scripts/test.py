"""Make the environment and run the tests in it: `python scripts/test.py [pytest arguments]`."""

from __future__ import annotations

import sys

from environment import environment_python, run

if __name__ == "__main__":
    sys.exit(run(environment_python("test"), "-m", "pytest", *sys.argv[1:]))
