"""Frame, units and tolerances: said once, here, with their reasons.

frame     the model's own x and y, z up, metres, right-handed, for every input after reading and
          for every output. The sun is turned into this frame by the bearing of the model's +y
          axis (`north_deg`), never the model into the sun's.
origin    a local origin is subtracted in float64 before anything becomes float32, and added back
          in every output.
azimuth   degrees clockwise from true north; of a surface: of its outward normal.
altitude  degrees above the horizon. Tilt of a surface: 0 faces up, 90 is vertical, 180 faces down.
angles    degrees at the surface (files, command line, tables), radians only inside a formula.
time      UTC inside, as whole unix seconds where arrays hold it. Local clock, standard time or
          true solar time on the surface, always said which.
interval  stands for its midpoint; the first and last of a day are cut at sunrise and sunset, so
          that the weights of a day add up to its length.
sun up    the centre of the disc above the astronomical horizon, without refraction.
face      a piece of a measured surface no larger than the spacing asked for.
part      a named piece of a model: what a person calls a building, a storey, a panel, a window.
"""

from __future__ import annotations

import numpy as np

METRES_PER_UNIT = {"mm": 0.001, "cm": 0.01, "m": 1.0, "in": 0.0254, "ft": 0.3048}
"""International inch and foot; lengths of a model's unit in metres."""

STAND_OFF_M = 1e-3
"""How far a ray begins before its face [m]. 1 mm: ten times what float32 needs within a kilometre
of the local origin, and smaller than any gap between buildings that matters."""

STAND_OFF_ULPS = 8.0
"""In a very wide scene the stand-off grows to this many float32 steps of the largest coordinate."""

PLANAR_M = 1e-3
"""Vertices within this distance of a plane lie in it [m]: a modelling tool's rounding, not a form."""

WELD_M = 1e-5
"""Vertices closer than this are one [m]: text files round to 1e-3 or finer, binary ones to float32."""

DEGENERATE_M2 = 1e-8
"""A triangle smaller than this has no direction to face [m²]."""

EDGE_SECONDS = 1.0
"""Begin and end of a spell of sun are found to this width [s]. The sun moves 15 arc seconds in it."""

GRAZING = 1e-9
"""Cosine of incidence below which the sun is not in front of a face: rounding, not light."""


def stand_off(extent_m: float, asked_m: float = STAND_OFF_M) -> float:
    """The stand-off that float32 can hold in a scene whose coordinates reach `extent_m` [m].

    >>> stand_off(500.0)
    0.001
    """
    step = float(np.finfo(np.float32).eps) * extent_m
    return max(asked_m, STAND_OFF_ULPS * step)


def azimuth_tilt(normals: np.ndarray, north_deg: float) -> tuple[np.ndarray, np.ndarray]:
    """True azimuth and tilt of surfaces from their unit normals in the model's frame.

    Parameters
    ----------
    normals : (n, 3) float
    north_deg : bearing of the model's +y axis, clockwise from true north [deg]

    Returns
    -------
    azimuth : (n,) float, [0, 360) [deg]; NaN for level surfaces, which face nowhere
    tilt : (n,) float, [0, 180] [deg]
    """
    level = np.hypot(normals[:, 0], normals[:, 1]) < 1e-9
    azimuth = np.degrees(np.arctan2(normals[:, 0], normals[:, 1])) + north_deg
    tilt = np.degrees(np.arccos(np.clip(normals[:, 2], -1.0, 1.0)))
    return np.where(level, np.nan, azimuth % 360.0), tilt


def normals_from(azimuth_deg: np.ndarray, tilt_deg: np.ndarray, north_deg: float) -> np.ndarray:
    """Unit normals (n, 3) in the model's frame from true azimuth and tilt [deg]."""
    turned = np.radians(np.asarray(azimuth_deg, dtype=float) - north_deg)
    tilt = np.radians(np.asarray(tilt_deg, dtype=float))
    return np.stack([np.sin(tilt) * np.sin(turned), np.sin(tilt) * np.cos(turned), np.cos(tilt)], axis=-1)
