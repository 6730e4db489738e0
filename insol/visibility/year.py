"""The year's rows asked coarse to fine, each receptor only where its own rows disagree.

Some rows are traced whole. Between two of them, where a receptor's visits hold the same sequence
of open and blocked and no edge moves far, the row between follows by interpolation. Elsewhere it is
traced, cast only at the samples where the two rows differ, beside those, and at their edges.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.casting.contract import Caster
from insol.visibility.asking import CheckStop
from insol.visibility.lattice import HALF_TURN_S, PLACE_S, Row, rows_over
from insol.visibility.receptors import Receptors
from insol.visibility.tracing import (
    Guess,
    Traced,
    Visits,
    front_windows,
    samples_between,
    spells_of,
    trace,
    visits_of,
)

THIN_S = 1800.0
"""A shorter spell is thin [s]: between two rows it may lie where neither of them has it."""


@dataclass(frozen=True)
class YearQuestion:
    """When, on the sun's path at each declination, is the sky open?

    Attributes
    ----------
    coarse : spaces between the rows that are traced whole
    levels : how often they are halved
    step_s : spacing of the samples on a row [s of hour angle]
    width_s : to which an edge is found [s]
    smooth_s : edges that move no farther than this between two rows are interpolated [s]
    """

    latitude: float
    north_deg: float
    coarse: int = 16
    levels: int = 2
    step_s: float = 600.0
    width_s: float = 20.0
    smooth_s: float = 900.0

    @property
    def name(self) -> str:
        """A name that is the same for the same rows and samples; the place is in the mask's identity."""
        return f"year-{self.coarse}x{2**self.levels}-{self.step_s:g}s-{self.width_s:g}s-{self.smooth_s:g}s"

    @property
    def rays_per_receptor(self) -> float:
        """How many rays a receptor costs, as measured on a dense block."""
        return self.coarse * (22000.0 / self.step_s + 20.0)

    def rows(self) -> list[Row]:
        """All rows, traced or interpolated."""
        return rows_over(self.latitude, self.north_deg, self.coarse << self.levels)

    def answer(self, caster: Caster, receptors: Receptors, check_stop: CheckStop) -> dict[str, NDArray]:
        """Spells of open sky on every row.

        Returns
        -------
        `count` (rows, n) uint8, spells of each receptor on each row; `begin` and `end` (s,) uint16,
        in order of row, receptor and time, in PLACE_S of hour angle from the lower transit. A spell
        that lasts to an end of its visit runs on to the middle between visits, or to a half turn:
        beyond a visit the sun is behind the face.
        """
        rows = self.rows()
        traced = _trace_rows(self, rows, caster, receptors, check_stop)
        pieces = [_running_on(traced[number], len(receptors)) for number in range(len(rows))]
        return {
            "count": np.stack([count for count, _, _ in pieces]),
            "begin": np.concatenate([begin for _, begin, _ in pieces]),
            "end": np.concatenate([end for _, _, end in pieces]),
        }

    def samples(self, row: Row, *, shifted: bool) -> NDArray[np.float64]:
        """Where a row is asked; every other row half a step along, so that a gap missed on one is met on the next."""
        samples = samples_between(row.rise, row.set, self.step_s)
        quarter = (row.set - row.rise) / len(samples) / 4
        return samples + (quarter if shifted else -quarter)


