"""What a run found: faces, hours, spells, and what is needed to say how."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from insol.faces.model import Faces
from insol.measures.by_days import Spells
from insol.measures.sun_hours import SunHours
from insol.output.tables import faces_table, parts_table
from insol.scene.model import Scene
from insol.study.description import Period, Study
from insol.sun.position import SunTrack
from insol.visibility.answering import Tally
from insol.visibility.plan import PeriodPlan

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class PeriodResult:
    """One period over all faces; NaN where a face was not measured."""

    plan: PeriodPlan
    hours: SunHours
    spells: Spells | None  # of faces (`receptor` is a face's index); None where edges were not refined

    @property
    def period(self) -> Period:
        return self.plan.period

    @property
    def name(self) -> str:
        return self.plan.period.name

    @property
    def direct_h(self) -> NDArray[np.float64]:
        """Hours of direct sun, (n,)."""
        return self.hours.direct_h

    @property
    def possible_h(self) -> NDArray[np.float64]:
        """Hours with the sun up and in front of the face, (n,)."""
        return self.hours.possible_h

    @property
    def shaded_fraction(self) -> NDArray[np.float64]:
        """1 - direct / possible, (n,)."""
        return self.hours.shaded_fraction

    @property
    def error_h(self) -> NDArray[np.float64]:
        """How far `direct_h` may be off for the step's sake, (n,)."""
        return self.hours.error_h


@dataclass(frozen=True)
class Results:
    """Everything a run found, in memory."""

    study: Study
    scene: Scene
    faces: Faces
    track: SunTrack
    periods: tuple[PeriodResult, ...]
    engine: str
    warnings: tuple[str, ...]
    tally: Tally
    seconds: dict[str, float]  # by stage

    def table(self) -> pd.DataFrame:
        """One row a face, with the columns of faces.csv."""
        return faces_table(self.scene, self.faces, self._hours(), self.study.site.north_deg)

    def parts(self) -> pd.DataFrame:
        """One row a measure, part and period, with the columns of parts.csv."""
        days = {result.name: result.plan.day_count for result in self.periods}
        return parts_table(self.scene, self.faces, self._hours(), days, self.study.hours_per_day)

    def _hours(self) -> dict[str, SunHours]:
        return {result.name: result.hours for result in self.periods}
