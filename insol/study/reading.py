"""The study file read: TOML in, a checked `Study` out, or one error that says where and what."""

from __future__ import annotations

import os
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any

from insol.study.description import FacesMeasure, Measure, Period, PointsMeasure, Study
from insol.study.keys import SECTIONS, TOP_KEYS
from insol.study.lines import lines_of
from insol.study.near import near_files
from insol.study.place import Place, Steps
from insol.study.schema import Section, take_section
from insol.study.toml_text import parsed, text_of
from insol.study.unknown import refuse_unknown


def load_study(path: Path | str) -> Study:
    """Read a study file and check everything in it that needs no mesh.

    Raises
    ------
    StudyError
        The file cannot be read, is no TOML, or holds a key or a value that is not allowed, or a
        file that it names is not there.
    """
    path = Path(path)
    text = text_of(path)
    content = parsed(text, str(path))
    return study_of(content, folder=path.absolute().parent, file=path, lines=lines_of(text))


def study_of(
    content: Mapping[str, Any], *, folder: Path, file: Path | None = None, lines: Mapping[Steps, int] | None = None
) -> Study:
    """The study that tables and keys make, checked like a file.

    Parameters
    ----------
    content : as TOML has it
    folder : where the files that it names are looked for
    file : the study file, when there is one
    lines : of the keys in it, for messages
    """
    top = Place("study" if file is None else str(file), lines or {})
    refuse_unknown(content, top)
    made: dict[str, Any] = {
        key.name: key.value.take(content[key.name], top.key(key.name)) for key in TOP_KEYS if key.name in content
    }
    made.setdefault("title", "" if file is None else file.stem)
    for section in SECTIONS:
        if section.least or section.name in content:
            made[section.field] = _section(content, section, top)
    study = Study(**made, folder=folder, file=None if file is None else file.absolute())
    _check_names(study.measures, top.key("measure"))
    _check_names(study.periods, top.key("period"))
    _check_roles(study, top.key("measure"))
    for relative, place in _named_files(study, top):
        _check_file(study, relative, place.key("file"))
    return study


def _section(content: Mapping[str, Any], section: Section, top: Place) -> Any:
    found = content.get(section.name)
    if found is None or found == []:
        needed = "at least one table" if section.many else "the table"
        raise top.refuse(f"{needed} {section.header} is missing: {section.meaning}")
    return take_section(found, section, top.key(section.name))


def _check_names(named: Sequence[Measure | Period], place: Place) -> None:
    """Names become columns and files, and some file systems do not tell capitals."""
    first: dict[str, int] = {}
    for index, item in enumerate(named):
        earlier = first.setdefault(item.name.casefold(), index)
        if earlier != index:
            raise (
                place.item(index, item.name)
                .key("name")
                .refuse(
                    f'"{item.name}" is the name of {place.label}[{earlier + 1}] already',
                    "names must differ by more than capitals",
                )
            )


def _check_roles(study: Study, place: Place) -> None:
    present = {model.role for model in study.models}
    for index, measure in enumerate(study.measures):
        for role in measure.roles if isinstance(measure, FacesMeasure) else ():
            if role not in present:
                raise (
                    place.item(index, measure.name)
                    .key("roles")
                    .refuse(f'no model has the role "{role}"', "models have: " + ", ".join(sorted(present)))
                )


def _named_files(study: Study, top: Place) -> Iterator[tuple[Path, Place]]:
    for index, model in enumerate(study.models):
        yield model.file, top.key("model").item(index, str(model.file))
    for index, measure in enumerate(study.measures):
        if isinstance(measure, PointsMeasure):
            yield measure.file, top.key("measure").item(index, measure.name)


def _check_file(study: Study, relative: Path, place: Place) -> None:
    path = study.path_of(relative)
    if os.path.isfile(path):
        return
    if os.path.isdir(path):
        raise place.refuse(f'"{relative}" is a folder, not a file')
    if not os.path.isdir(path.parent):
        raise place.refuse(f'there is no file "{relative}": there is no folder {path.parent}')
    hint = "write / between folders" if "\\" in str(relative) and os.sep == "/" else near_files(path)
    raise place.refuse(f'there is no file "{relative}" in {path.parent}', hint)
