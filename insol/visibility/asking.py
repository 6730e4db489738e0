"""Many points, many directions: which of them see the sky, asked in the order that casts fastest."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from insol.casting.contract import Caster
from insol.conventions import GRAZING
from insol.visibility.receptors import Receptors

CheckStop = Callable[[], None]
"""Called between casts; raises when the work is to end early."""

LONG_SEGMENT = 256
"""From so many receptors of one orientation on, a cast of their own costs less than gathering them."""


def in_front(normals: NDArray[np.float64], directions: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Whether each direction (m, 3) is in front of each surface (k, 3): (k, m) bool."""
    return normals @ directions.T > GRAZING


def open_sky(
    caster: Caster, receptors: Receptors, directions: NDArray[np.float64], check_stop: CheckStop
) -> NDArray[np.bool_]:
    """Whether the sky is open from each receptor in each direction that is in front of it.

    Parameters
    ----------
    directions : (m, 3) float64, unit

    Returns
    -------
    (m, n) bool; False where a direction is behind the face: nothing is cast there
    """
    front = in_front(receptors.normals, directions)
    answers = np.zeros((len(directions), len(receptors)), dtype=bool)
    short: list[NDArray[np.int64]] = []
    for orientation, run in receptors.segments():
        if run.stop - run.start < LONG_SEGMENT:
            short.append(np.arange(run.start, run.stop))
            continue
        origins = receptors.origins[run]
        for column in np.flatnonzero(front[orientation]):
            check_stop()
            np.logical_not(caster.blocked(origins, directions[column]), out=answers[column, run])
    if short:
        _open_sky_gathered(caster, receptors, np.concatenate(short), directions, front, answers, check_stop)
    return answers


def _open_sky_gathered(
    caster: Caster,
    receptors: Receptors,
    chosen: NDArray[np.int64],
    directions: NDArray[np.float64],
    front: NDArray[np.bool_],
    answers: NDArray[np.bool_],
    check_stop: CheckStop,
) -> None:
    """Fill `answers` for receptors of many orientations, gathered anew for each direction."""
    orientation = receptors.orientation[chosen]
    for column in np.flatnonzero(front[np.unique(orientation)].any(axis=0)):
        check_stop()
        facing = chosen[front[orientation, column]]
        answers[column, facing] = ~caster.blocked(receptors.origins[facing], directions[column])


def open_where(
    caster: Caster,
    receptors: Receptors,
    directions: NDArray[np.float64],
    asked: NDArray[np.bool_],
    taken: NDArray[np.bool_],
    check_stop: CheckStop,
) -> NDArray[np.bool_]:
    """The same, cast only where `asked` (m, n); elsewhere the answer is what is `taken` (m, n) for it.

    What is behind a face is not cast, asked or not.
    """
    front = in_front(receptors.normals, directions)
    answers = taken.copy()
    for column, direction in enumerate(directions):
        check_stop()
        facing = np.flatnonzero(asked[column] & front[receptors.orientation, column])
        answers[column, facing] = ~caster.blocked(receptors.origins[facing], direction)
    return answers
