"""A study as the text of a study file, so that one made in Python can be kept, checked and read again."""

from __future__ import annotations

import json
from typing import Any

from insol.study.description import Study
from insol.study.keys import SECTIONS, TOP_KEYS
from insol.study.reading import study_of
from insol.study.schema import Section, Table


def study_text(study: Study) -> str:
    """The study file that reads as this study; keys that hold their default are left out."""
    content = study_content(study)
    lines = [f"{name} = {toml_value(value)}" for name, value in content.items() if not _is_section(name)]
    for section in SECTIONS:
        found = content.get(section.name, [])
        for item in found if section.many else [found]:
            lines += ["", section.header, *(f"{name} = {toml_value(value)}" for name, value in item.items())]
    return "\n".join(lines) + "\n"


def study_content(study: Study) -> dict[str, Any]:
    """The tables and keys of a study, as a TOML parser would give them."""
    content = {key.name: key.value.give(getattr(study, key.field or key.name)) for key in TOP_KEYS}
    for section in SECTIONS:
        found = getattr(study, section.field)
        if section.many:
            content[section.name] = [table_content(item, _table_of(item, section)) for item in found]
        else:
            content[section.name] = table_content(found, _table_of(found, section))
    return content


def check_study(study: Study) -> Study:
    """A study made in Python, checked like a file.

    Raises
    ------
    StudyError
        As `load_study` raises it.
    """
    return study_of(study_content(study), folder=study.folder, file=study.file)


def table_content(made: Any, table: Table) -> dict[str, Any]:
    """The keys of one table, without those that hold their default.

    >>> from pathlib import Path
    >>> from insol.study.description import Model
    >>> from insol.study.keys import MODEL
    >>> table_content(Model(file=Path("a.obj"), units="m"), MODEL)
    {'file': 'a.obj', 'units': 'm'}
    """
    content = {"kind": made.kind} if hasattr(made, "kind") else {}
    for key in table.keys:
        value = getattr(made, table.field_of(key))
        if value != table.default_of(key):
            content[key.name] = key.value.give(value)
    return content


def toml_value(value: object) -> str:
    """A value as TOML writes it.

    >>> toml_value([[0.0, 1.5], "a"])
    '[[0.0, 1.5], "a"]'
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, list):
        return "[" + ", ".join(toml_value(item) for item in value) + "]"
    if isinstance(value, str):
        # JSON's escapes are TOML's too; only DEL has to be escaped here and not there.
        return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")
    return repr(value)


def _table_of(made: Any, section: Section) -> Table:
    return section.table if isinstance(section.table, Table) else section.table[made.kind]


def _is_section(name: str) -> bool:
    return any(section.name == name for section in SECTIONS)
