"""A day asked for its spells of open sky: sampled at a step, then every edge found to a second.

The answer does not depend on a period's clock, window or low-sun limit: those only cut the spells.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.casting.contract import Caster
from insol.conventions import EDGE_SECONDS, GRAZING
from insol.sun.position import SunTrack
from insol.visibility.asking import CheckStop, open_sky
from insol.visibility.receptors import Receptors

INSIDE_S = EDGE_SECONDS / 2
"""How far inside a window its first and last sample lie [s]: at its very end the ray grazes the face."""

BISECT_AT_ONCE = 1 << 18
"""Edges refined together: bounds the memory of their rays."""


@dataclass(frozen=True)
class DayQuestion:
    """When, between the sun's rise and set on one day, is the sky open towards it?

    Attributes
    ----------
    label : the date, for people
    rise, set : unix seconds; the sun's centre is above the horizon between them
    step_s : spacing of the samples between which edges are looked for [s]
    track : where the sun stands
    """

    label: str
    rise: float
    set: float
    step_s: float
    track: SunTrack

    @property
    def name(self) -> str:
        """A name that is the same for the same span and step."""
        return f"day-{self.label}-{round(self.rise)}-{round(self.set)}-{round(self.step_s)}s"

    @property
    def rays_per_receptor(self) -> float:
        """How many rays a receptor costs: samples, half of them behind it, and some refined edges."""
        return (self.set - self.rise) / self.step_s / 2 + 2 + 3 * np.log2(max(self.step_s, 2.0))

    def samples(self) -> NDArray[np.float64]:
        """The instants (m,) between rise and set at which every receptor is asked, in unix seconds."""
        count = max(int(np.ceil((self.set - self.rise) / self.step_s)), 1)
        width = (self.set - self.rise) / count
        return self.rise + (np.arange(count) + 0.5) * width

    def answer(self, caster: Caster, receptors: Receptors, check_stop: CheckStop) -> dict[str, NDArray]:
        """Spells of open sky in order of receptor and time.

        Returns
        -------
        `receptor` (s,) int32, `begin` and `end` (s,) float64 in unix seconds
        """
        samples = self.samples()
        windows = front_windows(receptors.normals, self.track, self.rise, self.set, samples)
        visits = _visits(receptors, windows)
        answers = open_sky(caster, receptors, self.track.directions(samples), check_stop)
        at_begin, at_end = (self._open_at(caster, receptors, visits.receptor, instants, check_stop)
                            for instants in (visits.begin + INSIDE_S, visits.end - INSIDE_S))  # fmt: skip
        edges = _bracketed_edges(visits, samples, answers, at_begin, at_end)
        instants = self._refined(caster, receptors, visits.receptor[edges.visit], edges, check_stop)
        return _spells(visits, at_begin, at_end, edges, instants)

    def _open_at(
        self,
        caster: Caster,
        receptors: Receptors,
        which: NDArray[np.int64],
        instants: NDArray[np.float64],
        check_stop: CheckStop,
    ) -> NDArray[np.bool_]:
        """Whether the sky is open from each receptor in `which` at its own instant."""
        answers = np.empty(len(which), dtype=bool)
        for first in range(0, len(which), BISECT_AT_ONCE):
            check_stop()
            part = slice(first, first + BISECT_AT_ONCE)
            directions = self.track.directions(instants[part]).astype(np.float32)
            answers[part] = ~caster.blocked_each(receptors.origins[which[part]], directions)
        return answers

    def _refined(
        self,
        caster: Caster,
        receptors: Receptors,
        which: NDArray[np.int64],
        edges: Edges,
        check_stop: CheckStop,
    ) -> NDArray[np.float64]:
        """The instant of each edge, by halving its bracket until it is no wider than EDGE_SECONDS."""
        low, high = edges.low.copy(), edges.high.copy()
        while True:
            wide = np.flatnonzero(high - low > EDGE_SECONDS)
            if not len(wide):
                return (low + high) / 2
            middle = (low[wide] + high[wide]) / 2
            same = self._open_at(caster, receptors, which[wide], middle, check_stop) == edges.open_before[wide]
            low[wide] = np.where(same, middle, low[wide])
            high[wide] = np.where(same, high[wide], middle)


@dataclass(frozen=True)
class Windows:
    """Spans of a day in which the sun is in front of an orientation, in order of orientation and time."""

    orientation: NDArray[np.int64]  # (w,)
    begin: NDArray[np.float64]  # (w,) unix seconds
    end: NDArray[np.float64]  # (w,)


@dataclass(frozen=True)
class Visits:
    """The same for receptors: a receptor may have two, as a north wall in summer has."""

    receptor: NDArray[np.int64]  # (v,)
    begin: NDArray[np.float64]  # (v,)
    end: NDArray[np.float64]  # (v,)


@dataclass(frozen=True)
class Edges:
    """Changes between two samples of one visit, in order of visit and time."""

    visit: NDArray[np.int64]  # (e,)
    low: NDArray[np.float64]  # (e,) the sample before the change
    high: NDArray[np.float64]  # (e,) the one after it
    open_before: NDArray[np.bool_]  # (e,)


def front_windows(
    normals: NDArray[np.float64], track: SunTrack, rise: float, set_: float, samples: NDArray[np.float64]
) -> Windows:
    """When the sun is in front of each orientation (k, 3) between rise and set, to a hundredth of a second.

    The cosine of incidence is a sine of the hour angle: between samples some minutes apart it
    changes sign at most once, except where the sun only touches the plane, which lights nothing.
    """
    instants = np.concatenate([[rise], samples, [set_]])
    cosines = normals @ track.directions(instants).T - GRAZING
    front = cosines > 0
    orientation, gap = np.nonzero(front[:, 1:] != front[:, :-1])
    low, high = instants[gap].copy(), instants[gap + 1].copy()
    before = front[orientation, gap]
    while len(low) and (high - low).max() > 0.01:
        middle = (low + high) / 2
        same = (np.einsum("ij,ij->i", normals[orientation], track.directions(middle)) > GRAZING) == before
        low, high = np.where(same, middle, low), np.where(same, high, middle)
    crossing = (low + high) / 2
    first, last = np.flatnonzero(front[:, 0]), np.flatnonzero(front[:, -1])
    begins = np.concatenate([first, orientation[~before]]), np.concatenate([np.full(len(first), rise), crossing[~before]])
    ends = np.concatenate([orientation[before], last]), np.concatenate([crossing[before], np.full(len(last), set_)])
    opening, closing = np.lexsort(begins[::-1]), np.lexsort(ends[::-1])
    windows = Windows(begins[0][opening], begins[1][opening], ends[1][closing])
    kept = windows.end - windows.begin > 2 * INSIDE_S
    return Windows(windows.orientation[kept], windows.begin[kept], windows.end[kept])


def _visits(receptors: Receptors, windows: Windows) -> Visits:
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


def _spells(
    visits: Visits,
    at_begin: NDArray[np.bool_],
    at_end: NDArray[np.bool_],
    edges: Edges,
    instants: NDArray[np.float64],
) -> dict[str, NDArray]:
    """Join begins and ends of open sky: the visit's own and the refined edges."""
    opened, closed = np.flatnonzero(at_begin), np.flatnonzero(at_end)
    begin_visit = np.concatenate([opened, edges.visit[~edges.open_before]])
    begin = np.concatenate([visits.begin[opened], instants[~edges.open_before]])
    end_visit = np.concatenate([edges.visit[edges.open_before], closed])
    end = np.concatenate([instants[edges.open_before], visits.end[closed]])
    opening, closing = np.lexsort((begin, begin_visit)), np.lexsort((end, end_visit))
    return {
        "receptor": visits.receptor[begin_visit[opening]].astype(np.int32),
        "begin": begin[opening],
        "end": end[closing],
    }
