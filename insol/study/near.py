"""Names of files that lie where one was looked for."""

from __future__ import annotations

import os
from pathlib import Path

from insol.errors import did_you_mean

MOST_NAMES = 2_000
"""So many names are held against a misspelt one; a folder with more is no place to guess in."""


def in_folder(folder: Path) -> list[str]:
    """Names in a folder, sorted; none where it cannot be listed."""
    try:
        return sorted(os.listdir(folder))[:MOST_NAMES]
    except (OSError, ValueError):
        return []


def near_files(path: Path) -> str:
    """A hint with names like that of a file that is not there, or ""."""
    names = in_folder(path.parent)
    same = [name for name in names if name.casefold() == path.name.casefold()]
    return f'did you mean "{same[0]}"?' if same else did_you_mean(path.name[:200], names)
