"""Hours of a period from bits at the midpoints of its intervals."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from insol.measures.facing import facing_seconds, lent
from insol.measures.sun_hours import SunHours
from insol.sun.times import Intervals
from insol.visibility.asking import in_front
from insol.visibility.receptors import Receptors
from insol.visibility.steps import StepsQuestion, unpacked

RECEPTORS_AT_ONCE = 1024
"""Bits unpacked at a time; a multiple of eight."""

SPREAD = 1.25
"""Widens the sum of independent edge errors to one that holds for 95 of 100 faces and more."""


def hours_by_steps(
    question: StepsQuestion, intervals: Intervals, receptors: Receptors, packed: NDArray[np.uint8]
) -> SunHours:
    """Hours of one chunk of receptors.

    The sun's place in front of each face is exact; the sky's answer at an interval's middle stands
    for the whole of it. An edge between two middles is off by up to half a step. Edges met at the
    same time of day lie on one slowly moving line, so their errors add; those of different times
    of day are independent and add as squares.

    Parameters
    ----------
    packed : (m, ceil(n / 8)) uint8, the question's answer
    """
    start, end = intervals.start.astype(np.float64), intervals.end.astype(np.float64)
    follows = start[1:] <= end[:-1] + 1.0
    front = in_front(receptors.normals, question.track.directions(question.instants))
    seconds, lost = lent(facing_seconds(receptors.normals, start, end, question.track), front, follows)
    slots, step_s = _slots(intervals)
    direct, error = np.empty(len(receptors)), np.empty(len(receptors))
    for first in range(0, len(receptors), RECEPTORS_AT_ONCE):
        run = slice(first, min(first + RECEPTORS_AT_ONCE, len(receptors)))
        bits = unpacked(packed[:, first // 8 : (run.stop + 7) // 8], run.stop - first)
        for orientation, piece in receptors.segments(run):
            columns = np.flatnonzero(front[orientation])
            mine = bits[:, piece.start - first : piece.stop - first][columns]
            direct[piece] = seconds[orientation, columns] @ mine
            neighbours = (np.diff(columns) == 1) & follows[columns[:-1]]
            edges = _edges_by_slot(mine, neighbours, slots[columns[:-1]])
            error[piece] = lost[orientation] + edge_error(edges, step_s)
    # What no cast interval stands for is taken to be lit like the rest, and stated whole as error.
    cast, lost_s = seconds.sum(axis=1)[receptors.orientation], lost[receptors.orientation]
    direct *= 1.0 + np.divide(lost_s, cast, out=np.zeros(len(cast)), where=cast > 0)
    possible = cast + lost_s
    return SunHours(direct / 3600, possible / 3600, error / 3600)


def edge_error(edges: NDArray[np.float64], step_s: float) -> NDArray[np.float64]:
    """Error [s] of a sum over edges that were counted by time of day: (slots, n) -> (n,).

    Half a step for every edge is the most that can be; a spell that fell whole between two samples
    is allowed for by a step more.
    """
    most = edges.sum(axis=0)
    likely = SPREAD * np.sqrt((edges**2).sum(axis=0))
    return step_s / 2 * (np.minimum(most, likely) + 2.0)


def _slots(intervals: Intervals) -> tuple[NDArray[np.int64], float]:
    """The time of day of each interval as a number from 0, and the step [s]."""
    step_s = float((intervals.end - intervals.start).max())
    return ((intervals.middle % 86400) // step_s).astype(np.int64), step_s


def _edges_by_slot(
    bits: NDArray[np.uint8], neighbours: NDArray[np.bool_], slots: NDArray[np.int64]
) -> NDArray[np.float64]:
    """How many edges each receptor has at each time of day: (number of slots, n)."""
    changed = (bits[1:] != bits[:-1])[neighbours]
    if not len(changed):
        return np.zeros((1, bits.shape[1]))
    slot = slots[neighbours]
    # Of sixteen bits a count cannot overflow within a century, and narrow numbers add fastest.
    return np.array([
        np.add.reduce(changed[slot == number], axis=0, dtype=np.uint16) for number in np.unique(slot)
    ], dtype=np.float64)  # fmt: skip
