"""A day asked for its spells of open sky: sampled at a step, then every edge found to a second.

The answer does not depend on a period's clock, window or low-sun limit: those only cut the spells.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.casting.contract import Caster
from insol.conventions import EDGE_SECONDS
from insol.sun.position import SunTrack
from insol.visibility.asking import CheckStop
from insol.visibility.receptors import Receptors
from insol.visibility.tracing import samples_between, spells_of, trace


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
        return (self.set - self.rise) / self.step_s / 2 + 2 + 3 * float(np.log2(max(self.step_s, 2.0)))

    def directions(self, at: NDArray[np.float64]) -> NDArray[np.float64]:
        """Unit vectors (m, 3) towards the sun at unix seconds (m,)."""
        return self.track.directions(at)

    def samples(self) -> NDArray[np.float64]:
        """The instants (m,) at which every receptor is asked, unix seconds."""
        return samples_between(self.rise, self.set, self.step_s)

    def answer(self, caster: Caster, receptors: Receptors, check_stop: CheckStop) -> dict[str, NDArray]:
        """Spells of open sky in order of receptor and time.

        Returns
        -------
        `receptor` (s,) int32, `begin` and `end` (s,) float64 in unix seconds
        """
        traced = trace(caster, receptors, self, self.samples(), EDGE_SECONDS, check_stop)
        receptor, begin, end = spells_of(traced)
        return {"receptor": receptor.astype(np.int32), "begin": begin, "end": end}
