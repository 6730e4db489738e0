"""`python -m insol`: the command line."""

from __future__ import annotations

from insol.cli.main import main

if __name__ == "__main__":
    main()
