"""How many faces a measure may make."""

from __future__ import annotations

import math

import numpy as np

from insol.errors import MeasureError
from insol.faces.grouping import Floats

MOST_FACES = 20_000_000
"""More faces than this fill the memory of an ordinary machine before a ray is cast."""

MOST_CELLS = 10 * MOST_FACES
"""Cells laid out over the boxes around outlines; a long slanting outline leaves most of them empty."""

COMFORTABLE = 1_000_000
"""A count that any machine can work with, which the message offers."""


def check_spacing(name: str, spacing_m: float, *, zero_allowed: bool = False) -> None:
    """Refuse a spacing that is no length.

    Raises
    ------
    MeasureError
        It is not a finite number above 0.
    """
    if math.isfinite(spacing_m) and (spacing_m > 0.0 or (zero_allowed and spacing_m == 0.0)):
        return
    where = f'measure "{name}", key spacing_m'
    raise MeasureError(f"{spacing_m:g} m is no spacing; allowed: a length above 0", where=where)


def refuse_too_many(name: str, spacing_m: float, *, areas: Floats, extents: Floats) -> None:
    """Refuse a spacing that would cut surfaces into too many faces, before any is made.

    Parameters
    ----------
    areas : (s,) of the surfaces, twice what it is where both sides are measured [m²]
    extents : (s, 2) of the boxes around them [m]

    Raises
    ------
    MeasureError
        It says how many there would be, and what spacing gives a comfortable number.
    """
    if not len(areas) or spacing_m == 0.0:
        return
    faces = float(np.maximum(areas / spacing_m / spacing_m, 1.0).sum())
    cells = float(np.maximum(extents / spacing_m, 1.0).prod(axis=1).sum())
    if faces <= MOST_FACES and cells <= MOST_CELLS:
        return
    many = max(faces, cells * MOST_FACES / MOST_CELLS)
    better = rounded_up(spacing_m * math.sqrt(many / COMFORTABLE))
    raise MeasureError(
        f"a spacing of {spacing_m:g} m makes about {faces:,.0f} faces; the most is {MOST_FACES:,}",
        where=f'measure "{name}", key spacing_m',
        hint=f"spacing_m = {better:g} makes about {COMFORTABLE:,}",
    )


def rounded_up(value: float) -> float:
    """A length to two digits, not below the value.

    >>> rounded_up(0.1234)
    0.13
    """
    digits = 1 - math.floor(math.log10(value))
    return round(math.ceil(value * 10.0**digits - 1e-9) / 10.0**digits, max(digits, 0))
