"""Hours of any period from the year's rows: every minute of it is a weight on the rows beside it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.conventions import GRAZING
from insol.measures.sun_hours import SunHours
from insol.sun.position import SunTrack, direction_from
from insol.sun.times import Intervals
from insol.visibility.lattice import HALF_TURN_S, SECONDS_PER_DEGREE
from insol.visibility.receptors import Receptors
from insol.visibility.year import YearQuestion

PIECE_S = 60.0
"""A period is taken in pieces no longer than this."""

CELL_S = 60.0
"""Width of a row's cells [s of hour angle]: a quarter of a degree."""

CELLS = int(2 * HALF_TURN_S / CELL_S)

MOST_KEPT = 64
"""Orientations whose weights are kept at a time: half a megabyte each."""

HIDDEN, BENT, UNSEEN = 1.4, 0.1, 0.0005
"""Weights of the three causes of error: the first two of their own estimates, the last of the possible sun."""

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
        self._rows_directions = [self._directions_on(self.minutes.row + above) for above in (0, 1)]
        self._kept: dict[bytes, NDArray[np.float64]] = {}

    def of(self, normal: NDArray[np.float64]) -> NDArray[np.float64]:
        """Seconds summed up to the begin of each cell (rows, CELLS + 1), for a face that looks along `normal`."""
        key = normal.tobytes()
        if key not in self._kept:
            if len(self._kept) >= MOST_KEPT:
                self._kept.clear()
            self._kept[key] = self._weights(normal)
        return self._kept[key]

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

    def _directions_on(self, row: NDArray[np.int64]) -> NDArray[np.float64]:
        return direction_from(
            self.declinations[row], self.minutes.hour_angle, self.question.latitude, self.question.north_deg
        )


def hours_by_year(weights: YearWeights, receptors: Receptors, answer: dict[str, NDArray]) -> SunHours:
    """Hours of one chunk of receptors.

    Parameters
    ----------
    answer : the question's, in order of row, receptor and time
    """
    spells = _weighed(weights, receptors, answer)
    direct = np.bincount(spells.receptor, spells.sun_s, minlength=len(receptors))
    possible_s = spells.possible_s.sum(axis=1)[receptors.orientation]
    error = year_error(spells, receptors, weights.question.step_s)
    return SunHours(np.minimum(direct, possible_s) / 3600, possible_s / 3600, error / 3600)


@dataclass(frozen=True)
class Weighed:
    """The spells on all rows, and what a period makes of them.

    Attributes
    ----------
    receptor, row : (s,) int64
    sun_s : (s,) float64, seconds of the period that the spell stands for
    shade_s : (s,) float64, those of the shade between it and the next on its row
    length_s, gap_s : (s,) float64, how long both are on the row [s of hour angle]; gap 0 where none follows
    possible_s : (k, rows) float64, seconds that a row stands for, by orientation
    """

    receptor: NDArray[np.int64]
    row: NDArray[np.int64]
    sun_s: NDArray[np.float64]
    shade_s: NDArray[np.float64]
    length_s: NDArray[np.float64]
    gap_s: NDArray[np.float64]
    possible_s: NDArray[np.float64]


def _weighed(weights: YearWeights, receptors: Receptors, answer: dict[str, NDArray]) -> Weighed:
    receptor, row = answer["receptor"].astype(np.int64), answer["row"].astype(np.int64)
    begin, end = (answer[side].astype(np.float64) for side in ("begin", "end"))
    orientation = receptors.orientation[receptor]
    follows = np.zeros(len(receptor), dtype=bool)
    follows[:-1] = (receptor[1:] == receptor[:-1]) & (row[1:] == row[:-1])
    next_begin = np.where(follows, np.roll(begin, -1), end)
    sun, shade = np.zeros(len(receptor)), np.zeros(len(receptor))
    possible = np.zeros((len(receptors.normals), len(weights.declinations)))
    for number, normal in enumerate(receptors.normals):
        summed = weights.of(normal)
        possible[number] = summed[:, -1]
        mine = np.flatnonzero(orientation == number)
        at_begin, at_end, at_next = (_read_off(summed, row[mine], at[mine]) for at in (begin, end, next_begin))
        sun[mine], shade[mine] = at_end - at_begin, at_next - at_end
    return Weighed(receptor, row, sun, shade, end - begin, next_begin - end, possible)


def year_error(spells: Weighed, receptors: Receptors, step_s: float) -> NDArray[np.float64]:
    """How far the hours of each receptor (n,) may be off [s].

    Three independent causes, added as squares. A spell shorter than the step is met on a row with
    the chance of its length over the step: what is seen of short ones says how much was missed.
    Between rows, edges that do not move evenly bend the share of sun from row to row. And a little
    that no face shows of itself. The weights were set on random scenes, see DEVELOPERS.md.
    """
    n = len(receptors)
    hidden = np.zeros(n)
    for seconds, length in ((spells.sun_s, spells.length_s), (spells.shade_s, spells.gap_s)):
        short = np.flatnonzero((length < 2 * step_s) & (length > 0))
        variance = seconds[short] ** 2 * step_s / np.maximum(length[short], SHORTEST_S)
        hidden += np.bincount(spells.receptor[short], variance, minlength=n)
    rows = spells.possible_s.shape[1]
    sun = np.bincount(spells.row * n + spells.receptor, spells.sun_s, minlength=rows * n).reshape(rows, n)
    possible = spells.possible_s[receptors.orientation].T
    share = np.divide(sun, possible, out=np.zeros(sun.shape), where=possible > 0)
    bend = np.zeros_like(share)
    bend[1:-1] = np.where((possible[2:] > 0) & (possible[:-2] > 0), share[:-2] - 2 * share[1:-1] + share[2:], 0.0)
    bent = ((possible * bend) ** 2).sum(axis=0)
    unseen = (UNSEEN * possible.sum(axis=0)) ** 2
    return np.asarray(np.sqrt(HIDDEN**2 * hidden + BENT**2 * bent + unseen))


def _read_off(summed: NDArray[np.float64], row: NDArray[np.int64], at: NDArray[np.float64]) -> NDArray[np.float64]:
    """The sum up to a place on a row [s of hour angle], between its cells in proportion."""
    place = (at + HALF_TURN_S) / CELL_S
    cell = np.minimum(place.astype(np.int64), CELLS - 1)
    below = summed[row, cell]
    return below + (place - cell) * (summed[row, cell + 1] - below)
