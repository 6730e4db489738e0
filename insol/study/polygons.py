"""Whether a list of corners is a polygon: pure geometry of its sides, before any mesh is read."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

Corner = tuple[float, float]

MOST_CORNERS = 5_000
"""Every side is held against every other one."""


def fault_of(corners: Sequence[Corner]) -> str:
    """What keeps the corners from bounding an area, in plain words; "" when nothing does."""
    if len(corners) < 3:
        return f"has {len(corners)} corners, and a polygon needs three"
    if len(corners) > MOST_CORNERS:
        return f"has {len(corners)} corners, and the most that are taken are {MOST_CORNERS}"
    for index, corner in enumerate(corners):
        if corner == corners[index - 1]:
            return f"has the corner {_written(corner)} twice in a row"
    crossing = first_crossing(corners)
    if crossing is not None:
        return "crosses or touches itself: " + " and ".join(_side(corners, side) for side in crossing)
    return ""


def first_crossing(corners: Sequence[Corner]) -> tuple[int, int] | None:
    """Two sides that meet elsewhere than at the corner they share; side i begins at corner i, from 0.

    Coordinates are taken relative to the first corner, so that a national grid costs no digits.
    """
    import numpy as np

    begin = np.array(corners, dtype=np.float64) - np.array(corners[0])
    end = np.roll(begin, -1, axis=0)
    count = len(begin)
    for side in range(count - 1):
        a, b, c, d = begin[side], end[side], begin[side + 1 :], end[side + 1 :]
        apart = (np.maximum(c, d) < np.minimum(a, b)).any(axis=1) | (np.minimum(c, d) > np.maximum(a, b)).any(axis=1)
        c_side, d_side = _turn(a, b, c), _turn(a, b, d)
        a_side, b_side = _turn(c, d, a), _turn(c, d, b)
        meets = ~apart & (c_side * d_side <= 0) & (a_side * b_side <= 0)
        # A side meets the next one, and the last one the first, at their common corner: they
        # cross only where one folds back over the other.
        meets[0] &= (d_side[0] == 0) & (np.dot(b - a, d[0] - c[0]) < 0)
        if side == 0:
            meets[-1] &= (c_side[-1] == 0) & (np.dot(b - a, d[-1] - c[-1]) < 0)
        if meets.any():
            return side, side + 1 + int(np.argmax(meets))
    return None


def _turn(a: NDArray[np.float64], b: NDArray[np.float64], c: NDArray[np.float64]) -> NDArray[np.float64]:
    """Sign of the turn from a over b to c."""
    import numpy as np

    ab, ac = b - a, c - a
    return np.sign(ab[..., 0] * ac[..., 1] - ab[..., 1] * ac[..., 0])


def _side(corners: Sequence[Corner], side: int) -> str:
    return f"side {side + 1} from {_written(corners[side])} to {_written(corners[(side + 1) % len(corners)])}"


def _written(corner: Corner) -> str:
    return "[" + ", ".join(f"{value:.12g}" for value in corner) + "]"
