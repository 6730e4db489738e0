"""One path of the sun across the sky: sampled at a step, then every change between samples halved.

A path is a line of directions with a parameter that runs like seconds of time: a day's own course,
or the course at one declination. For every receptor it falls into visits, the spans in which the
sun is in front of its face; what is found is whether the sky is open as a visit begins, and where
that changes.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from insol.casting.contract import Caster
from insol.conventions import EDGE_SECONDS, GRAZING
from insol.visibility.asking import CheckStop, open_sky, open_where
from insol.visibility.receptors import Receptors

INSIDE_S = EDGE_SECONDS / 2
"""How far inside a visit its first and last sample lie [s]: at its very end the ray grazes the face."""

FACING_GRID_S = 120.0
"""Spacing of the instants between which the sun is looked for as it comes before a surface [s]."""

RAYS_AT_ONCE = 1 << 18
"""Rays of different directions cast together: bounds their memory."""


class SunPath(Protocol):
    """A course of the sun from its rise to its set."""

    @property
    def rise(self) -> float: ...

    @property
    def set(self) -> float: ...

    def directions(self, at: NDArray[np.float64]) -> NDArray[np.float64]:
        """Unit vectors (m, 3) towards the sun at parameters (m,)."""
        ...


@dataclass(frozen=True)
class Windows:
    """Spans of a path in which the sun is in front of an orientation, in order of orientation and time."""

    orientation: NDArray[np.int64]  # (w,)
    begin: NDArray[np.float64]  # (w,)
    end: NDArray[np.float64]  # (w,)


@dataclass(frozen=True)
class Visits:
    """The same for receptors: a receptor may have two, as a north wall in summer has."""

    receptor: NDArray[np.int64]  # (v,)
    begin: NDArray[np.float64]  # (v,)
    end: NDArray[np.float64]  # (v,)


@dataclass(frozen=True)
class Traced:
    """What a path came to.

    Attributes
    ----------
    visits : in order of receptor and time
    open_first : (v,) bool, whether the sky is open as the visit begins
    edge_visit : (e,) int64, the visit of each change, ascending
    edge_at : (e,) float64, where it lies, ascending within a visit
    """

    visits: Visits
    open_first: NDArray[np.bool_]
    edge_visit: NDArray[np.int64]
    edge_at: NDArray[np.float64]


def samples_between(rise: float, set_: float, step_s: float) -> NDArray[np.float64]:
    """The middles (m,) of even pieces no longer than the step."""
    count = max(int(np.ceil((set_ - rise) / step_s)), 1)
    return rise + (np.arange(count) + 0.5) * (set_ - rise) / count


@dataclass(frozen=True)
class Guess:
    """What may be taken for known before a path is asked.

    Attributes
    ----------
    visits : of the receptors on the path
    asked : (m, n) bool, whether a sample has to be asked
    taken : (m, n) bool, the answer where it has not
    ends_asked, begin_taken, end_taken : (v,) bool, the same for the ends of the visits
    """

    visits: Visits
    asked: NDArray[np.bool_]
    taken: NDArray[np.bool_]
    ends_asked: NDArray[np.bool_]
    begin_taken: NDArray[np.bool_]
    end_taken: NDArray[np.bool_]


def trace(
    caster: Caster,
    receptors: Receptors,
    path: SunPath,
    samples: NDArray[np.float64],
    width_s: float,
    check_stop: CheckStop,
    guess: Guess | None = None,
) -> Traced:
    """Ask a path at its samples and refine every change to a width.

    Parameters
    ----------
    samples : (m,) float64, ascending, between rise and set
    width_s : an edge is known when its bracket is no wider than this
    guess : where nothing needs to be asked, if anywhere
    """
    visits = visits_of(receptors, front_windows(receptors.normals, path)) if guess is None else guess.visits
    directions = path.directions(samples)
    asker = _Asker(caster, receptors, path, check_stop)
    if guess is None:
        answers = open_sky(caster, receptors, directions, check_stop)
        at_begin = asker.open_at(visits.receptor, visits.begin + INSIDE_S)
        at_end = asker.open_at(visits.receptor, visits.end - INSIDE_S)
    else:
        answers = open_where(caster, receptors, directions, guess.asked, guess.taken, check_stop)
        at_begin, at_end = guess.begin_taken.copy(), guess.end_taken.copy()
        ends = np.flatnonzero(guess.ends_asked)
        at_begin[ends] = asker.open_at(visits.receptor[ends], visits.begin[ends] + INSIDE_S)
        at_end[ends] = asker.open_at(visits.receptor[ends], visits.end[ends] - INSIDE_S)
    edges = _bracketed_edges(visits, samples, answers, at_begin, at_end)
    return Traced(visits, at_begin, edges.visit, asker.refined(visits.receptor[edges.visit], edges, width_s))


@dataclass(frozen=True)
class Edges:
    """Changes between two samples of one visit, in order of visit and time."""

    visit: NDArray[np.int64]  # (e,)
    low: NDArray[np.float64]  # (e,) the sample before the change
    high: NDArray[np.float64]  # (e,) the one after it
    open_before: NDArray[np.bool_]  # (e,)


@dataclass(frozen=True)
class _Asker:
    """Rays that each have a parameter of their own."""

    caster: Caster
    receptors: Receptors
    path: SunPath
    check_stop: CheckStop

    def open_at(self, which: NDArray[np.int64], at: NDArray[np.float64]) -> NDArray[np.bool_]:
        """Whether the sky is open from each receptor in `which` (r,) at its own parameter (r,)."""
        answers = np.empty(len(which), dtype=bool)
        for first in range(0, len(which), RAYS_AT_ONCE):
            self.check_stop()
            part = slice(first, first + RAYS_AT_ONCE)
            directions = self.path.directions(at[part]).astype(np.float32)
            answers[part] = ~self.caster.blocked_each(self.receptors.origins[which[part]], directions)
        return answers

    def refined(self, which: NDArray[np.int64], edges: Edges, width_s: float) -> NDArray[np.float64]:
        """Where each edge lies, its bracket halved until it is no wider than `width_s`."""
        low, high = edges.low.copy(), edges.high.copy()
        while True:
            wide = np.flatnonzero(high - low > width_s)
            if not len(wide):
                return (low + high) / 2
            middle = (low[wide] + high[wide]) / 2
            same = self.open_at(which[wide], middle) == edges.open_before[wide]
            low[wide] = np.where(same, middle, low[wide])
            high[wide] = np.where(same, high[wide], middle)


def front_windows(normals: NDArray[np.float64], path: SunPath) -> Windows:
    """When the sun is in front of each orientation (k, 3) along a path, to a hundredth of a second.

    Looked for on a grid of its own, whatever the samples. The cosine of incidence is a sine of the
    hour angle: between instants two minutes apart it changes sign at most once, except where the
    sun comes before the plane for less than that, and then lights it at a grazing angle only.
    """
    inner = samples_between(path.rise, path.set, FACING_GRID_S)
    instants = np.concatenate([[path.rise], inner, [path.set]])
    front = normals @ path.directions(instants).T > GRAZING
    orientation, gap = np.nonzero(front[:, 1:] != front[:, :-1])
    crossing = _crossings(normals[orientation], path, instants[gap], instants[gap + 1])
    return _windows(front, orientation, crossing, front[orientation, gap], path)


def _crossings(
    normals: NDArray[np.float64], path: SunPath, low: NDArray[np.float64], high: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Where the sun passes each plane between two parameters: false position, of which three turns suffice."""
    if not len(low):
        return low

    def cosines(at: NDArray[np.float64]) -> NDArray[np.float64]:
        return np.einsum("ij,ij->i", normals, path.directions(at)) - GRAZING

    at_low, at_high = cosines(low), cosines(high)
    middle = low
    for _ in range(3):
        middle = low + (high - low) * at_low / (at_low - at_high)
        at_middle = cosines(middle)
        below = (at_middle > 0) == (at_low > 0)
        low, at_low = np.where(below, middle, low), np.where(below, at_middle, at_low)
        high, at_high = np.where(below, high, middle), np.where(below, at_high, at_middle)
    return middle


