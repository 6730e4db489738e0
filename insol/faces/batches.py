"""Faces of one measure before all are put together: cut surfaces raised into space, grounds, named points."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import shapely

from insol.conventions import normals_from
from insol.faces.choosing import chosen_parts
from insol.faces.grid import Grids, even_grids, grids, square_grids
from insol.faces.ground import level_surface
from insol.faces.grouping import Flags, Floats, Ints, run_starts
from insol.faces.joining import Surfaces
from insol.faces.limits import check_spacing, refuse_too_many
from insol.faces.named_points import NamedPoints
from insol.faces.pieces import cut
from insol.faces.surfaces import surfaces_of
from insol.faces.triangles import Triangles, triangles_of_parts
from insol.scene.model import Scene
from insol.study.description import FacesMeasure, GroundMeasure

AS_MODELLED = 0.0
"""The spacing that keeps the file's own polygons as faces, whole."""

UPWARD = 0.1
"""Ground lies on faces whose normal's z is above this: slopes up to 84 degrees."""


@dataclass(frozen=True)
class Batch:
    """Faces of one measure; the arrays are as in `Faces`."""

    points: Floats
    normals: Floats
    areas: Floats
    part: Ints
    number: Ints
    outlines: Floats
    outline_face: Ints
    names: tuple[str, ...]

    def __len__(self) -> int:
        return len(self.areas)


def faces_of_parts(scene: Scene, measure: FacesMeasure) -> Batch:
    """The faces of the parts that a measure chooses; those of two-sided parts once for each side."""
    chosen = chosen_parts(scene, measure)
    check_spacing(measure.name, measure.spacing_m, zero_allowed=True)
    as_modelled = measure.spacing_m == AS_MODELLED
    surfaces = surfaces_of(triangles_of_parts(scene, chosen), as_modelled=as_modelled)
    both = two_sided_parts(scene)[surfaces.part]
    extents = extents_of(surfaces)
    areas = shapely.area(surfaces.polygons) * (1 + both)
    refuse_too_many(measure.name, measure.spacing_m, areas=areas, extents=extents)
    layout = uncut_grids(extents) if as_modelled else even_grids(extents, measure.spacing_m)
    return cut_surfaces(surfaces, layout, both)


def faces_of_ground(scene: Scene, measure: GroundMeasure) -> Batch:
    """The faces of a level grid in a polygon, or above the upward faces of parts."""
    check_spacing(measure.name, measure.spacing_m)
    if measure.parts:
        return faces_of_slopes(scene, measure)
    surfaces = level_surface(scene, measure)
    extents = extents_of(surfaces)
    refuse_too_many(measure.name, measure.spacing_m, areas=shapely.area(surfaces.polygons), extents=extents)
    return cut_surfaces(surfaces, square_grids(extents, measure.spacing_m), np.zeros(1, dtype=bool))


def faces_of_slopes(scene: Scene, measure: GroundMeasure) -> Batch:
    """The faces above the upward faces of parts."""
    surfaces = surfaces_of(upward(scene, triangles_of_parts(scene, chosen_parts(scene, measure))))
    extents = extents_of(surfaces)
    refuse_too_many(measure.name, measure.spacing_m, areas=shapely.area(surfaces.polygons), extents=extents)
    lifted = surfaces.frames.origins + np.array([0.0, 0.0, measure.height_m])
    surfaces = replace(surfaces, frames=replace(surfaces.frames, origins=lifted))
    return cut_surfaces(surfaces, even_grids(extents, measure.spacing_m), np.zeros(len(surfaces), dtype=bool))


def two_sided_parts(scene: Scene) -> Flags:
    """Whether each part of the scene is measured on both sides."""
    return np.array([part.sidedness == "two-sided" for part in scene.parts], dtype=bool)


def upward(scene: Scene, triangles: Triangles) -> Triangles:
    """The triangles that face up; those of two-sided parts are turned to do so."""
    turn = two_sided_parts(scene)[triangles.part] & (triangles.normals[:, 2] < 0.0)
    turned = replace(
        triangles,
        corners=np.where(turn[:, None, None], triangles.corners[:, ::-1], triangles.corners),
        vertices=np.where(turn[:, None], triangles.vertices[:, ::-1], triangles.vertices),
        normals=np.where(turn[:, None], -triangles.normals, triangles.normals),
    )
    return turned.some(turned.normals[:, 2] > UPWARD)


