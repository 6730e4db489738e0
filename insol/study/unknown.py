"""Keys that no study has: the first of them, how many more, and what may have been meant."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from difflib import get_close_matches
from typing import Any

from insol.errors import listed
from insol.study.keys import SECTIONS, TOP_KEYS
from insol.study.place import Place, nearest, shown
from insol.study.schema import items

ALMOST = 0.8
"""Likeness of two spellings, of which one is surely meant: `role` and `roles`."""


def refuse_unknown(content: Mapping[str, Any], top: Place) -> None:
    """Say no to keys and tables that are not known.

    Raises
    ------
    StudyError
        With the first in the file, its nearest spelling, and how many more there are.
    """
    found = sorted(_unknown(content, top), key=lambda unknown: unknown[0].line or 0)
    if not found:
        return
    place, name, known = found[0]
    more = f" (and {len(found) - 1} more such keys)" if len(found) > 2 else " (and one more)" if len(found) > 1 else ""
    hint = _belongs(name, known) or nearest(name, known) or "known here: " + listed(known, most=20)
    raise place.refuse(f"the key {shown(name)} is not known{more}", hint)


def _unknown(content: Mapping[str, Any], top: Place) -> Iterator[tuple[Place, str, list[str]]]:
    """The place of each unknown key, its name, and the keys that are known there."""
    at_top = [key.name for key in TOP_KEYS] + [section.name for section in SECTIONS]
    yield from ((top.key(name), name, at_top) for name in content if name not in at_top)
    for item, section, place in items(content, SECTIONS, top):
        known = section.key_names(item)
        if known is not None:
            yield from ((place.key(name), name, known) for name in item if name not in known)


def _belongs(name: str, known: list[str]) -> str:
    """A hint where else a key of exactly this name belongs, unless one of almost this name is known here."""
    if get_close_matches(name, known, cutoff=ALMOST):
        return ""
    if name in [key.name for key in TOP_KEYS]:
        return f"{name} belongs at the top of the file, above the first table"
    homes = []
    for section in SECTIONS:
        if isinstance(section.table, Mapping):
            homes += [f'[[{section.name}]] of kind "{kind}"' for kind, table in section.table.items()
                      if name in [key.name for key in table.keys]]  # fmt: skip
        elif name in [key.name for key in section.table.keys]:
            homes.append(section.header)
    return f"{name} is a key of " + " and ".join(homes) if homes else ""
