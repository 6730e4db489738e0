"""Hours of any period from the year's rows: every minute of it is a weight on the rows beside it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from insol.conventions import GRAZING
from insol.measures.sun_hours import SunHours, joined
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

BLOCK_S = 900.0
"""Width of the blocks of a row in which days are counted [s of hour angle]."""

BLOCKS = int(2 * HALF_TURN_S / BLOCK_S)

PLACES_A_CELL = int(CELL_S / PLACE_S)

MOST_TABLES = 32
"""Orientations whose weights are held beside each other for one chunk: a megabyte each."""

GATHER_S = 120.0
"""Width within which pieces are gathered [s of hour angle]."""

GATHERED_SHARE = 0.002
"""What gathering may put wrong, of the possible sun: the largest seen on a terrain's 12,000 orientations."""

MANY_ORIENTATIONS = 100
"""From so many orientations on, as on domes and terrains, a period's pieces are gathered."""

MOST_KEPT = 64
"""Orientations whose weights are kept at a time: half a megabyte each."""

ENDS, MISSED, JUMPS = 0.4, 1.5, 2.0
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


def gathered(minutes: Minutes) -> Minutes:
    """The pieces of all days that lie between the same rows within GATHER_S of hour angle, taken as one.

    A tenth as many. Facing is then told at their middle: to some minutes at the edge of each one's
    visit, as often too early as too late.
    """
    cell = ((minutes.hour_angle * SECONDS_PER_DEGREE + HALF_TURN_S) / GATHER_S).astype(np.int64)
    _, group = np.unique(minutes.row * (2 * HALF_TURN_S / GATHER_S) + cell, return_inverse=True)
    seconds: NDArray[np.float64] = np.bincount(group, minutes.seconds).astype(np.float64)

    def mean(values: NDArray[Any]) -> NDArray[np.float64]:
        return np.asarray(np.bincount(group, values * minutes.seconds) / seconds, dtype=np.float64)

    direction = np.stack([mean(minutes.direction[:, axis]) for axis in range(3)], axis=1)
    direction /= np.linalg.norm(direction, axis=1, keepdims=True)
    row = np.asarray(np.round(mean(minutes.row)), dtype=np.int64)
    return Minutes(seconds, direction, mean(minutes.hour_angle), row, mean(minutes.share))


class YearWeights:
    """Weights of a period on the cells of the rows, for one orientation after another.

    With `many` orientations the period's pieces are gathered first.
    """

    def __init__(self, question: YearQuestion, intervals: Intervals, track: SunTrack, *, many: bool = False) -> None:
        self.question = question
        self.declinations = np.array([row.declination for row in question.rows()])
        minutes = minutes_of(intervals, track, self.declinations)
        self.gathered = many and len(minutes.seconds) > 0
        self.minutes = gathered(minutes) if self.gathered else minutes
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
        """How many days of the period each row stands for at each time of day, (rows, BLOCKS)."""
        minutes, rows = self.minutes, len(self.declinations)
        block = ((minutes.hour_angle * SECONDS_PER_DEGREE + HALF_TURN_S) / BLOCK_S).astype(np.int64)
        place = np.concatenate([minutes.row * BLOCKS + block, (minutes.row + 1) * BLOCKS + block])
        seconds = np.concatenate([minutes.seconds * (1 - minutes.share), minutes.seconds * minutes.share])
        return np.bincount(place, seconds, minlength=rows * BLOCKS).reshape(rows, BLOCKS) / BLOCK_S

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
    if not len(receptors):
        return SunHours(np.zeros(0), np.zeros(0), np.zeros(0))
    if len(receptors.normals) > MOST_TABLES:
        return _in_halves(weights, receptors, answer)
    tables = np.stack([weights.of(normal) for normal in receptors.normals])
    possible = tables[:, :, -1]
    spells = _on_used_rows(answer, np.asarray(possible.any(axis=0)))
    place = spells.row * np.int32(CELLS + 1) + (receptors.orientation * np.int32(tables[0].size))[spells.receptor]
    sums = tables.ravel()
    at_begin, at_end = (_read_off(sums, place, at) for at in (spells.begin, spells.end))
    sun_s = at_end - at_begin
    shade_s = np.where(spells.follows, np.roll(at_begin, -1) - at_end, 0.0)
    missed, variance = _missed(spells, sun_s, shade_s, weights.question.step_s, len(receptors))
    possible_s = possible.sum(axis=1)[receptors.orientation]
    direct = np.clip(np.bincount(spells.receptor, sun_s, minlength=len(receptors)) + missed, 0.0, possible_s)
    ends = _ends_error(spells, weights, len(receptors))
    jumps = _jumps(answer["count"], spells, sun_s, possible[receptors.orientation].T)
    edges_of_visits = (GATHERED_SHARE * possible_s) ** 2 if weights.gathered else 0.0
    error = np.sqrt(ENDS**2 * ends**2 + MISSED**2 * variance + JUMPS**2 * jumps + edges_of_visits)
    return SunHours(direct / 3600, possible_s / 3600, error / 3600)


def _in_halves(weights: YearWeights, receptors: Receptors, answer: dict[str, NDArray]) -> SunHours:
    """The hours of many orientations, whose weights would not fit beside each other."""
    half = len(receptors) // 2
    counts = answer["count"].astype(np.int64)
    owner = np.repeat(np.tile(np.arange(counts.shape[1]), len(counts)), counts.ravel())
    pieces = []
    for first, last in ((0, half), (half, len(receptors))):
        mine = (owner >= first) & (owner < last)
        part = {"count": answer["count"][:, first:last], "begin": answer["begin"][mine], "end": answer["end"][mine]}
        pieces.append(hours_by_year(weights, receptors.piece(first, last), part))
    return joined(pieces)


