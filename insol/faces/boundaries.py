"""The outline of flat surfaces: edges without a neighbour in the surface, chained into rings, as polygons."""

from __future__ import annotations

import numpy as np
import shapely

from insol.faces.frames import Polygons
from insol.faces.grouping import Flags, Floats, Ints, run_starts
from insol.faces.triangles import HalfEdges
from insol.faces.uniting import polygon_parts, united

STRAIGHT_M = 1e-8
"""A corner this close to the line between its neighbours is none [m]."""


def outline_polygons(corners: Floats, edges: HalfEdges, labels: Ints) -> tuple[Polygons, Ints]:
    """Polygons, and the surface of each; a surface that falls apart has several.

    Parameters
    ----------
    corners : (t, 3, 2), triangles in their surface's plane
    labels : (t,), the surface of each triangle: 0, 1, ...

    Notes
    -----
    Surfaces whose edges do not chain into one outer ring with holes (triangles that overlap, outlines
    that touch themselves) are built by joining their triangles one by one, which is slow but always right.
    """
    count = int(labels.max(initial=-1)) + 1
    surface = labels[edges.triangle]
    border, tangled = border_edges(edges, surface, count)
    border = border[~tangled[surface[border]]]
    ring_edges, ring = chained(edges.start[border], edges.end[border], surface[border])
    border = border[ring_edges]
    # The corners of triangle h % t, edge h // t, begin with corner h // t.
    points = corners[border % len(labels), border // len(labels)]
    polygons, owner = polygons_of_rings(*without_straight_corners(points, ring, surface[border]))
    sound = shapely.is_valid(polygons)
    polygons, owner = polygons[sound], owner[sound]
    rest = np.setdiff1d(np.arange(count), owner)
    joined, joined_owner = joined_triangles(corners, labels, rest)
    return np.concatenate([polygons, joined]), np.concatenate([owner, joined_owner])


def border_edges(edges: HalfEdges, surface: Ints, count: int) -> tuple[Ints, Flags]:
    """Half-edges with no opposite one in their surface, and whether each surface (count,) is tangled."""
    order = np.lexsort((surface, edges.edge))
    key = surface[order] * (int(edges.edge.max(initial=0)) + 1) + edges.edge[order]
    starts = run_starts(key)
    length = np.diff(starts, append=len(key))
    single, double = starts[length == 1], starts[length == 2]
    same_way = edges.start[order[double]] == edges.start[order[double + 1]]
    tangled = np.zeros(count, dtype=bool)
    tangled[surface[order[starts[length > 2]]]] = True
    tangled[surface[order[double[same_way]]]] = True
    border = np.sort(order[single])
    tangled |= forked(edges.start[border], surface[border], count)
    return border, tangled


def forked(start: Ints, surface: Ints, count: int) -> Flags:
    """Whether a surface's outline leaves one vertex twice."""
    order = np.lexsort((start, surface))
    twice = (np.diff(start[order]) == 0) & (np.diff(surface[order]) == 0)
    marked = np.zeros(count, dtype=bool)
    marked[surface[order[1:][twice]]] = True
    return marked


def chained(start: Ints, end: Ints, surface: Ints) -> tuple[Ints, Ints]:
    """The edges in the order in which they follow one another, and the ring (0, 1, ...) of each."""
    scale = int(max(start.max(initial=0), end.max(initial=0))) + 1
    by_start = np.argsort(surface * scale + start)
    found = np.searchsorted((surface * scale + start)[by_start], surface * scale + end)
    following = by_start[found].tolist()
    order: list[int] = []
    ring: list[int] = []
    seen = [False] * len(following)
    rings = 0
    for first in range(len(following)):
        if seen[first]:
            continue
        edge = first
        while not seen[edge]:
            seen[edge] = True
            order.append(edge)
            ring.append(rings)
            edge = following[edge]
        rings += 1
    return np.array(order, dtype=np.int64), np.array(ring, dtype=np.int64)


def without_straight_corners(points: Floats, ring: Ints, surface: Ints) -> tuple[Floats, Ints, Ints]:
    """Points, ring and surface without the points that lie straight between their neighbours."""
    starts = run_starts(ring)
    length = np.diff(starts, append=len(ring))
    place = np.arange(len(ring)) - starts[ring]
    before = points[starts[ring] + (place - 1) % length[ring]]
    after = points[starts[ring] + (place + 1) % length[ring]]
    chord = after - before
    offset = points - before
    distance = np.abs(chord[:, 0] * offset[:, 1] - chord[:, 1] * offset[:, 0])
    onward = np.einsum("ij,ij->i", offset, after - points) > 0.0
    kept = ~(onward & (distance <= STRAIGHT_M * np.linalg.norm(chord, axis=1)))
    enough = np.bincount(ring[kept], minlength=len(starts))[ring] >= 3
    kept |= ~enough
    return points[kept], ring[kept], surface[kept]


def polygons_of_rings(points: Floats, ring: Ints, surface: Ints) -> tuple[Polygons, Ints]:
    """Polygons with holes of the surfaces that have exactly one outer ring, and the surface of each."""
    starts = run_starts(ring)
    owner = surface[starts]
    enough = np.diff(starts, append=len(ring)) >= 3
    twice_area = ring_areas(points, starts)
    outer = twice_area > 0.0
    count = int(surface.max(initial=-1)) + 1
    sound = np.bincount(owner[outer], minlength=count) == 1
    sound[owner[~enough]] = False
    usable = np.flatnonzero(sound[owner])
    order = usable[np.lexsort((~outer[usable], owner[usable]))]
    if not len(order):
        return np.zeros(0, dtype=object), np.zeros(0, dtype=np.int64)
    kept = sound[surface]
    rank = np.full(len(starts), -1)
    rank[usable] = np.arange(len(usable))
    rings = shapely.linearrings(points[kept], indices=rank[ring[kept]])
    surfaces, place = np.unique(owner[order], return_inverse=True)
    return shapely.polygons(rings[rank[order]], indices=place), surfaces


def ring_areas(points: Floats, starts: Ints) -> Floats:
    """Twice the signed area of each ring, positive when it runs counter-clockwise."""
    if not len(starts):
        return np.zeros(0)
    following = np.arange(1, len(points) + 1)
    following[np.append(starts[1:], len(points)) - 1] = starts
    # From the ring's own first point, so that a ring far from the origin keeps its digits.
    length = np.diff(starts, append=len(points))
    base = np.repeat(points[starts], length, axis=0)
    a, b = points - base, points[following] - base
    return np.add.reduceat(a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0], starts)


def joined_triangles(corners: Floats, labels: Ints, surfaces: Ints) -> tuple[Polygons, Ints]:
    """The union of each of the given surfaces' triangles, in pieces that do not touch."""
    order = np.argsort(labels, kind="stable")
    begin = np.searchsorted(labels[order], surfaces)
    end = np.searchsorted(labels[order], surfaces, side="right")
    unions = [united(shapely.polygons(corners[order[first:last]])) for first, last in zip(begin, end, strict=True)]
    pieces, index = polygon_parts(np.array(unions, dtype=object))
    return shapely.orient_polygons(pieces), surfaces[index]
