"""The text of a study file, and what its TOML says; every way in which that can fail in one line."""

from __future__ import annotations

import os
import re
import tomllib
from pathlib import Path
from typing import Any

from insol.errors import StudyError
from insol.study.near import in_folder, near_files

LARGEST_STUDY_BYTES = 2_000_000
"""A polygon of some thousand corners takes a tenth of it; a mesh given by mistake takes more."""

DEEPEST_KEY = 50
"""No key of a study has more than two parts, joined by dots."""

MODEL_ENDINGS = (".obj", ".stl", ".ply", ".off", ".glb", ".gltf", ".3mf", ".dxf", ".ifc", ".json", ".geojson", ".epw")

_STARTER_HINT = "insol new MODEL... writes a starter study"

_SYNTAX_HINTS = (
    (r"""=\s*\d\d-\d\d(?!\d)|=\s*\d{1,2}:\d\d\s*(#|$)""", "put days and times in quotes"),
    (r"""=\s*(True|False)\b""", "write true or false in small letters"),
    (r"""=\s*[+-]?\d+,\d+\s*(#|$)""", "write numbers with a dot, not a comma"),
    (r"""=\s*"[^"]*\\""", "in a path write / between folders, or put the text in single quotes"),
    (r"""=\s*[A-Za-z*/~.][^"'=]*$""", "put texts in quotes"),
    (r"""=\s*[+-]?0\d""", "write numbers without leading zeros"),
    (r"""=\s*(#|$)""", "a value is missing"),
    (r"""^\s*[\w.-]+\s*:""", "write = between key and value"),
)
"""What people type instead of TOML, by the line in which the parser stumbled."""

_TWICE = ("Cannot overwrite", "Cannot declare", "twice", "Cannot mutate", "Redefinition", "Duplicate")


def text_of(path: Path) -> str:
    """The text of a study file.

    Raises
    ------
    StudyError
        There is no such file, it cannot be read, it is empty, or not UTF-8.
    """
    where = str(path)
    if os.path.isdir(path):
        within = [name for name in in_folder(path) if name.endswith(".toml")]
        within.sort(key=lambda name: name != "study.toml")
        hint = f"in it is {within[0]}" if within else _STARTER_HINT
        raise StudyError("this is a folder, not a study file", where=where, hint=hint)
    if not os.path.isfile(path):
        what = "this is not a file that can be read twice" if os.path.lexists(path) and os.path.exists(path) else ""
        raise StudyError(what or "there is no such study file", where=where, hint=near_files(path) or _STARTER_HINT)
    try:
        size = os.path.getsize(path)
        if path.suffix.lower() in MODEL_ENDINGS or size > LARGEST_STUDY_BYTES:
            raise StudyError("this is not a study file, which is a TOML text", where=where, hint=_STARTER_HINT)
        data = path.read_bytes()
    except OSError as failed:
        raise StudyError(f"cannot be read: {failed.strerror}", where=where) from failed
    return _decoded(data, where)


def _decoded(data: bytes, where: str) -> str:
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as failed:
        before = data[: failed.start]
        line = before.count(b"\n") + 1
        kind = " but UTF-16" if data[:2] in (b"\xff\xfe", b"\xfe\xff") else ""
        raise StudyError(
            f"not UTF-8{kind} text: the byte 0x{data[failed.start]:02x} at position {failed.start}",
            where=f"{where}, line {line}", hint="save the file as UTF-8",
        ) from None  # fmt: skip
    if not text.strip():
        raise StudyError("the file is empty", where=where, hint=_STARTER_HINT)
    return text


def parsed(text: str, where: str) -> dict[str, Any]:
    """What a TOML text says.

    Raises
    ------
    StudyError
        The text is no TOML, with the line and column, and what may have been meant.
    """
    for number, line in enumerate(text.split("\n"), start=1):
        if line.count(".") >= DEEPEST_KEY and _is_deep_key(line):
            raise StudyError(f"a key of more than {DEEPEST_KEY} parts", where=f"{where}, line {number}")
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as failed:
        raise _syntax_error(str(failed), text, where) from None
    except RecursionError:
        raise StudyError("lists or tables lie too deep within one another", where=where) from None
    except ValueError:
        # Python does not read whole numbers of more than 4300 digits.
        raise StudyError("a number has thousands of digits", where=where) from None


def _is_deep_key(line: str) -> bool:
    """Whether a line holds a dotted key that the parser would take minutes for: its time grows with the square."""
    run = 0
    for piece in line.split("#")[0].split("."):
        run = run + 1 if piece and not any(mark in piece for mark in ",[]{}=") else 0
        if run >= DEEPEST_KEY:
            return True
    return False


def _syntax_error(message: str, text: str, where: str) -> StudyError:
    found = re.fullmatch(r"(?s)(.*?) \((?:at line (\d+), column (\d+)|at end of document)\)", message)
    if found is None:
        return StudyError(f"not valid TOML: {message}", where=where)
    lines = text.replace("\r\n", "\n").split("\n")
    line = int(found[2] or len(lines))
    column = f", column {found[3]}" if found[3] else ", the end of the file"
    what = found[1][:1].lower() + found[1][1:]
    hint = _hint(message, lines[line - 1])
    return StudyError(f"not valid TOML: {what}", where=f"{where}, line {line}{column}", hint=hint)


def _hint(message: str, line: str) -> str:
    if any(piece in message for piece in _TWICE):
        return "a key or table is given twice; those that may repeat are written [[model]], [[measure]], [[period]]"
    if "Illegal character '\\n'" in message:
        return "a closing quote is missing"
    line = line[:500]
    return next((hint for pattern, hint in _SYNTAX_HINTS if re.search(pattern, line)), "")
