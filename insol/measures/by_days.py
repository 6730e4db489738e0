"""Hours and spells of a period from days whose edges are known to a second."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.checks import read_only
from insol.conventions import EDGE_SECONDS
from insol.measures.sun_hours import SunHours
from insol.sun.times import Intervals
from insol.visibility.days import DayQuestion
from insol.visibility.receptors import Receptors
from insol.visibility.tracing import front_windows


@dataclass(frozen=True)
class Spells:
    """Unbroken spells of direct sun, in order of receptor and time.

    Attributes
    ----------
    receptor : (s,) int64
    begin, end : (s,) float64, unix seconds
    """

    receptor: NDArray[np.int64]
    begin: NDArray[np.float64]
    end: NDArray[np.float64]

    def __post_init__(self) -> None:
        n = len(self.receptor)
        object.__setattr__(self, "receptor", read_only(self.receptor, np.int64, (n,), "receptor"))
        object.__setattr__(self, "begin", read_only(self.begin, np.float64, (n,), "begin"))
        object.__setattr__(self, "end", read_only(self.end, np.float64, (n,), "end"))


def spans_of(intervals: Intervals) -> NDArray[np.float64]:
    """The period's unbroken spans (s, 2) in unix seconds: its intervals, joined where they touch."""
    breaks = np.flatnonzero(intervals.start[1:] > intervals.end[:-1] + EDGE_SECONDS) + 1
    begins = intervals.start[np.concatenate([[0], breaks])]
    ends = intervals.end[np.concatenate([breaks - 1, [len(intervals.end) - 1]])]
    return np.stack([begins, ends], axis=1).astype(np.float64)


def cut_spells(spells: Spells, spans: NDArray[np.float64]) -> Spells:
    """The spells within the spans (s, 2); a spell over two spans becomes two."""
    pieces = [(spells.receptor[:0], spells.begin[:0], spells.end[:0])]
    pieces += [(spells.receptor, np.maximum(spells.begin, begin), np.minimum(spells.end, end)) for begin, end in spans]
    receptor, begin, end = (np.concatenate(column) for column in zip(*pieces, strict=True))
    kept = np.flatnonzero(end - begin > EDGE_SECONDS / 2)
    order = kept[np.lexsort((begin[kept], receptor[kept]))]
    return Spells(receptor[order], begin[order], end[order])


def hours_by_day(
    question: DayQuestion, spans: NDArray[np.float64], receptors: Receptors, spells: Spells
) -> tuple[SunHours, Spells]:
    """Hours of one day of a period, and its spells, for one chunk of receptors.

    Parameters
    ----------
    spans : (s, 2) the period's spans on this day, unix seconds
    spells : the day's, whole

    Notes
    -----
    Each edge is known to EDGE_SECONDS. What can be missed is a spell, of sun or of shade, that fell
    whole between two samples: a step is allowed for it, and one step more for each spell seen that
    is shorter than two steps, since where some are that short others may be shorter.
    """
    windows = front_windows(receptors.normals, question)
    possible = np.zeros(len(receptors.normals))
    for begin, end in spans:
        inside = np.minimum(windows.end, end) - np.maximum(windows.begin, begin)
        possible += np.bincount(windows.orientation, np.maximum(inside, 0.0), minlength=len(possible))
    cut = cut_spells(spells, spans)
    count = len(receptors)
    direct = np.bincount(cut.receptor, cut.end - cut.begin, minlength=count)
    edges = 2.0 * np.bincount(spells.receptor, minlength=count)
    hidden = question.step_s * (1.0 + _short_spells(spells, count, 2 * question.step_s))
    error = np.where(possible[receptors.orientation] > 0, edges * EDGE_SECONDS + hidden, 0.0)
    hours = SunHours(direct / 3600, possible[receptors.orientation] / 3600, error / 3600)
    return hours, cut


def _short_spells(spells: Spells, count: int, shorter_s: float) -> NDArray[np.float64]:
    """For each receptor, how many spells of sun, or of shade between two of sun, are short."""
    sun = spells.receptor[spells.end - spells.begin < shorter_s]
    same = spells.receptor[1:] == spells.receptor[:-1]
    shade = spells.receptor[1:][same & (spells.begin[1:] - spells.end[:-1] < shorter_s)]
    return np.bincount(np.concatenate([sun, shade]), minlength=count).astype(np.float64)


def added(days: list[SunHours]) -> SunHours:
    """The hours of several days; their errors may all lean one way, so they add."""
    return SunHours(
        direct_h=np.sum([day.direct_h for day in days], axis=0),
        possible_h=np.sum([day.possible_h for day in days], axis=0),
        error_h=np.sum([day.error_h for day in days], axis=0),
    )
