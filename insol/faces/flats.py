"""Which triangles of a part make one flat surface: neighbours in one plane, facing the same way.

Neighbours are joined across an edge when the smaller of the two ends in the plane of the larger. A
chain of such neighbours may still bend, as on a finely cut dome; what bends is taken apart again: its
largest flat stays whole where it is a fair share of it, and the rest falls back to neighbours with one
normal, then to the file's polygons.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from insol.conventions import PLANAR_M
from insol.faces.grouping import Flags, Floats, Ints, connected_labels, largest_of_each, run_starts
from insol.faces.triangles import HalfEdges, Triangles, opposite_pairs

SAME_FACING = 0.99
"""Cosine between normals of neighbours in one plane: 8 degrees, since slim triangles have vague normals."""

FAIR_SHARE = 0.05
"""A flat within a bent surface stays whole when it has this share of its area: a wall with a rounded
edge, not a facet of a dome."""

SAME_NORMAL = 3.5e-4
"""Unit normals that differ by less than this are one: a millimetre in three metres."""

MOST_ROUNDS = 20
"""So often the largest flat is taken from a bent surface."""

LOOSE, EQUAL, MODELLED = 0, 1, 2
"""How firmly two triangles hold together: in one plane within the tolerance; with one normal, too; as
pieces of one flat polygon of the file."""


@dataclass(frozen=True)
class Links:
    """Pairs of triangles that may lie in one flat surface.

    Attributes
    ----------
    first, second : (k,), the two triangles
    grade : (k,), LOOSE, EQUAL or MODELLED
    """

    first: Ints
    second: Ints
    grade: Ints

    def labels(self, count: int, kept: Flags) -> Ints:
        """The surface (count,) of each triangle, by the links that are kept."""
        return connected_labels(count, self.first[kept], self.second[kept])

    def together(self, other: Links) -> Links:
        """These links and others."""
        return Links(
            np.concatenate([self.first, other.first]),
            np.concatenate([self.second, other.second]),
            np.concatenate([self.grade, other.grade]),
        )


def flat_surfaces(triangles: Triangles, edges: HalfEdges, *, as_modelled: bool = False) -> Ints:
    """The flat surface (t,) that each triangle belongs to.

    Parameters
    ----------
    as_modelled : keep the file's own polygons apart, even where neighbours lie in one plane
    """
    links = polygon_links(triangles)
    if not as_modelled:
        links = links.together(neighbour_links(triangles, edges))
    labels = links.labels(len(triangles), links.grade >= LOOSE)
    least = np.full(len(triangles), LOOSE)
    for _ in range(MOST_ROUNDS):
        bent = bent_triangles(triangles, labels)
        if not bent.any():
            return labels
        labels, least = with_flats_taken_out(triangles, links, labels, bent, least)
    least[bent_triangles(triangles, labels)] = MODELLED
    return parted(links, labels, least)


def parted(links: Links, labels: Ints, least: Ints) -> Ints:
    """Labels without the links between different ones and those weaker than a triangle's `least` grade (t,)."""
    needed = np.maximum(least[links.first], least[links.second])
    kept = (labels[links.first] == labels[links.second]) & (links.grade >= needed)
    return links.labels(len(labels), kept)


def polygon_links(triangles: Triangles) -> Links:
    """Links from each triangle of a flat polygon of the file to the polygon's first triangle."""
    _, first, label = np.unique(triangles.polygon, return_index=True, return_inverse=True)
    flat = thickness(triangles, label)[label] <= 2.0 * PLANAR_M
    faces_along = np.einsum("ij,ij->i", triangles.normals, mean_normals(triangles, label)[label]) > 0.0
    member = np.flatnonzero(flat & faces_along & faces_along[first[label]])
    return Links(first[label][member], member, np.full(len(member), MODELLED))


