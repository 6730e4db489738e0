"""A period's hours from the stored answers of its questions, chunk by chunk."""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from typing import TypeVar

import numpy as np

from insol.measures.by_days import Spells, added, hours_by_day, spans_of
from insol.measures.by_steps import hours_by_steps
from insol.measures.by_year import MANY_ORIENTATIONS, YearWeights, hours_by_year
from insol.measures.sun_hours import SunHours, joined
from insol.sun.position import SunTrack
from insol.visibility.answering import chunk_size, chunks_of, usable_cores
from insol.visibility.days import DayQuestion
from insol.visibility.plan import PeriodPlan
from insol.visibility.receptors import Receptors
from insol.visibility.steps import StepsQuestion
from insol.visibility.store import Store
from insol.visibility.year import YearQuestion

T = TypeVar("T")

Chunk = tuple[int, int, Receptors]
"""Number, first receptor, receptors."""


def hours_of(plan: PeriodPlan, receptors: Receptors, store: Store, track: SunTrack) -> tuple[SunHours, Spells | None]:
    """The hours of every receptor in a period; its spells of sun where the edges are known.

    The store holds the answers of the plan's questions for every chunk. Nothing is cast.
    """
    chunks = [
        (number, run.start, receptors.piece(run.start, run.stop))
        for number, run in chunks_of(len(receptors), chunk_size(len(receptors)))
    ]
    if plan.sampling == "days":
        return _by_days(plan, chunks, store)
    if plan.sampling == "rows":
        return _by_rows(plan, chunks, store, track), None
    return _by_steps(plan, chunks, store), None


def _by_rows(plan: PeriodPlan, chunks: list[Chunk], store: Store, track: SunTrack) -> SunHours:
    (question,) = plan.questions
    assert isinstance(question, YearQuestion)
    orientations = len(np.unique(np.concatenate([piece.normals for _, _, piece in chunks]), axis=0))
    weights = YearWeights(question, plan.intervals, track, many=orientations > MANY_ORIENTATIONS)
    return joined(
        on_all_cores(lambda chunk: hours_by_year(weights, chunk[2], store.read(question.name, chunk[0])), chunks)
    )


def _by_steps(plan: PeriodPlan, chunks: list[Chunk], store: Store) -> SunHours:
    (question,) = plan.questions
    assert isinstance(question, StepsQuestion)
    return joined(
        on_all_cores(
            lambda chunk: hours_by_steps(
                question, plan.intervals, chunk[2], store.read(question.name, chunk[0])["open"]
            ),
            chunks,
        )
    )


def _by_days(plan: PeriodPlan, chunks: list[Chunk], store: Store) -> tuple[SunHours, Spells]:
    pieces = on_all_cores(lambda chunk: _days_of_chunk(plan, chunk[2], store, chunk[0]), chunks)
    spells = Spells(
        receptor=np.concatenate(
            [found.receptor + first for (_, found), (_, first, _) in zip(pieces, chunks, strict=True)]
        ),
        begin=np.concatenate([found.begin for _, found in pieces]),
        end=np.concatenate([found.end for _, found in pieces]),
    )
    return joined([hours for hours, _ in pieces]), spells


def on_all_cores(work: Callable[[Chunk], T], chunks: list[Chunk]) -> list[T]:
    """The work done on every chunk, in their order; numpy lets go of the interpreter for most of it."""
    with ThreadPoolExecutor(usable_cores()) as pool:
        return list(pool.map(work, chunks))


def _days_of_chunk(plan: PeriodPlan, receptors: Receptors, store: Store, chunk: int) -> tuple[SunHours, Spells]:
    spans = spans_of(plan.intervals)
    hours, spells = [], []
    for question in plan.questions:
        assert isinstance(question, DayQuestion)
        stored = store.read(question.name, chunk)
        whole = Spells(stored["receptor"], stored["begin"], stored["end"])
        on_day = spans[(spans[:, 1] > question.rise) & (spans[:, 0] < question.set)]
        day_hours, day_spells = hours_by_day(question, on_day, receptors, whole)
        hours.append(day_hours)
        spells.append(day_spells)
    receptor = np.concatenate([day.receptor for day in spells])
    begin = np.concatenate([day.begin for day in spells])
    order = np.lexsort((begin, receptor))
    end = np.concatenate([day.end for day in spells])
    return added(hours), Spells(receptor[order], begin[order], end[order])
