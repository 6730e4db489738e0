"""Where in a study file a value stands, and the words to refuse it with."""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from insol.errors import StudyError, did_you_mean

Steps = tuple[str | int, ...]
"""From the top of the file to a value: ("measure", 1, "spacing_m"), items counted from 0."""

LONGEST_SHOWN = 60


@dataclass(frozen=True)
class Place:
    """A key of the study, the label people know it by, and the lines that keys are written in."""

    file: str
    lines: Mapping[Steps, int] = field(default_factory=dict)
    steps: Steps = ()
    label: str = ""

    def key(self, name: str) -> Place:
        """The place of a key within this table."""
        label = f"{self.label}.{cut(name)}" if self.label else cut(name)
        return Place(self.file, self.lines, (*self.steps, name), label)

    def item(self, index: int, called: str = "") -> Place:
        """The place of an item of this list; people count from 1."""
        label = f"{self.label}[{index + 1}]" + (f' "{cut(called, 40)}"' if called else "")
        return Place(self.file, self.lines, (*self.steps, index), label)

    @property
    def line(self) -> int | None:
        """The line of the key, or of the nearest table around it that has one."""
        for length in range(len(self.steps), 0, -1):
            steps = self.steps[:length]
            found = self.lines.get(steps) or self.lines.get((*steps, 0))
            if found is not None:
                return found
        return None

    def refuse(self, what: str, hint: str = "") -> StudyError:
        """The error that says what is wrong here, to be raised."""
        line = f"line {self.line}" if self.line is not None else ""
        where = ", ".join(piece for piece in (self.file, line, self.label) if piece)
        return StudyError(what, where=where, hint=hint)

    def must_be(self, allowed: str, received: object, hint: str = "") -> StudyError:
        """The error for a value that is not what is allowed, to be raised."""
        return self.refuse(f"must be {allowed}, not {shown(received)}", hint)


def shown(value: object) -> str:
    """A value as it would be written in the file, cut when it is long.

    >>> shown(True), shown("north"), shown([1, 2.5])
    ('true', '"north"', '[1, 2.5]')
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return f'"{cut(value)}"'
    if isinstance(value, (list, tuple)):
        inner = ", ".join(shown(item) for item in value[:6])
        return cut(f"[{inner}{', ...' if len(value) > 6 else ''}]")
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, (datetime.date, datetime.time)):
        return f"the {'time' if isinstance(value, datetime.time) else 'date'} {value.isoformat()}"
    return cut(text_of_number(value))


def text_of_number(value: object) -> str:
    """Digits of a number; python itself refuses to print endless whole numbers."""
    try:
        return str(value)
    except ValueError:
        return "a number of thousands of digits"


def cut(text: str, longest: int = LONGEST_SHOWN) -> str:
    """The text, its end left out when it is long."""
    return text if len(text) <= longest else text[: longest - 3] + "..."


def nearest(word: str, known: Iterable[str], also: Mapping[str, str] | None = None) -> str:
    """A hint with the nearest allowed word: another case, another name for it, a near spelling.

    >>> nearest("Metres", ["mm", "m"], {"metres": "m"})
    'did you mean "m"?'
    """
    known = list(known)
    spoken = {**(also or {}), **{name.casefold(): name for name in known}}
    meant = spoken.get(word.strip().casefold())
    return f'did you mean "{meant}"?' if meant is not None else did_you_mean(word[:200], known)
