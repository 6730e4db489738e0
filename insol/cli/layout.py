"""Plain text laid out for a terminal: aligned columns no wider than it, numbers as people write them."""

from __future__ import annotations

import shutil
import textwrap
import unicodedata
from collections.abc import Sequence

from insol.errors import printable

NARROWEST, WIDEST = 60, 120
GAP = "  "
SHORTEST_NAME = 12
"""A column of names is not cut below this width."""


def terminal_width() -> int:
    """Columns that lines may take; 100 where the output goes to a file."""
    return min(max(shutil.get_terminal_size((100, 24)).columns, NARROWEST), WIDEST)


def table(
    rows: Sequence[Sequence[str]], *, right: Sequence[int] = (), width: int | None = None, indent: str = "  "
) -> str:
    """Rows in aligned columns; the widest column of names is cut where they do not fit.

    Parameters
    ----------
    right : columns aligned on their right edge: the numbers
    """
    shown = [[printable(cell[:WIDEST]) for cell in row] for row in rows]
    widths = [max(map(cells, column)) for column in zip(*shown, strict=True)]
    room = (width or terminal_width()) - len(indent) - len(GAP) * (len(widths) - 1)
    names = [column for column in range(len(widths)) if column not in right]
    while names and sum(widths) > room:
        widest = max(names, key=lambda column: widths[column])
        if widths[widest] <= SHORTEST_NAME:
            break
        widths[widest] -= 1
    lines = []
    for row in shown:
        padded = [_padded(cell, widths[column], column in right) for column, cell in enumerate(row)]
        lines.append((indent + GAP.join(padded)).rstrip())
    return "\n".join(lines)


def paragraph(text: str, *, first: str = "", indent: str = "  ") -> str:
    """A text wrapped to the terminal, its first line begun with a mark."""
    return textwrap.fill(
        printable(text), terminal_width(), initial_indent=first, subsequent_indent=indent, break_long_words=False
    )


def cells(text: str) -> int:
    """Columns that a text takes in a terminal: wide letters take two, marks on letters none."""
    return sum(
        0 if unicodedata.combining(letter) else 2 if unicodedata.east_asian_width(letter) in "WF" else 1
        for letter in text
    )


def _padded(text: str, width: int, right: bool) -> str:
    if cells(text) > width:
        while cells(text) > width - 1:
            text = text[:-1]
        text += "…"
    space = " " * (width - cells(text))
    return space + text if right else text + space


def metres(length: float) -> str:
    """A length with as many digits as it deserves.

    >>> metres(24013.2), metres(24.04), metres(0.3)
    ('24,013', '24.0', '0.30')
    """
    size = abs(length)
    return f"{length:,.0f}" if size >= 1000 else f"{length:.1f}" if size >= 10 else f"{length:.2f}"


def sizes(lengths: Sequence[float]) -> str:
    """Extents along x, y and z."""
    return " x ".join(metres(length) for length in lengths)


def count(number: int, one: str, many: str = "") -> str:
    """A number with its noun.

    >>> count(1, "part"), count(1200, "part")
    ('1 part', '1,200 parts')
    """
    return f"{number:,} {one if number == 1 else many or one + 's'}"


def large(number: float) -> str:
    """A large count in words.

    >>> large(1_234), large(2.4e9)
    ('1,234', '2.4 billion')
    """
    for limit, word in ((1e9, "billion"), (1e6, "million")):
        if number >= limit:
            return f"{number / limit:.1f} {word}"
    return f"{number:,.0f}"


def duration(seconds: float, *, whole: bool = False) -> str:
    """Time taken, or, in whole seconds, a guess of the time left.

    >>> duration(4.21), duration(83), duration(7384)
    ('4.2 s', '1:23 min', '2:03 h')
    """
    if seconds < 59.5:
        return f"{seconds:.0f} s" if whole else f"{seconds:.1f} s"
    minutes, rest = divmod(round(seconds), 60)
    return f"{minutes}:{rest:02d} min" if minutes < 60 else f"{minutes // 60}:{minutes % 60:02d} h"
