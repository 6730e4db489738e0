"""Which side of a surface is out: by the winding, the sign of the volume, and rays where both are silent."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.casting.contract import Caster
from insol.conventions import stand_off
from insol.scene.bodies import Edges, connected, edges_of, shells_of, side_pairs
from insol.scene.model import normals_and_areas

SAMPLES = 24
"""Triangles of an open shell that are looked from, the largest first."""

FAN = 32
"""Directions looked into from each side of a triangle."""

CLEARLY = 1.25
"""One side sees out so much more often than the other: it is the outside."""

LEVEL = 0.7
"""Area seen from above over area: from here on an open sheet lies rather than stands."""


@dataclass(frozen=True)
class Turned:
    """The triangles wound outward, and how that was found.

    Attributes
    ----------
    triangles : (t, 3) int32
    flipped : (t,) bool, wound the other way in the file
    sheet : (t,) bool, has no inside: both sides see out alike
    shell : (t,) int64, piece of one winding
    closed : (t,) bool, belongs to a shell without open or crowded edges
    """

    triangles: NDArray[np.int32]
    flipped: NDArray[np.bool_]
    sheet: NDArray[np.bool_]
    shell: NDArray[np.int64]
    closed: NDArray[np.bool_]


def turned_outward(
    vertices: NDArray[np.float64], triangles: NDArray[np.int32], part: NDArray[np.int32], caster: Caster
) -> Turned:
    """Wind every shell so that its normals point outward.

    A part that is closed by itself is turned by its volume: two blocks may share a wall. What is
    left is looked at over all parts, since a block's façades may be parts of their own that close
    only together. For what is open even then, rays decide.

    Parameters
    ----------
    vertices : (v, 3) float64 [m], local
    triangles : (t, 3) int32
    part : (t,) int32
    caster : over the same triangles
    """
    alone = _turn_by_volume(vertices, triangles, part)
    rest = np.flatnonzero(~alone.closed)
    if not len(rest):
        return alone
    together = _turn_by_volume(vertices, triangles[rest], np.zeros(len(rest), dtype=np.int32))
    together = _turn_by_rays(vertices, together, caster)
    shell = together.shell + int(alone.shell.max()) + 1
    return Turned(*(
        _with(rest, of_all, of_rest)
        for of_all, of_rest in (
            (alone.triangles, together.triangles),
            (alone.flipped, together.flipped),
            (alone.sheet, together.sheet),
            (alone.shell, shell),
            (alone.closed, together.closed),
        )
    ))  # fmt: skip


def _with(rows: NDArray[np.int64], of_all: NDArray, of_rest: NDArray) -> NDArray:
    changed = of_all.copy()
    changed[rows] = of_rest
    return changed


def _turn_by_volume(vertices: NDArray[np.float64], triangles: NDArray[np.int32], part: NDArray[np.int32]) -> Turned:
    """One winding for every shell; outward where the shell is closed."""
    apart = triangles.astype(np.int64) + part[:, None].astype(np.int64) * len(vertices)
    _, apart = np.unique(apart, return_inverse=True)
    edges = edges_of(apart.reshape(-1, 3))
    shell = shells_of(apart.reshape(-1, 3), edges)
    count = int(shell.max()) + 1
    flipped = _against_the_first(len(triangles), edges, shell)
    open_shell = np.zeros(count, dtype=bool)
    open_shell[shell[(edges.uses[edges.edge] != 2).any(axis=1)]] = True
    volume = _signed_volumes(vertices[_flip(triangles, flipped)], shell, count)
    flipped ^= (~open_shell & (volume < 0))[shell]
    sheet = np.zeros(len(triangles), dtype=bool)
    return Turned(_flip(triangles, flipped), flipped, sheet, shell, ~open_shell[shell])


def _turn_by_rays(vertices: NDArray[np.float64], by_volume: Turned, caster: Caster) -> Turned:
    """Open shells turned to the side that sees out; those that see out alike on both sides are sheets."""
    still_open = np.unique(by_volume.shell[~by_volume.closed])
    if not len(still_open):
        return by_volume
    front, back = _openness(vertices, by_volume.triangles, by_volume.shell, still_open, caster)
    inward = back > CLEARLY * front
    sheet = (back <= CLEARLY * front) & (front <= CLEARLY * back) & (front + back > 0)
    # A sheet that lies rather than stands is a terrain, a road, a canopy: its upper side is meant.
    level, downward = _lying(vertices[by_volume.triangles], by_volume.shell, len(front))
    inward = np.where(sheet & level, downward, inward)
    sheet &= ~level
    turn = inward[by_volume.shell]
    kept_as_found = sheet[by_volume.shell]
    flipped = np.where(kept_as_found, False, by_volume.flipped ^ turn)
    found = _flip(by_volume.triangles, by_volume.flipped)
    return Turned(_flip(found, flipped), flipped, kept_as_found, by_volume.shell, by_volume.closed)


def _flip(triangles: NDArray[np.int32], which: NDArray[np.bool_]) -> NDArray[np.int32]:
    return np.where(which[:, None], triangles[:, ::-1], triangles).astype(np.int32)


def _against_the_first(count: int, edges: Edges, shell: NDArray[np.int64]) -> NDArray[np.bool_]:
    """Whether each triangle is wound against the first of its shell.

    Every triangle stands twice, as it is and turned over. Across an edge of two the same state goes
    with the same when the sides run against each other, with the turned one when they run alike.
    What is connected to the first triangle as it is, is right as it stands there.
    """
    first, second = side_pairs(edges, edges.uses[edges.edge.ravel()] == 2)
    forward = edges.forward.ravel()
    alike = forward[first] == forward[second]
    a, b = first // 3, second // 3
    other = np.where(alike, b + count, b)
    same_again = np.where(alike, b, b + count)
    state = connected(2 * count, np.concatenate([a, a + count]), np.concatenate([other, same_again]))
    leader = np.full(int(shell.max(initial=-1)) + 1, count, dtype=np.int64)
    np.minimum.at(leader, shell, np.arange(count))
    return np.asarray(state[:count] != state[leader[shell]])


def _signed_volumes(corners: NDArray[np.float64], shell: NDArray[np.int64], count: int) -> NDArray[np.float64]:
    """Volume (count,) enclosed by each shell, negative where its normals point inward."""
    volumes = np.einsum("ij,ij->i", corners[:, 0], np.cross(corners[:, 1], corners[:, 2])) / 6.0
    return np.bincount(shell, volumes, minlength=count).astype(np.float64)


def _lying(
    corners: NDArray[np.float64], shell: NDArray[np.int64], count: int
) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Which shells (count,) lie more level than LEVEL, and which of them are wound downward."""
    normals, areas = normals_and_areas(corners)
    upward = np.bincount(shell, areas * normals[:, 2], minlength=count)
    level = np.bincount(shell, areas * np.abs(normals[:, 2]), minlength=count)
    return level > LEVEL * np.bincount(shell, areas, minlength=count), upward < 0