def _windows(
    front: NDArray[np.bool_],
    orientation: NDArray[np.int64],
    crossing: NDArray[np.float64],
    before: NDArray[np.bool_],
    path: SunPath,
) -> Windows:
    """Join the crossings of a surface's plane, and the path's ends where it is in front there."""
    first, last = np.flatnonzero(front[:, 0]), np.flatnonzero(front[:, -1])
    opens = np.concatenate([first, orientation[~before]])
    begin = np.concatenate([np.full(len(first), path.rise), crossing[~before]])
    closes = np.concatenate([orientation[before], last])
    end = np.concatenate([crossing[before], np.full(len(last), path.set)])
    opening, closing = np.lexsort((begin, opens)), np.lexsort((end, closes))
    windows = Windows(opens[opening], begin[opening], end[closing])
    kept = windows.end - windows.begin > 2 * INSIDE_S
    return Windows(windows.orientation[kept], windows.begin[kept], windows.end[kept])


def visits_of(receptors: Receptors, windows: Windows) -> Visits:
    """Every window of every receptor's orientation."""
    first = np.searchsorted(windows.orientation, receptors.orientation, side="left")
    count = np.searchsorted(windows.orientation, receptors.orientation, side="right") - first
    receptor = np.repeat(np.arange(len(receptors)), count)
    nth = np.arange(len(receptor)) - np.repeat(np.cumsum(count) - count, count)
    window = np.repeat(first, count) + nth
    return Visits(receptor, windows.begin[window], windows.end[window])


