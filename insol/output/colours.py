"""The colours of numbers: one scale for mesh, picture and window, with round limits.

Dark blue for shade to yellow for sun: the reading that needs no legend. The scale is cividis
(Nuñez, Anderton and Renslow, 2018, PLoS ONE 13(7): e0199239): even in lightness, so that it also
prints in grey, and the same to readers with and without a colour-vision deficiency. It belongs to
no one's program. Hours and shaded fraction run along it in opposite directions: dark is shade in
both, so that a street does not turn from light to dark when the quantity is changed.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Quantity = Literal["direct_h", "shaded_fraction"]

ANCHORS = (
    (0, "00224e"), (19, "00306f"), (21, "003170"), (23, "013271"), (28, "123570"), (34, "1e3a6f"),
    (52, "36466c"), (84, "565c6d"), (126, "7b7a78"), (147, "8f8a78"), (179, "aea371"), (205, "c9b965"),
    (219, "d9c55c"), (232, "e7d150"), (243, "f3db42"), (251, "fde334"), (255, "fee838"),
)  # fmt: skip
"""Rows of cividis's published table of 256; straight lines between them keep within two steps of 255 of it."""

NO_VALUE = (226, 210, 214)
"""Of faces without a value: a pale rose that neither the scale nor the surroundings hold."""

NO_VALUE_STRIPE = (158, 128, 136)
"""Of the hatching over them where lines can be drawn: told apart without colour, too."""

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
    rows = [row for row, _ in ANCHORS]
    channels = np.array([tuple(bytes.fromhex(code)) for _, code in ANCHORS], dtype=np.float64).T
    colours = np.column_stack([np.interp(255 * share, rows, channel) for channel in channels])
    colours[np.isnan(values)] = NO_VALUE
    return np.round(colours).astype(np.uint8)
