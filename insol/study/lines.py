"""The line that each key of a TOML text stands in; the parser of the standard library does not tell."""

from __future__ import annotations

import re

from insol.study.place import Steps

_STRING_OR_COMMENT = re.compile(
    r'#[^\n]*|"""(?:\\.|[^\\])*?"""|' + r"'''.*?'''" + r'|"(?:\\.|[^"\\\n])*"|' + r"'[^'\n]*'", re.DOTALL
)
_PART = r"""(?:[A-Za-z0-9_-]+|"\x00*"|'\x00*')"""
_NAME = rf"{_PART}(?:[ \t]*\.[ \t]*{_PART})*"
_HEADER = re.compile(rf"[ \t]*(\[\[?)[ \t]*({_NAME})[ \t]*\]")
_KEY = re.compile(rf"[ \t]*({_NAME})[ \t]*=")


def lines_of(text: str) -> dict[Steps, int]:
    """The line, from 1, of every table and key that begins a line of a valid TOML text.

    Keys inside inline tables and the items of lists are not found; their table or list is.

    >>> lines_of('[site]\\nlatitude = 1\\n[[model]]\\nfile = "a"')[("model", 0, "file")]
    4
    """
    text = text.replace("\r\n", "\n")
    outline = _STRING_OR_COMMENT.sub(_blanked, text).split("\n")
    found: dict[Steps, int] = {}
    counts: dict[Steps, int] = {}
    table: Steps = ()
    depth = 0
    for number, (line, original) in enumerate(zip(outline, text.split("\n"), strict=True), start=1):
        if depth == 0:
            if header := _HEADER.match(line):
                table = _entered(_names(header, 2, original), header[1] == "[[", counts)
                found.setdefault(table, number)
                continue
            if key := _KEY.match(line):
                found.setdefault((*table, *_names(key, 1, original)), number)
        depth += line.count("[") + line.count("{") - line.count("]") - line.count("}")
    return found


def _blanked(match: re.Match[str]) -> str:
    """Nothing for a comment; a string with its quotes and line breaks, all else in it blank."""
    string = match[0]
    if string[0] == "#":
        return ""
    return string[0] + re.sub(r"[^\n]", "\x00", string[1:-1]) + string[-1]


def _names(match: re.Match[str], group: int, original: str) -> list[str]:
    """The parts of a dotted name, read from the line as it was."""
    start = match.start(group)
    return [
        original[start + part.start() : start + part.end()].strip("\"'") for part in re.finditer(_PART, match[group])
    ]


def _entered(names: list[str], listed: bool, counts: dict[Steps, int]) -> Steps:
    """The steps to the table that a header opens; a listed one is one more of its name."""
    steps: Steps = ()
    for depth, name in enumerate(names, start=1):
        steps = (*steps, name)
        if listed and depth == len(names):
            counts[steps] = counts.get(steps, -1) + 1
        if steps in counts:
            steps = (*steps, counts[steps])
    return steps
