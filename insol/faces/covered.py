"""Covered faces: those that lie against or inside another body, so that no light can reach them.

Two things must hold in every direction that is looked in: the sky is not to be seen, and the way there
leads out of a body. A face that is merely shaded sees the sky somewhere, or the outsides of what shades it.
"""

from __future__ import annotations

import numpy as np

from insol.casting.contract import Caster
from insol.conventions import stand_off
from insol.faces.crossings import Crossings
from insol.faces.grouping import Flags, Floats
from insol.scene.model import Scene, triangle_corners

AZIMUTHS_DEG, ALTITUDE_DEG = (17.3, 77.3, 137.3, 197.3, 257.3, 317.3), 38.1
STEEP_DEG = (131.7, 82.9)
"""Directions looked in, in the model's frame: one steep, six around. Their angles are odd, so that rays from
the middle of one wall miss the corners and the middle lines of others."""

IN_FRONT = 0.1
"""Cosine of the incidence from which a direction is in front of a face."""

FEWEST_RISING = 2
"""Light comes from above, so only rising directions tell. A face that has fewer of them in front of it looks
down on what it lies on, and is asked about falling ones."""


def covered(points: Floats, normals: Floats, scene: Scene, caster: Caster) -> Flags:
    """Whether each face (n,), by its point (n, 3) and normal (n, 3), is covered."""
    reach = max(scene.extent_m, float(np.abs(points).max(initial=0.0)))
    origins = points + normals * stand_off(reach)
    directions = directions_looked_in()
    asked = questions(normals, directions)
    suspect: Flags = np.array(asked.any(axis=1))
    for direction, ask in zip(directions, asked.T, strict=True):
        index = np.flatnonzero(suspect & ask)
        if len(index):
            suspect[index] &= caster.blocked(origins[index].astype(np.float32), direction)
    corners = evidence(scene)
    for direction, ask in zip(directions, asked.T, strict=True):
        index = np.flatnonzero(suspect & ask)
        if len(index):
            suspect[index] &= Crossings(corners, direction).net_exits(origins[index]) > 0
    return suspect


def directions_looked_in() -> Floats:
    """Unit directions (d, 3): the steep one, those around, and their mirror images that fall."""
    azimuth = np.radians([STEEP_DEG[0], *AZIMUTHS_DEG])
    altitude = np.radians([STEEP_DEG[1], *[ALTITUDE_DEG] * len(AZIMUTHS_DEG)])
    level = np.cos(altitude)
    rising = np.stack([level * np.sin(azimuth), level * np.cos(azimuth), np.sin(altitude)], axis=-1)
    return np.concatenate([rising, rising * np.array([1.0, 1.0, -1.0])])


def questions(normals: Floats, directions: Floats) -> Flags:
    """Whether each face (n,) is asked about each direction (d,)."""
    in_front = normals @ directions.T > IN_FRONT
    rising = directions[:, 2] > 0.0
    looks_up = (in_front & rising).sum(axis=1) >= FEWEST_RISING
    asked: Flags = in_front & (rising == looks_up[:, None])
    return asked


def evidence(scene: Scene) -> Floats:
    """The triangles (t, 3, 3) that have an inside: two-sided parts are none."""
    one_sided: Flags = np.array([part.sidedness != "two-sided" for part in scene.parts], dtype=bool)
    return triangle_corners(scene.vertices, scene.triangles[one_sided[scene.part]])
