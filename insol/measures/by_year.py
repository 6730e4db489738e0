"""Hours of any period from the year's rows: every minute of it is a weight on the rows beside it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.conventions import GRAZING
from insol.measures.sun_hours import SunHours
from insol.sun.position import SunTrack, direction_from
from insol.sun.times import Intervals
from insol.visibility.lattice import HALF_TURN_S, PLACE_S, SECONDS_PER_DEGREE
from insol.visibility.receptors import Receptors
from insol.visibility.year import YearQuestion

PIECE_S = 60.0
"""A period is taken in pieces no longer than this."""

CELL_S = 60.0
"""Width of a row's cells [s of hour angle]: a quarter of a degree."""

CELLS = int(2 * HALF_TURN_S / CELL_S)

PLACES_A_CELL = int(CELL_S / PLACE_S)

MOST_KEPT = 64
"""Orientations whose weights are kept at a time: half a megabyte each."""

PER_SPELL, HIDDEN, BENT = 0.45, 0.5, 0.1
"""Weights of the three causes of error: of a step for each spell, and of their own estimates for the others."""

FEWEST_SPELLS = 4
"""A face that no sun was found on may still have had some: its error is that of so many spells."""

SHORTEST_S = 30.0
"""Shorter spells count as of this length: the estimate would run away."""


@dataclass(frozen=True)
class Minutes:
    """A period in pieces of a minute or less, placed among the rows.

    Attributes
    ----------
    seconds : (m,) float64, length of each
    direction : (m, 3) float64, towards the sun
    hour_angle : (m,) float64 [deg]
    row : (m,) int64, the row at or below its declination
    share : (m,) float64, how far it is towards the row above
    """

    seconds: NDArray[np.float64]
    direction: NDArray[np.float64]
    hour_angle: NDArray[np.float64]
    row: NDArray[np.int64]
    share: NDArray[np.float64]


def minutes_of(intervals: Intervals, track: SunTrack, declinations: NDArray[np.float64]) -> Minutes:
    """The pieces of a period's intervals."""
    length = (intervals.end - intervals.start).astype(np.float64)
    count = np.ceil(length / PIECE_S).astype(np.int64)
    interval = np.repeat(np.arange(len(count)), count)
    nth = np.arange(len(interval)) - np.repeat(np.cumsum(count) - count, count)
    seconds = (length / count)[interval]
    middle = intervals.start[interval] + (nth + 0.5) * seconds
    declination = track.declination(middle)
    row = np.clip(np.searchsorted(declinations, declination) - 1, 0, len(declinations) - 2)
    share = (declination - declinations[row]) / (declinations[row + 1] - declinations[row])
    return Minutes(seconds, track.directions(middle), track.hour_angle(middle), row, np.clip(share, 0.0, 1.0))


class YearWeights:
    """Weights of a period on the cells of the rows, for one orientation after another."""

    def __init__(self, question: YearQuestion, intervals: Intervals, track: SunTrack) -> None:
        self.question = question
        self.declinations = np.array([row.declination for row in question.rows()])
        self.minutes = minutes_of(intervals, track, self.declinations)
        self.days = self._days_of_rows()
        self._rows_directions = [self._directions_on(self.minutes.row + above) for above in (0, 1)]
        self._kept: dict[bytes, NDArray[np.float64]] = {}

    def of(self, normal: NDArray[np.float64]) -> NDArray[np.float64]:
        """Seconds summed up to the begin of each cell (rows, CELLS + 1), for a face that looks along `normal`."""
        key = normal.tobytes()
        kept = self._kept.get(key)
        if kept is None:  # two threads may both find it missing, and both find the same
            kept = self._weights(normal)
            if len(self._kept) >= MOST_KEPT:
                self._kept.clear()
            self._kept[key] = kept
        return kept

    def _weights(self, normal: NDArray[np.float64]) -> NDArray[np.float64]:
        front = np.flatnonzero(self.minutes.direction @ normal > GRAZING)
        seconds, row, share = self.minutes.seconds[front], self.minutes.row[front], self.minutes.share[front]
        # A row on which the sun stood behind the face, or below the horizon, at this hour says less
        # than one on which it stood in front.
        valid = [
            (directions[front] @ normal > GRAZING) & (directions[front, 2] > 0) for directions in self._rows_directions
        ]
        above = np.where(valid[0] == valid[1], share, valid[1])
        cell = ((self.minutes.hour_angle[front] * SECONDS_PER_DEGREE + HALF_TURN_S) / CELL_S).astype(np.int64)
        rows = len(self.declinations)
        flat = np.concatenate([row * CELLS + cell, (row + 1) * CELLS + cell])
        weights = np.bincount(flat, np.concatenate([seconds * (1 - above), seconds * above]), minlength=rows * CELLS)
        summed = np.zeros((rows, CELLS + 1))
        np.cumsum(weights.reshape(rows, CELLS), axis=1, out=summed[:, 1:])
        return summed

    def _days_of_rows(self) -> NDArray[np.float64]:
        """How many days of the period each row (rows,) stands for."""
        minutes, rows = self.minutes, self.question.rows()
        row = np.concatenate([minutes.row, minutes.row + 1])
        seconds = np.concatenate([minutes.seconds * (1 - minutes.share), minutes.seconds * minutes.share])
        up = np.array([max(row.set - row.rise, CELL_S) for row in rows])
        return np.bincount(row, seconds, minlength=len(rows)) / up

    def _directions_on(self, row: NDArray[np.int64]) -> NDArray[np.float64]:
        return direction_from(
            self.declinations[row], self.minutes.hour_angle, self.question.latitude, self.question.north_deg
        )