def neighbour_links(triangles: Triangles, edges: HalfEdges) -> Links:
    """Links between neighbours of which the smaller ends in the plane of the larger."""
    one, other = opposite_pairs(edges)
    swap = triangles.areas[edges.triangle[one]] < triangles.areas[edges.triangle[other]]
    one, other = np.where(swap, other, one), np.where(swap, one, other)
    large, small = edges.triangle[one], edges.triangle[other]
    apex = triangles.corners[small, (other // len(triangles) + 2) % 3]
    height = np.einsum("ij,ij->i", triangles.normals[large], apex - triangles.corners[large, 0])
    facing = np.einsum("ij,ij->i", triangles.normals[large], triangles.normals[small])
    joined = (np.abs(height) <= PLANAR_M) & (facing > SAME_FACING)
    large, small = large[joined], small[joined]
    equal = np.linalg.norm(triangles.normals[large] - triangles.normals[small], axis=1) <= SAME_NORMAL
    return Links(large, small, np.where(equal, EQUAL, LOOSE))


def mean_normals(triangles: Triangles, labels: Ints) -> Floats:
    """The unit normal of each label, averaged by area."""
    count = int(labels.max(initial=-1)) + 1
    weighted = triangles.normals * triangles.areas[:, None]
    sums = np.stack([np.bincount(labels, column, minlength=count) for column in weighted.T], axis=-1)
    length = np.linalg.norm(sums, axis=1, keepdims=True)
    units: Floats = np.divide(sums, length, out=np.zeros_like(sums), where=length > 0.0)
    return units


def thickness(triangles: Triangles, labels: Ints) -> Floats:
    """How far apart the two planes are that hold each label's vertices between them [m]; labels are 0, 1, ..."""
    _, low, high = height_ranges(triangles, labels, mean_normals(triangles, labels))
    return high - low


def height_ranges(triangles: Triangles, labels: Ints, normals: Floats) -> tuple[Floats, Floats, Floats]:
    """A corner (k, 3) of each label, and the lowest and highest vertex (k,) along its normal from there [m]."""
    order = np.argsort(labels, kind="stable")
    starts = run_starts(labels[order])
    corner = triangles.corners[order[starts], 0]
    heights = np.einsum("tij,tj->ti", triangles.corners - corner[labels][:, None], normals[labels])
    low = np.minimum.reduceat(heights.min(axis=1)[order], starts)
    high = np.maximum.reduceat(heights.max(axis=1)[order], starts)
    return corner, low, high


def bent_triangles(triangles: Triangles, labels: Ints) -> Flags:
    """Whether each triangle's surface is thicker than a plane may be."""
    too_thick: Flags = thickness(triangles, labels) > 2.0 * PLANAR_M
    return too_thick[labels]


def with_flats_taken_out(
    triangles: Triangles, links: Links, labels: Ints, bent: Flags, least: Ints
) -> tuple[Ints, Ints]:
    """New labels, and the grade of links (t,) that each triangle still trusts.

    From each bent surface the flat around its largest triangle is taken, if it is a fair share; if it is
    none, the surface keeps only its firmer links.
    """
    _, seeds = largest_of_each(labels, triangles.areas)
    seed = seeds[labels]
    away = triangles.corners - triangles.corners[seed, 0][:, None]
    heights = np.einsum("tij,tj->ti", away, triangles.normals[seed])
    facing = np.einsum("ij,ij->i", triangles.normals, triangles.normals[seed])
    # Half the tolerance: the mean plane of what is taken out may then lie anywhere in it.
    in_plane = bent & (np.abs(heights) <= PLANAR_M / 2.0).all(axis=1) & (facing > SAME_FACING)
    sides = parted(links, 2 * labels + in_plane, least)
    area_before = np.bincount(labels, triangles.areas)[labels]
    area_of_flat = np.bincount(sides, triangles.areas)[sides[seed]]
    unfair = bent & (area_of_flat < FAIR_SHARE * area_before)
    least = np.where(unfair, np.minimum(least + 1, MODELLED), least)
    # Where no flat is taken out the surface stays as it was, but for its weaker links.
    return parted(links, np.where(unfair, 2 * labels, 2 * labels + in_plane), least), least
