"""For how much of each interval the sun is in front of a surface: exact, whatever the step."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from insol.conventions import GRAZING
from insol.sun.position import SunTrack

PIECES = 4
"""An interval is taken in so many pieces, in each of which the cosine of incidence is a straight line.
For an interval of an hour that places the moment of grazing to within some seconds."""

ORIENTATIONS_AT_ONCE = 128


def facing_seconds(
    normals: NDArray[np.float64], start: NDArray[np.float64], end: NDArray[np.float64], track: SunTrack
) -> NDArray[np.float64]:
    """How long the sun is in front of each orientation within each interval.

    Parameters
    ----------
    normals : (k, 3) float64, unit
    start, end : (m,) float64, unix seconds

    Returns
    -------
    (k, m) float64 [s]
    """
    shares = np.linspace(0.0, 1.0, PIECES + 1)
    instants = start[:, None] + (end - start)[:, None] * shares
    directions = track.directions(instants.ravel())
    facing = np.empty((len(normals), len(start)))
    for first in range(0, len(normals), ORIENTATIONS_AT_ONCE):
        part = slice(first, first + ORIENTATIONS_AT_ONCE)
        cosines = (normals[part] @ directions.T).reshape(-1, len(start), PIECES + 1) - GRAZING
        facing[part] = _share_above_zero(cosines[..., :-1], cosines[..., 1:]).mean(axis=2)
    return facing * (end - start)


def _share_above_zero(a: NDArray[np.float64], b: NDArray[np.float64]) -> NDArray[np.float64]:
    """The share of the straight line from a to b that lies above zero."""
    above = np.maximum(a, 0.0) + np.maximum(b, 0.0)
    length = np.abs(a) + np.abs(b)
    return np.divide(above, length, out=np.zeros_like(a), where=length > 0)


def lent(
    seconds: NDArray[np.float64], front: NDArray[np.bool_], follows: NDArray[np.bool_]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Give what lies in intervals whose middle is behind the face to the neighbour that was cast.

    Parameters
    ----------
    seconds, front : (k, m) facing seconds, and whether the interval's middle is in front
    follows : (m - 1,) bool, whether interval j + 1 begins where j ends

    Returns
    -------
    seconds : (k, m), zero wherever `front` is False
    lost : (k,) [s], what had no neighbour in front: a few minutes beside the horizon
    """
    cut = np.where(front, 0.0, seconds)
    given = np.where(front, seconds, 0.0)
    to_next = np.zeros_like(cut, dtype=bool)
    to_next[:, :-1] = (cut[:, :-1] > 0) & front[:, 1:] & follows
    to_before = np.zeros_like(to_next)
    to_before[:, 1:] = (cut[:, 1:] > 0) & front[:, :-1] & follows
    to_before &= ~to_next
    given[:, 1:] += np.where(to_next, cut, 0.0)[:, :-1]
    given[:, :-1] += np.where(to_before, cut, 0.0)[:, 1:]
    return given, np.where(to_next | to_before, 0.0, cut).sum(axis=1)