def hours_by_year(weights: YearWeights, receptors: Receptors, answer: dict[str, NDArray]) -> SunHours:
    """Hours of one chunk of receptors.

    Parameters
    ----------
    answer : the question's
    """
    tables = np.stack([weights.of(normal) for normal in receptors.normals])
    possible = tables[:, :, -1]
    spells = _on_used_rows(answer, possible.any(axis=0))
    place = spells.row * (CELLS + 1) + receptors.orientation[spells.receptor] * tables[0].size
    sums = tables.ravel()
    at_begin, at_end = (_read_off(sums, place, at) for at in (spells.begin, spells.end))
    sun_s = at_end - at_begin
    direct = np.bincount(spells.receptor, sun_s, minlength=len(receptors))
    possible_s = possible.sum(axis=1)[receptors.orientation]
    shade_s = np.where(spells.follows, np.roll(at_begin, -1) - at_end, 0.0)
    error = _year_error(spells, sun_s, shade_s, possible[receptors.orientation].T, weights)
    return SunHours(np.minimum(direct, possible_s) / 3600, possible_s / 3600, error / 3600)


@dataclass(frozen=True)
class RowSpells:
    """Spells on the rows that a period uses, in order of row, receptor and time.

    Attributes
    ----------
    row, receptor : (s,) int64
    begin, end : (s,) int64, as they are stored
    follows : (s,) bool, whether the next spell is the same receptor's on the same row
    """

    row: NDArray[np.int64]
    receptor: NDArray[np.int64]
    begin: NDArray[np.int64]
    end: NDArray[np.int64]
    follows: NDArray[np.bool_]


def _on_used_rows(answer: dict[str, NDArray], used: NDArray[np.bool_]) -> RowSpells:
    """The stored spells from the first to the last row that has weight."""
    rows = np.flatnonzero(used)
    first, last = (int(rows[0]), int(rows[-1]) + 1) if len(rows) else (0, 0)
    counts = answer["count"].astype(np.int64)
    before = int(counts[:first].sum())
    counts = counts[first:last]
    run = slice(before, before + int(counts.sum()))
    cell = np.repeat(np.arange(counts.size), counts.ravel())
    row, receptor = np.divmod(cell, counts.shape[1])
    follows = np.append(cell[1:] == cell[:-1], False) if len(cell) else np.zeros(0, dtype=bool)
    return RowSpells(row + first, receptor, answer["begin"][run].astype(np.int64), answer["end"][run].astype(np.int64), follows)


def _year_error(
    spells: RowSpells,
    sun_s: NDArray[np.float64],
    shade_s: NDArray[np.float64],
    possible: NDArray[np.float64],
    weights: YearWeights,
) -> NDArray[np.float64]:
    """How far the hours of each receptor (n,) may be off [s].

    Three independent causes, added as squares. Between two rows the ends of a spell are known to a
    part of a step, for as many days as the row stands for. A spell shorter than the step is met on
    a row with the chance of its length over the step: what is seen of short ones says how much was
    missed. And where edges do not move evenly, the share of sun bends from row to row. The weights
    of the three were set on a dense block, at five densities of rows and samples: see DEVELOPERS.md.

    Parameters
    ----------
    sun_s : (s,) float64, seconds of the period that each spell stands for
    shade_s : (s,) float64, those of the shade between it and the next
    possible : (rows, n) float64, seconds that each row stands for
    """
    n, step_s = possible.shape[1], weights.question.step_s
    ends = np.bincount(spells.receptor, weights.days[spells.row] ** 2, minlength=n)
    ends = step_s**2 * np.maximum(ends, FEWEST_SPELLS * np.max(weights.days) ** 2)
    hidden = np.zeros(n)
    follows = np.flatnonzero(spells.follows)
    gap = spells.begin[follows + 1] - spells.end[follows]
    for which, seconds, length in ((None, sun_s, spells.end - spells.begin), (follows, shade_s, gap)):
        short = np.flatnonzero(length < 2 * step_s / PLACE_S)
        length_s = np.maximum(length[short] * PLACE_S, SHORTEST_S)
        spell = short if which is None else which[short]
        hidden += np.bincount(spells.receptor[spell], seconds[spell] ** 2 * (step_s / length_s), minlength=n)
    used = np.flatnonzero(possible.any(axis=1))
    first, last = (used[0], used[-1] + 1) if len(used) else (0, 0)
    possible = possible[first:last]
    sun = np.bincount((spells.row - first) * n + spells.receptor, sun_s, minlength=possible.size).reshape(possible.shape)
    share = np.divide(sun, possible, out=np.zeros(possible.shape), where=possible > 0)
    bend = share[:-2] - 2 * share[1:-1] + share[2:]
    bend *= np.where((possible[2:] > 0) & (possible[:-2] > 0), possible[1:-1], 0.0)
    bent = np.einsum("rn,rn->n", bend, bend)
    error = np.sqrt(PER_SPELL**2 * ends + HIDDEN**2 * hidden + BENT**2 * bent)
    return np.asarray(np.minimum(error, possible.sum(axis=0)))


def _read_off(sums: NDArray[np.float64], start: NDArray[np.int64], at: NDArray[np.int64]) -> NDArray[np.float64]:
    """The sum up to a stored place on a row whose cells begin at `start`, between cells in proportion."""
    cell, inside = np.divmod(at, PLACES_A_CELL)
    cell = start + np.minimum(cell, CELLS - 1)
    below = sums[cell]
    return below + (sums[cell + 1] - below) * (inside / PLACES_A_CELL)