def _bracketed_edges(
    visits: Visits,
    samples: NDArray[np.float64],
    answers: NDArray[np.bool_],
    at_begin: NDArray[np.bool_],
    at_end: NDArray[np.bool_],
) -> Edges:
    """Where two neighbouring samples of a visit differ: its begin, the samples inside it, its end."""
    first = np.searchsorted(samples, visits.begin + INSIDE_S, side="right")
    last = np.searchsorted(samples, visits.end - INSIDE_S, side="left") - 1  # none inside: last < first
    none = last < first
    inner_sample, inner_visit = _inner_changes(visits, answers, first, last)
    pieces = [(
        inner_visit,
        samples[inner_sample],
        samples[inner_sample + 1],
        answers[inner_sample, visits.receptor[inner_visit]],
    )]  # fmt: skip
    begin, end = visits.begin + INSIDE_S, visits.end - INSIDE_S
    at_first = answers[np.minimum(first, len(samples) - 1), visits.receptor]
    at_last = answers[np.maximum(last, 0), visits.receptor]
    for changed, low, high, before in (
        (~none & (at_begin != at_first), begin, samples[np.minimum(first, len(samples) - 1)], at_begin),
        (~none & (at_last != at_end), samples[np.maximum(last, 0)], end, at_last),
        (none & (at_begin != at_end), begin, end, at_begin),
    ):
        chosen = np.flatnonzero(changed)
        pieces.append((chosen, low[chosen], high[chosen], before[chosen]))
    visit, low, high, before = (np.concatenate(column) for column in zip(*pieces, strict=True))
    order = np.lexsort((low, visit))
    return Edges(visit[order], low[order], high[order], before[order])


def _inner_changes(
    visits: Visits, answers: NDArray[np.bool_], first: NDArray[np.int64], last: NDArray[np.int64]
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Sample s and visit v wherever v's answers at s and s + 1 differ, both inside the visit."""
    sample, receptor = np.nonzero(answers[1:] != answers[:-1])
    # A receptor's visits are neighbours; only the one that holds both samples takes the change.
    start = np.searchsorted(visits.receptor, receptor, side="left")
    most = int(np.bincount(visits.receptor).max(initial=0))
    found_sample, found_visit = [], []
    for nth in range(most):
        visit = np.minimum(start + nth, len(visits.receptor) - 1)
        holds = (visits.receptor[visit] == receptor) & (start + nth < len(visits.receptor))
        holds &= (sample >= first[visit]) & (sample + 1 <= last[visit])
        found_sample.append(sample[holds])
        found_visit.append(visit[holds])
    empty = np.empty(0, dtype=np.int64)
    return np.concatenate([empty, *found_sample]), np.concatenate([empty, *found_visit])


def spells_of(traced: Traced) -> tuple[NDArray[np.int64], NDArray[np.float64], NDArray[np.float64]]:
    """Receptor, begin and end (s,) of every spell of open sky, in order of receptor and time."""
    visits, edge_visit, edge_at = traced.visits, traced.edge_visit, traced.edge_at
    count = np.bincount(edge_visit, minlength=len(visits.receptor))
    nth = np.arange(len(edge_visit)) - np.repeat(np.cumsum(count) - count, count)
    opens = traced.open_first[edge_visit] == (nth % 2 == 1)
    open_last = traced.open_first ^ (count % 2 == 1)
    first, last = np.flatnonzero(traced.open_first), np.flatnonzero(open_last)
    begin_visit, begin = (
        np.concatenate([first, edge_visit[opens]]),
        np.concatenate([visits.begin[first], edge_at[opens]]),
    )
    end_visit, end = np.concatenate([edge_visit[~opens], last]), np.concatenate([edge_at[~opens], visits.end[last]])
    # Both halves ascend already, and within a visit the first half comes first.
    opening, closing = np.argsort(begin_visit, kind="stable"), np.argsort(end_visit, kind="stable")
    return visits.receptor[begin_visit[opening]], begin[opening], end[closing]
