"""One tree of exceptions. Each class owns its exit code; each message is one clear line.

A message says where (file, key or line), what is wrong, the value received, what is allowed,
the nearest known spelling, and what to do.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable


class InsolError(Exception):
    """Anything this program says no to. `exit_code` 1: we are at fault."""

    exit_code = 1

    def __init__(self, what: str, *, where: str = "", hint: str = "") -> None:
        self.what = what
        self.where = where
        self.hint = hint
        super().__init__(one_line(where, what, hint))


class InputError(InsolError):
    """What was given cannot be used. Nothing is written; `exit_code` 2."""

    exit_code = 2


class StudyError(InputError):
    """The study file: a key, its type or its value."""


class ModelError(InputError):
    """A mesh file that cannot be read rightly."""


class MeasureError(InputError):
    """What is to be measured cannot be: no such part, a polygon that crosses itself."""


class PeriodError(InputError):
    """A period that cannot be: no such day, no sun in it."""


class ResultError(InputError):
    """A result folder that is not one, is in use, or cannot be written."""


class MissingPackage(InputError):
    """Something optional is not installed; the hint names the packages."""


def one_line(where: str, what: str, hint: str) -> str:
    """Join the pieces of a message into one printable line."""
    parts = [piece.strip().rstrip(".") for piece in (what, hint) if piece.strip()]
    text = ". ".join(parts)
    if where:
        text = f"{where}: {text}"
    return printable(text)


def printable(text: str) -> str:
    """Replace line breaks and control characters, so that a hostile name stays in its line."""
    return "".join(c if c.isprintable() else " " if c in "\n\r\t" else "\N{REPLACEMENT CHARACTER}" for c in text)


def did_you_mean(word: str, known: Iterable[str], *, most: int = 3) -> str:
    """A hint with the nearest known spellings, or an empty string.

    >>> did_you_mean("spacing", ["spacing_m", "height_m", "name"])
    'did you mean "spacing_m"?'
    """
    known = list(dict.fromkeys(known))
    near = difflib.get_close_matches(word, known, n=most, cutoff=0.5)
    if not near:
        return ""
    return "did you mean " + " or ".join(f'"{name}"' for name in near) + "?"


def listed(words: Iterable[str], *, most: int = 12) -> str:
    """Name the allowed words, cut when they are many.

    >>> listed(["z", "y"])
    '"z", "y"'
    """
    words = [f'"{word}"' for word in words]
    more = len(words) - most
    return ", ".join(words[:most]) + (f" and {more} more" if more > 0 else "")
