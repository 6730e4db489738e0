"""A period's hours from the stored answers of its questions, chunk by chunk."""

from __future__ import annotations

import numpy as np

from insol.measures.by_days import Spells, added, hours_by_day, spans_of
from insol.measures.by_steps import hours_by_steps
from insol.measures.sun_hours import SunHours, joined
from insol.visibility.answering import chunk_size, chunks_of
from insol.visibility.days import DayQuestion
from insol.visibility.plan import PeriodPlan
from insol.visibility.receptors import Receptors
from insol.visibility.steps import StepsQuestion
from insol.visibility.store import Store


def hours_of(plan: PeriodPlan, receptors: Receptors, store: Store) -> tuple[SunHours, Spells | None]:
    """The hours of every receptor in a period; its spells of sun where the edges are known.

    The store holds the answers of the plan's questions for every chunk. Nothing is cast.
    """
    measure = _by_days if plan.sampling == "days" else _by_steps
    pieces = [
        (run.start, *measure(plan, receptors.piece(run.start, run.stop), store, number))
        for number, run in chunks_of(len(receptors), chunk_size(len(receptors)))
    ]
    hours = joined([hours for _, hours, _ in pieces])
    spells = [(first, found) for first, _, found in pieces if found is not None]
    if plan.sampling != "days":
        return hours, None
    return hours, Spells(
        receptor=np.concatenate([found.receptor + first for first, found in spells]),
        begin=np.concatenate([found.begin for _, found in spells]),
        end=np.concatenate([found.end for _, found in spells]),
    )


def _by_steps(plan: PeriodPlan, receptors: Receptors, store: Store, chunk: int) -> tuple[SunHours, None]:
    (question,) = plan.questions
    assert isinstance(question, StepsQuestion)
    packed = store.read(question.name, chunk)["open"]
    return hours_by_steps(question, plan.intervals, receptors, packed), None


def _by_days(plan: PeriodPlan, receptors: Receptors, store: Store, chunk: int) -> tuple[SunHours, Spells]:
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