def extents_of(surfaces: Surfaces) -> Floats:
    """How far each surface (s, 2) reaches to the right and up the slope [m]."""
    bounds: Floats = shapely.bounds(surfaces.polygons).reshape(-1, 4)
    return bounds[:, 2:]


def uncut_grids(extents: Floats) -> Grids:
    """A grid of one cell over each surface, of its extent (s, 2) [m]."""
    one = np.ones(len(extents), dtype=np.int64)
    return grids(one, one, extents[:, 0], extents[:, 1])


def cut_surfaces(surfaces: Surfaces, layout: Grids, two_sided: Flags) -> Batch:
    """Surfaces cut by their grids, in space, with the far side of two-sided ones after the near side."""
    pieces = cut(surfaces.polygons, layout)
    frames, owner = surfaces.frames, pieces.surface
    drawn_owner = np.repeat(owner[pieces.drawn], 3)
    near = Batch(
        points=frames.raised(owner, pieces.points),
        normals=frames.normals[owner],
        areas=pieces.areas,
        part=surfaces.part[owner],
        number=np.zeros(len(owner), dtype=np.int64),
        outlines=frames.raised(drawn_owner, pieces.triangles.reshape(-1, 2)).reshape(-1, 3, 3),
        outline_face=pieces.drawn,
        names=("",) * len(owner),
    )
    if not two_sided.any():
        return numbered(near)
    both = two_sided[owner]
    far = far_sides(near, both, surfaces.thickness[owner])
    together = chained_batches([near, far])
    return numbered(in_order(together, np.argsort(together.part, kind="stable")))


def far_sides(near: Batch, both: Flags, thickness: Floats) -> Batch:
    """The faces marked `both` seen from behind, under a surface of such thickness [m]."""
    again = np.flatnonzero(both)
    under = near.normals * thickness[:, None]
    place = np.cumsum(both) - 1
    drawn = np.flatnonzero(both[near.outline_face])
    drawn_face = near.outline_face[drawn]
    return Batch(
        points=(near.points - under)[again],
        normals=-near.normals[again],
        areas=near.areas[again],
        part=near.part[again],
        number=near.number[again],
        outlines=near.outlines[drawn, ::-1] - under[drawn_face, None],
        outline_face=place[drawn_face],
        names=tuple(near.names[index] for index in again),
    )


def chained_batches(batches: list[Batch]) -> Batch:
    """Batches of faces, one after another."""
    before = np.cumsum([0] + [len(batch) for batch in batches])
    faces = [batch.outline_face + n for batch, n in zip(batches, before, strict=False)]
    return Batch(
        points=np.concatenate([batch.points for batch in batches]),
        normals=np.concatenate([batch.normals for batch in batches]),
        areas=np.concatenate([batch.areas for batch in batches]),
        part=np.concatenate([batch.part for batch in batches]),
        number=np.concatenate([batch.number for batch in batches]),
        outlines=np.concatenate([batch.outlines for batch in batches]),
        outline_face=np.concatenate(faces),
        names=tuple(name for batch in batches for name in batch.names),
    )


def in_order(batch: Batch, order: Ints) -> Batch:
    """The faces in another order, and what draws them."""
    rank = np.empty(len(order), dtype=np.int64)
    rank[order] = np.arange(len(order))
    face = rank[batch.outline_face]
    drawn = np.argsort(face, kind="stable")
    return Batch(
        points=batch.points[order],
        normals=batch.normals[order],
        areas=batch.areas[order],
        part=batch.part[order],
        number=batch.number[order],
        outlines=batch.outlines[drawn],
        outline_face=face[drawn],
        names=tuple(batch.names[index] for index in order),
    )


def numbered(batch: Batch) -> Batch:
    """The faces, which come part by part, numbered from 1 in each part."""
    starts = run_starts(batch.part)
    length = np.diff(starts, append=len(batch))
    return replace(batch, number=np.arange(len(batch)) - np.repeat(starts, length) + 1)


def faces_of_points(scene: Scene, points: NamedPoints, north_deg: float) -> Batch:
    """A face without area or outline for each named point."""
    count = len(points.names)
    return Batch(
        points=points.positions - scene.origin,
        normals=normals_from(points.azimuth_deg, points.tilt_deg, north_deg),
        areas=np.zeros(count),
        part=np.full(count, -1),
        number=np.arange(count) + 1,
        outlines=np.zeros((0, 3, 3)),
        outline_face=np.zeros(0, dtype=np.int64),
        names=points.names,
    )