def _trace_rows(
    question: YearQuestion, rows: list[Row], caster: Caster, receptors: Receptors, check_stop: CheckStop
) -> dict[int, Traced]:
    """Every row, coarse ones first."""
    spacing = 1 << question.levels
    traced: dict[int, Traced] = {}
    for number in range(0, len(rows), spacing):
        samples = question.samples(rows[number], shifted=(number // spacing) % 2 == 1)
        traced[number] = trace(caster, receptors, rows[number], samples, question.width_s, check_stop)
    while spacing > 1:
        half = spacing // 2
        for number in range(half, len(rows), spacing):
            between = _Between(
                question, rows[number], rows[number - half], rows[number + half],
                traced[number - half], traced[number + half], receptors, shifted=(number // half) % 4 == 1,
            )  # fmt: skip
            traced[number] = between.traced(caster, check_stop)
        spacing = half
    return traced


class _Between:
    """A row between two that are known."""

    def __init__(
        self,
        question: YearQuestion,
        row: Row,
        lower: Row,
        upper: Row,
        before: Traced,
        after: Traced,
        receptors: Receptors,
        *,
        shifted: bool,
    ) -> None:
        self.question, self.row, self.receptors = question, row, receptors
        self.before, self.after = before, after
        self.samples = question.samples(row, shifted=shifted)
        self.visits = visits_of(receptors, front_windows(receptors.normals, row))
        self.share = (row.declination - lower.declination) / (upper.declination - lower.declination)

    def traced(self, caster: Caster, check_stop: CheckStop) -> Traced:
        """Interpolated where the two rows say the same, traced elsewhere."""
        alike = self._alike_visits()
        smooth, edge_visit, edge_at = self._interpolated(alike)
        open_first = np.zeros(len(self.visits.receptor), dtype=bool)
        kept = smooth[self.visits.receptor]
        open_first[kept] = self.before.open_first[smooth[self.before.visits.receptor]]
        rough = np.flatnonzero(~smooth)
        if len(rough):
            found = trace(
                caster, self.receptors.chosen(rough), self.row, self.samples, self.question.width_s, check_stop,
                self._guess(rough, alike),
            )  # fmt: skip
            mine = np.flatnonzero(~kept)
            open_first[mine] = found.open_first
            edge_visit = np.concatenate([edge_visit, mine[found.edge_visit]])
            edge_at = np.concatenate([edge_at, found.edge_at])
        order = np.argsort(edge_visit, kind="stable")  # both halves ascend, and no visit is in both
        return Traced(self.visits, open_first, edge_visit[order], edge_at[order])

    def _alike_visits(self) -> NDArray[np.bool_]:
        """Receptors (n,) that have as many visits on all three rows."""
        n = len(self.receptors)
        counts = [np.bincount(v.receptor, minlength=n) for v in (self.before.visits, self.visits, self.after.visits)]
        return np.asarray((counts[0] == counts[1]) & (counts[1] == counts[2]))

    def _interpolated(
        self, alike: NDArray[np.bool_]
    ) -> tuple[NDArray[np.bool_], NDArray[np.int64], NDArray[np.float64]]:
        """Receptors (n,) whose row follows from its neighbours, and the edges (e,) of their visits."""
        n, a, b = len(self.receptors), self.before, self.after
        mine = np.flatnonzero(alike[self.visits.receptor])
        first, second = np.flatnonzero(alike[a.visits.receptor]), np.flatnonzero(alike[b.visits.receptor])
        edges_a = np.bincount(a.edge_visit, minlength=len(a.visits.receptor))[first]
        edges_b = np.bincount(b.edge_visit, minlength=len(b.visits.receptor))[second]
        different = (a.open_first[first] != b.open_first[second]) | (edges_a != edges_b)
        same = alike & (np.bincount(self.visits.receptor[mine], different, minlength=n) == 0)
        at_a, at_b = (x.edge_at[same[x.visits.receptor[x.edge_visit]]] for x in (a, b))
        visit = np.repeat(mine, np.where(same[self.visits.receptor[mine]], edges_a, 0))
        far = np.zeros(n, dtype=bool)
        far[self.visits.receptor[visit[np.abs(at_a - at_b) > self.question.smooth_s]]] = True
        smooth = same & ~far
        kept = smooth[self.visits.receptor[visit]]
        visit, at = visit[kept], ((1 - self.share) * at_a + self.share * at_b)[kept]
        return smooth, visit, np.clip(at, self.visits.begin[visit], self.visits.end[visit])

    def _guess(self, rough: NDArray[np.int64], alike: NDArray[np.bool_]) -> Guess:
        """Ask where the two rows differ or say nothing, and one sample to each side."""
        open_a, known_a = states_at(self.before, self.samples, rough, len(self.receptors))
        open_b, known_b = states_at(self.after, self.samples, rough, len(self.receptors))
        differ = (open_a != open_b) | ~known_a | ~known_b
        asked = differ.copy()
        asked[1:] |= differ[:-1]
        asked[:-1] |= differ[1:]
        # What is thin may have moved by more than its own width: there nothing is known between the rows.
        thin = (self._has_thin(self.before) | self._has_thin(self.after))[rough]
        asked[:, thin] = True
        begin, end, ends_asked = self._ends(alike)
        chosen = np.zeros(len(self.receptors), dtype=bool)
        chosen[rough] = True
        of_rough = chosen[self.visits.receptor]
        number = np.cumsum(chosen) - 1
        visits = Visits(number[self.visits.receptor[of_rough]], self.visits.begin[of_rough], self.visits.end[of_rough])
        return Guess(visits, asked, open_a, ends_asked[of_rough], begin[of_rough], end[of_rough])

    def _has_thin(self, traced: Traced) -> NDArray[np.bool_]:
        """Receptors (n,) with two edges of one visit close to each other."""
        same = traced.edge_visit[1:] == traced.edge_visit[:-1]
        near = same & (np.diff(traced.edge_at) < THIN_S)
        thin = np.zeros(len(self.receptors), dtype=bool)
        thin[traced.visits.receptor[traced.edge_visit[1:][near]]] = True
        return thin

    def _ends(self, alike: NDArray[np.bool_]) -> tuple[NDArray[np.bool_], NDArray[np.bool_], NDArray[np.bool_]]:
        """What both rows say of the begin and the end of each visit (v,), and whether they differ or cannot say."""
        mine = alike[self.visits.receptor]
        said = np.zeros((2, 2, len(mine)), dtype=bool)
        for number, traced in enumerate((self.before, self.after)):
            theirs = alike[traced.visits.receptor]
            said[number, 0, mine], said[number, 1, mine] = traced.open_first[theirs], open_last(traced)[theirs]
        return said[0, 0], said[0, 1], ~mine | (said[0] != said[1]).any(axis=0)


def states_at(
    traced: Traced, samples: NDArray[np.float64], chosen: NDArray[np.int64], count: int
) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Whether the sky is open, and whether a visit tells, at each sample, for chosen receptors: (m, r) each."""
    visits, last = traced.visits, open_last(traced)
    number = np.full(count, -1, dtype=np.int64)
    number[chosen] = np.arange(len(chosen))
    bounds = [(visits.receptor, visits.begin), (visits.receptor, visits.end)]
    turns = [
        (visits.receptor[traced.open_first], visits.begin[traced.open_first]),
        (visits.receptor[traced.edge_visit], traced.edge_at),
        (visits.receptor[last], visits.end[last]),
    ]
    return tuple(  # type: ignore[return-value]
        _toggled(
            number[np.concatenate([where for where, _ in events])], np.concatenate([at for _, at in events]),
            samples, len(chosen),
        )
        for events in (turns, bounds)
    )  # fmt: skip


def _toggled(
    receptor: NDArray[np.int64], at: NDArray[np.float64], samples: NDArray[np.float64], count: int
) -> NDArray[np.bool_]:
    """States (m, count) that begin False and change at every event of their receptor; -1 is nobody's."""
    mine = receptor >= 0
    place = np.searchsorted(samples, at[mine], side="left")
    changes = np.bincount(place * count + receptor[mine], minlength=(len(samples) + 1) * count)
    odd = (changes & 1).astype(np.uint8).reshape(-1, count)[:-1]
    return np.bitwise_xor.accumulate(odd, axis=0).astype(bool)


def open_last(traced: Traced) -> NDArray[np.bool_]:
    """Whether the sky is open as each visit ends, (v,)."""
    odd = np.bincount(traced.edge_visit, minlength=len(traced.visits.receptor)) % 2 == 1
    return np.asarray(traced.open_first ^ odd)


def _running_on(traced: Traced, count: int) -> tuple[NDArray, NDArray, NDArray]:
    """Number of spells (n,), their begins and ends on a row as they are stored; those at a visit's end run on."""
    widened = Traced(_territories(traced.visits), traced.open_first, traced.edge_visit, traced.edge_at)
    receptor, begin, end = spells_of(widened)
    # Two samples hold one edge between them at most: from a step of 200 s on, fewer than 256 spells.
    number = np.bincount(receptor, minlength=count).astype(np.uint8)
    first, last = (np.round((at + HALF_TURN_S) / PLACE_S).astype(np.uint16) for at in (begin, end))
    return number, first, last


def _territories(visits: Visits) -> Visits:
    """Visits widened until they meet: what lies between is nearer to one than to the other."""
    begin, end = np.full(len(visits.begin), -HALF_TURN_S), np.full(len(visits.end), HALF_TURN_S)
    again = np.flatnonzero(visits.receptor[1:] == visits.receptor[:-1])
    middle = (visits.end[again] + visits.begin[again + 1]) / 2
    end[again], begin[again + 1] = middle, middle
    return Visits(visits.receptor, begin, end)