def _openness(
    vertices: NDArray[np.float64],
    triangles: NDArray[np.int32],
    shell: NDArray[np.int64],
    chosen: NDArray[np.int64],
    caster: Caster,
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """How often each side of each chosen shell sees out: (count,) front and back, by area."""
    corners = vertices[triangles]
    normals, areas = normals_and_areas(corners)
    largest_first = np.lexsort((-areas, shell))
    place = np.arange(len(shell)) - np.searchsorted(shell[largest_first], shell[largest_first])
    sampled = largest_first[(place < SAMPLES) & np.isin(shell[largest_first], chosen)]
    centres = corners[sampled].mean(axis=1)
    off = stand_off(float(np.abs(vertices).max(initial=0.0)))
    count = int(shell.max()) + 1
    seen = []
    for side in (1.0, -1.0):
        origins = np.repeat(centres + side * off * normals[sampled], FAN, axis=0).astype(np.float32)
        directions = _fan(side * normals[sampled]).reshape(-1, 3).astype(np.float32)
        free = ~caster.blocked_each(origins, directions)
        share = free.reshape(-1, FAN).mean(axis=1)
        seen.append(np.bincount(shell[sampled], share * areas[sampled], minlength=count).astype(np.float64))
    return seen[0], seen[1]


def _fan(normals: NDArray[np.float64]) -> NDArray[np.float64]:
    """FAN directions (n, FAN, 3) spread over the hemisphere before each normal, the same for all."""
    number = np.arange(FAN) + 0.5
    height = 1.0 - 0.95 * number / FAN  # a golden spiral down to just above the surface
    turn = np.pi * (1.0 + 5.0**0.5) * number
    ring = np.sqrt(1.0 - height**2)
    helper = np.where(np.abs(normals[:, 2:]) < 0.9, [[0.0, 0.0, 1.0]], [[1.0, 0.0, 0.0]])
    u = np.cross(helper, normals)
    u /= np.maximum(np.linalg.norm(u, axis=1, keepdims=True), 1e-12)
    v = np.cross(normals, u)
    return (
        normals[:, None] * height[None, :, None]
        + u[:, None] * (ring * np.cos(turn))[None, :, None]
        + v[:, None] * (ring * np.sin(turn))[None, :, None]
    )
