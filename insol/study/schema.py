"""Tables of a study as data: rows of keys, and the one way in which any such table is read."""

from __future__ import annotations

import dataclasses
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from insol.study.place import Place, nearest, shown
from insol.study.values import Value

REQUIRED = object()
"""Stands for the default of a key that has none."""


@dataclass(frozen=True)
class Key:
    """A key, what it may hold, and what it is for.

    It must be given where the field of the dataclass has no default.
    """

    name: str
    value: Value
    meaning: str
    field: str = ""  # of the dataclass, where it is named otherwise


@dataclass(frozen=True)
class Table:
    """The keys of one table and the dataclass that they make.

    Attributes
    ----------
    called_by : the key by which an item is known, for messages
    check : what must hold between the keys; it raises through the place
    """

    make: type[Any]
    keys: tuple[Key, ...]
    called_by: str = ""
    check: Callable[[Any, Place], None] | None = None

    def field_of(self, key: Key) -> str:
        """The dataclass's name of a key."""
        return key.field or key.name

    def default_of(self, key: Key) -> object:
        """What a key holds that is not given; REQUIRED where it must be."""
        field = next(field for field in dataclasses.fields(self.make) if field.name == self.field_of(key))
        return REQUIRED if field.default is dataclasses.MISSING else field.default


@dataclass(frozen=True)
class Section:
    """A table of the file, `[name]`, or a list of them, `[[name]]`.

    Attributes
    ----------
    table : of one form, or of several told apart by their key `kind`
    field : of the study
    least : how many there must be
    """

    name: str
    table: Table | Mapping[str, Table]
    meaning: str
    field: str
    many: bool = False
    least: int = 1

    @property
    def header(self) -> str:
        """As it is written in the file."""
        return f"[[{self.name}]]" if self.many else f"[{self.name}]"

    @property
    def tables(self) -> list[Table]:
        """Every form of it."""
        return [self.table] if isinstance(self.table, Table) else list(self.table.values())

    def key_names(self, content: Mapping[str, object]) -> list[str] | None:
        """The keys that an item may have; None when its kind is not known."""
        if isinstance(self.table, Table):
            return [key.name for key in self.table.keys]
        kind = content.get("kind")
        form = self.table.get(kind) if isinstance(kind, str) else None
        return None if form is None else ["kind", *(key.name for key in form.keys)]


def take_table(content: Mapping[str, object], table: Table, place: Place) -> Any:
    """The dataclass that a table of the file makes.

    Raises
    ------
    StudyError
        A key is missing, of another type, or of a value that is not allowed.
    """
    values = {}
    for key in table.keys:
        if key.name in content:
            values[table.field_of(key)] = key.value.take(content[key.name], place.key(key.name))
        elif table.default_of(key) is REQUIRED:
            raise place.refuse(f"{key.name} is missing: {key.meaning}", f"it must be {key.value.allowed}")
    made = table.make(**values)
    if table.check is not None:
        table.check(made, place)
    return made


def take_section(content: object, section: Section, place: Place) -> Any:
    """What a section makes: a dataclass, or a tuple of them for a list."""
    if not section.many:
        if not isinstance(content, dict):
            written = f"a single table, {section.header}" if isinstance(content, list) else f"a table, {section.header}"
            raise place.refuse(f"must be {written}, not {_form(content)}", section.meaning)
        return _take_item(content, section, place)
    if not isinstance(content, list) or not all(isinstance(item, dict) for item in content):
        hint = "write the header with double brackets, once for each" if isinstance(content, dict) else section.meaning
        raise place.refuse(f"must be a list of tables, {section.header}, not {_form(content)}", hint)
    return tuple(
        _take_item(item, section, _item_place(item, section, place, index)) for index, item in enumerate(content)
    )


def items(
    content: Mapping[str, object], sections: tuple[Section, ...], top: Place
) -> Iterator[tuple[Any, Section, Place]]:
    """Every table of the file that is one, with its section and its place."""
    for section in sections:
        place, found = top.key(section.name), content.get(section.name)
        if isinstance(found, dict):
            yield found, section, place
        for index, item in enumerate(found if isinstance(found, list) else ()):
            if isinstance(item, dict):
                yield item, section, _item_place(item, section, place, index)


def _take_item(content: dict[str, Any], section: Section, place: Place) -> Any:
    if isinstance(section.table, Table):
        return take_table(content, section.table, place)
    kinds = section.table
    allowed = ", ".join(f'"{kind}"' for kind in kinds)
    if "kind" not in content:
        raise place.refuse(f"kind is missing: one of {allowed}")
    kind = content["kind"]
    if not isinstance(kind, str) or kind not in kinds:
        hint = nearest(kind, kinds) if isinstance(kind, str) else ""
        raise place.key("kind").refuse(f"must be one of {allowed}, not {shown(kind)}", hint)
    return take_table(content, kinds[kind], place)


def _item_place(content: Mapping[str, object], section: Section, place: Place, index: int) -> Place:
    called = next((content.get(table.called_by) for table in section.tables if table.called_by in content), "")
    return place.item(index, called if isinstance(called, str) else "")


def _form(content: object) -> str:
    if isinstance(content, dict):
        return "a single table"
    if isinstance(content, list):
        return "a list of tables" if content and isinstance(content[0], dict) else "a list"
    return shown(content)
