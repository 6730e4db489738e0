"""Named points, such as window centres: where each is, which way it looks."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.checks import read_only


@dataclass(frozen=True)
class NamedPoints:
    """Points as a table gives them.

    Attributes
    ----------
    names : unique
    positions : (n, 3) float64 [m], in the model's frame
    azimuth_deg : (n,) float64, true azimuth of the outward normal [deg]
    tilt_deg : (n,) float64, 0 faces up, 90 is vertical [deg]
    """

    names: tuple[str, ...]
    positions: NDArray[np.float64]
    azimuth_deg: NDArray[np.float64]
    tilt_deg: NDArray[np.float64]

    def __post_init__(self) -> None:
        n = len(self.names)
        for name, shape in (("positions", (n, 3)), ("azimuth_deg", (n,)), ("tilt_deg", (n,))):
            object.__setattr__(self, name, read_only(getattr(self, name), np.float64, shape, name))