@dataclass(frozen=True)
class RowSpells:
    """Spells on the rows that a period uses, in order of row, receptor and time.

    Attributes
    ----------
    row, receptor : (s,) int32
    begin, end : (s,) int32, as they are stored
    follows : (s,) bool, whether the next spell is the same receptor's on the same row
    """

    row: NDArray[np.int32]
    receptor: NDArray[np.int32]
    begin: NDArray[np.int32]
    end: NDArray[np.int32]
    follows: NDArray[np.bool_]


def _on_used_rows(answer: dict[str, NDArray], used: NDArray[np.bool_]) -> RowSpells:
    """The stored spells from the first to the last row that has weight."""
    rows = np.flatnonzero(used)
    first, last = (int(rows[0]), int(rows[-1]) + 1) if len(rows) else (0, 0)
    counts = answer["count"].astype(np.int64)
    before = int(counts[:first].sum())
    counts = counts[first:last]
    run = slice(before, before + int(counts.sum()))
    cell = np.repeat(np.arange(counts.size, dtype=np.int32), counts.ravel())
    row = np.repeat(np.arange(last - first, dtype=np.int32), counts.sum(axis=1))
    receptor = cell - row * np.int32(counts.shape[1])
    follows = np.append(cell[1:] == cell[:-1], False) if len(cell) else np.zeros(0, dtype=bool)
    begin, end = (answer[side][run].astype(np.int32) for side in ("begin", "end"))
    return RowSpells(row + np.int32(first), receptor, begin, end, follows)


def _missed(
    spells: RowSpells, sun_s: NDArray[np.float64], shade_s: NDArray[np.float64], step_s: float, count: int
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Seconds of sun (n,) that the samples missed, and the variance of that.

    A spell shorter than the step is met on a row with the chance p of its length over the step. Each
    that was met stands for 1 / p of its kind (Horvitz and Thompson, 1952): short sun is added, short
    shade taken away.

    Parameters
    ----------
    sun_s, shade_s : (s,) float64, seconds of the period that each spell, and the shade after it, stand for
    """
    follows = np.flatnonzero(spells.follows)
    gap = spells.begin[follows + 1] - spells.end[follows]
    everyone = np.arange(len(sun_s))
    missed, variance = np.zeros(count), np.zeros(count)
    for spell, seconds, length, sign in (
        (everyone, sun_s, spells.end - spells.begin, 1.0), (follows, shade_s[follows], gap, -1.0),
    ):  # fmt: skip
        short = np.flatnonzero(length < step_s / PLACE_S)
        chance = np.maximum(length[short] * PLACE_S, SHORTEST_S) / step_s
        stands_for = seconds[short] / chance
        receptor = spells.receptor[spell[short]]
        missed += sign * np.bincount(receptor, stands_for - seconds[short], minlength=count)
        variance += np.bincount(receptor, stands_for**2 * (1.0 - chance), minlength=count)
    return missed, variance


def _ends_error(spells: RowSpells, weights: YearWeights, count: int) -> NDArray[np.float64]:
    """A step for each spell, for as many days as its row stands for where it ends, added as squares: (n,) [s]."""
    at_begin, at_end = (
        weights.days[spells.row, np.minimum(at * PLACE_S / BLOCK_S, BLOCKS - 1).astype(np.int32)]
        for at in (spells.begin, spells.end)
    )
    squares = np.bincount(spells.receptor, np.maximum(at_begin, at_end) ** 2, minlength=count)
    return weights.question.step_s * np.sqrt(np.maximum(squares, FEWEST_SPELLS * np.max(weights.days) ** 2))


def _jumps(
    counts: NDArray[np.uint8], spells: RowSpells, sun_s: NDArray[np.float64], possible: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Squares (n,) [s²] of how far the sun of neighbouring rows differs where their spells differ in number.

    There something came or went between them, and where is not known.

    Parameters
    ----------
    counts : (rows, n), spells of each receptor on each row
    possible : (rows, n) float64, seconds that each row stands for
    """
    used = np.flatnonzero(possible.any(axis=1))
    first, last = (int(used[0]), int(used[-1]) + 1) if len(used) else (0, 0)
    possible, counts = possible[first:last], counts[first:last]
    flat = (spells.row - np.int32(first)) * np.int32(possible.shape[1]) + spells.receptor
    sun = np.bincount(flat, sun_s, minlength=possible.size).reshape(possible.shape)
    share = np.divide(sun, possible, out=np.zeros(possible.shape), where=possible > 0)
    jump = np.diff(share, axis=0) * np.minimum(possible[1:], possible[:-1])
    jump[counts[1:] == counts[:-1]] = 0.0
    return np.einsum("rn,rn->n", jump, jump)


def _read_off(sums: NDArray[np.float64], start: NDArray[np.int32], at: NDArray[np.int32]) -> NDArray[np.float64]:
    """The sum up to a stored place on a row whose cells begin at `start`, between cells in proportion."""
    place = at * (1.0 / PLACES_A_CELL)
    cell = np.minimum(place.astype(np.int32), CELLS - 1)
    inside = place - cell
    cell += start
    below = sums[cell]
    return below + (sums[cell + 1] - below) * inside
