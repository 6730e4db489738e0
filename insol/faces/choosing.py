"""Which parts a measure means: by patterns on their names, by roles, or by both together."""

from __future__ import annotations

from collections.abc import Iterable
from fnmatch import fnmatchcase

import numpy as np
from numpy.typing import NDArray

from insol.errors import MeasureError, did_you_mean, listed
from insol.scene.model import Scene
from insol.study.description import FacesMeasure, GroundMeasure

MOST_NAMES_COMPARED = 5000
"""Looking for near spellings among more names than this takes seconds."""


def chosen_parts(scene: Scene, measure: FacesMeasure | GroundMeasure) -> NDArray[np.bool_]:
    """Whether each part (number of parts,) of the scene belongs to the measure.

    With both patterns and roles a part must match one of each.

    Raises
    ------
    MeasureError
        A pattern matches no part, or no part is left.
    """
    roles = measure.roles if isinstance(measure, FacesMeasure) else ()
    where = f'measure "{measure.name}"'
    names = [part.name for part in scene.parts]
    if not measure.parts and not roles:
        raise MeasureError("neither parts nor roles are given", where=where, hint='parts = ["*"] takes every part')
    by_name = named(names, measure.parts, where=where) if measure.parts else np.ones(len(names), dtype=bool)
    by_role = np.array([not roles or part.role in roles for part in scene.parts], dtype=bool)
    chosen: NDArray[np.bool_] = by_name & by_role
    if not chosen.any():
        raise MeasureError(nothing_chosen(scene, measure.parts, roles), where=where)
    return chosen


def named(names: list[str], patterns: Iterable[str], *, where: str) -> NDArray[np.bool_]:
    """Whether each name matches one of the patterns; a pattern may also be a name with brackets in it."""
    chosen = np.zeros(len(names), dtype=bool)
    for pattern in patterns:
        matches = [name == pattern or fnmatchcase(name, pattern) for name in names]
        if not any(matches):
            few = names[:MOST_NAMES_COMPARED]
            near = did_you_mean(pattern, few) or f"the parts are {listed(few)}"
            raise MeasureError(f'no part is named like "{pattern}"', where=f"{where}, key parts", hint=near)
        chosen |= matches
    return chosen


def nothing_chosen(scene: Scene, patterns: tuple[str, ...], roles: tuple[str, ...]) -> str:
    """What to say when names and roles together leave no part."""
    present = listed(dict.fromkeys(part.role for part in scene.parts))
    both = f" among those named like {listed(patterns)}" if patterns else ""
    return f"no part has the role {listed(roles)}{both}; roles in the models: {present or 'none'}"
