"""The colours of numbers: one scale for mesh, picture and window, with round limits.

Dark blue for shade to yellow for sun: the reading that needs no legend. The scale is cividis
(Nuñez, Anderton and Renslow, 2018, PLoS ONE 13(7): e0199239): even in lightness, so that it also
prints in grey, and the same to readers with and without a colour-vision deficiency.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Quantity = Literal["direct_h", "shaded_fraction"]

ANCHORS = (
    "00224e", "002e6a", "1a386f", "32436d", "434e6c", "535a6d", "61656f", "6f7073", "7d7c78",
    "8c8878", "9b9476", "aba072", "bcae6c", "cdbb63", "dec958", "f0d846", "fee838",
)  # fmt: skip
"""Cividis at seventeen even steps."""

NO_VALUE = (206, 200, 196)
"""Of faces without a value: a warm light grey that the scale does not hold."""

STEPS = (1.0, 2.0, 4.0, 5.0)
"""Ticks stand at these multiples of powers of ten."""

MOST_TICKS = 7

OVER = 0.04
"""What lies over the last tick by this share of a step takes the last colour: 12.06 h on a scale to 12."""


@dataclass(frozen=True)
class Scale:
    """Limits and ticks of a colour scale, and what it measures."""

    low: float
    high: float
    ticks: tuple[float, ...]
    label: str
    sunny_high: bool = True  # the bright end stands for the high end


def scale_for(quantity: Quantity, values: NDArray[np.float64]) -> Scale:
    """A scale from zero to a round number that holds all values.

    >>> scale_for("direct_h", np.array([0.4, 11.3])).ticks
    (0.0, 2.0, 4.0, 6.0, 8.0, 10.0, 12.0)
    """
    if quantity == "shaded_fraction":
        return Scale(0.0, 1.0, (0.0, 0.25, 0.5, 0.75, 1.0), "shaded fraction", sunny_high=False)
    finite = values[np.isfinite(values)]
    most = max(float(finite.max(initial=0.0)), 1.0)
    step = _round_step(most / (MOST_TICKS - 1 + OVER))
    count = int(np.ceil(most / step - OVER))
    ticks = tuple(float(step * n) for n in range(count + 1))
    return Scale(0.0, ticks[-1], ticks, "hours of direct sun")


def _round_step(least: float) -> float:
    power = 10.0 ** np.floor(np.log10(least))
    for power_ in (power, power * 10):
        for step in STEPS:
            if step * power_ >= least - 1e-9:
                return float(step * power_)
    raise AssertionError("a step is always found")


def colours_of(values: NDArray[np.float64], scale: Scale) -> NDArray[np.uint8]:
    """Colours (n, 3) of values (n,); NO_VALUE for NaN."""
    share = np.clip((values - scale.low) / (scale.high - scale.low), 0.0, 1.0)
    share = np.where(np.isnan(values), 0.0, share if scale.sunny_high else 1.0 - share)
    anchors = np.array([[int(code[k : k + 2], 16) for k in (0, 2, 4)] for code in ANCHORS], dtype=np.float64)
    place = share * (len(anchors) - 1)
    colours = np.column_stack([np.interp(place, np.arange(len(anchors)), anchors[:, k]) for k in range(3)])
    colours[np.isnan(values)] = NO_VALUE
    return np.round(colours).astype(np.uint8)
