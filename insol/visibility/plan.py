"""Which questions answer which periods: days to the second for short ones, other ways for long ones."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date
from typing import Literal

import numpy as np

from insol.conventions import EDGE_SECONDS
from insol.study.description import Period, Site
from insol.sun.position import SunTrack
from insol.sun.times import Intervals, intervals_of
from insol.visibility.answering import Question
from insol.visibility.days import DayQuestion
from insol.visibility.steps import StepsQuestion
from insol.visibility.year import YearQuestion

Sampling = Literal["days", "steps", "rows"]

SHORT_DAYS = 7
"""Up to so many days are asked day by day, with every edge refined; more of them along the year's rows."""


@dataclass(frozen=True)
class PeriodPlan:
    """How one period is answered.

    Attributes
    ----------
    intervals : the period's own, cut by its window and low-sun limit
    sampling : "days", every edge refined to a second; "rows", the year's; "steps", the middle of every interval
    questions : one for each day, or one for all
    """

    period: Period
    intervals: Intervals
    sampling: Sampling
    questions: tuple[Question, ...]

    @property
    def day_count(self) -> int:
        """How many days the period names, with sun or without."""
        return len(self.intervals.resolved_days)


def plan_of(period: Period, site: Site, track: SunTrack) -> PeriodPlan:
    """Choose the way to answer a period, unless it names one.

    Raises
    ------
    PeriodError
        The sun is not up in it.
    """
    intervals = intervals_of(period, site, track)
    short = len(intervals.resolved_days) <= SHORT_DAYS
    sampling = ("days" if short else "rows") if period.sampling == "auto" else period.sampling
    questions: list[Question]
    if sampling == "days":
        questions = list(day_questions(period, site, track))
    elif sampling == "rows":
        questions = [YearQuestion(site.latitude, site.north_deg)]
    else:
        questions = [StepsQuestion(intervals.middle, track)]
    return PeriodPlan(period, intervals, sampling, tuple(questions))


def distinct(plans: Sequence[PeriodPlan]) -> list[Question]:
    """Every question once, though several periods may need it."""
    return list({question.name: question for plan in plans for question in plan.questions}.values())


def day_questions(period: Period, site: Site, track: SunTrack) -> list[DayQuestion]:
    """A question for every unbroken span of sun-up on every day of the period.

    The whole of the day is asked, whatever the period's window and low-sun limit, so that another
    window or limit finds its answer stored.
    """
    whole = intervals_of(replace(period, start=None, end=None, lowest_altitude_deg=0.0), site, track)
    breaks = np.flatnonzero((whole.start[1:] > whole.end[:-1] + EDGE_SECONDS) | (np.diff(whole.day) != 0)) + 1
    firsts = np.concatenate([[0], breaks])
    lasts = np.concatenate([breaks - 1, [len(whole.end) - 1]])
    # Whole seconds, so that the question's name does not hang on the last bits of a root.
    return [
        DayQuestion(
            label=date.fromordinal(int(whole.day[first])).isoformat(),
            rise=float(np.round(whole.start[first])),
            set=float(np.round(whole.end[last])),
            step_s=period.step_min * 60.0,
            track=track,
        )
        for first, last in zip(firsts, lasts, strict=True)
    ]
