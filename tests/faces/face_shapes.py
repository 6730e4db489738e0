"""Small scenes whose areas and neighbours are known by hand, and a plain caster to ask about them."""

from __future__ import annotations

from pathlib import Path

import mapbox_earcut
import numpy as np
import shapely

from insol.faces.make import make_faces
from insol.faces.model import Faces
from insol.scene.model import Part, Scene
from insol.study.description import FacesMeasure, GroundMeasure, Site, Study

NOWHERE = Site(latitude=0.0, longitude=0.0, time_zone="UTC")


class Body:
    """Polygons of one part: corner lists in space, each triangulated by itself."""

    def __init__(self, name="body", role="proposed", sidedness="outward"):
        self.part = Part(name, role, "model.obj", "", sidedness)
        self.polygons = []

    def add(self, *rings):
        """Add a flat polygon: its outer ring counter-clockwise seen from outside, then its holes."""
        self.polygons.append([np.array(ring, dtype=float) for ring in rings])
        return self

    def triangles(self):
        """Corners (t, 3, 3) of each polygon's triangles."""
        return [triangulated(rings) for rings in self.polygons]


def triangulated(rings):
    """Triangles (t, 3, 3) of a flat polygon in space, wound as its outer ring."""
    points = np.concatenate(rings)
    ring = rings[0]
    normal = np.cross(ring, np.roll(ring, -1, axis=0)).sum(axis=0)
    drop = int(np.argmax(np.abs(normal)))
    flat = np.delete(points, drop, axis=1)
    ends = np.cumsum([len(r) for r in rings]).astype(np.uint32)
    corners = points[mapbox_earcut.triangulate_float64(np.ascontiguousarray(flat), ends).reshape(-1, 3)]
    facing = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]) @ normal
    corners[facing < 0] = corners[facing < 0, ::-1]
    return corners


def scene_of(*bodies, moved=(0.0, 0.0, 0.0), origin=(0.0, 0.0, 0.0), one_polygon_a_triangle=False):
    """A scene of bodies: every triangle with vertices of its own, as in a triangle soup.

    `moved` shifts the bodies in the model's frame, before `origin` is subtracted.
    """
    corners, polygon, part = [], [], []
    for index, body in enumerate(bodies):
        for triangles in body.triangles():
            first = polygon[-1] + 1 if polygon else 0
            numbers = range(first, first + len(triangles)) if one_polygon_a_triangle else [first] * len(triangles)
            polygon.extend(numbers)
            part.extend([index] * len(triangles))
            corners.append(triangles)
    vertices = np.concatenate(corners).reshape(-1, 3) + np.array(moved) - np.array(origin)
    return Scene(
        origin=np.array(origin),
        vertices=vertices,
        triangles=np.arange(len(vertices)).reshape(-1, 3),
        polygon=np.array(polygon),
        part=np.array(part),
        parts=tuple(body.part for body in bodies),
    )


def extruded(outline, height, *, holes=(), base=0.0, floor=True, **kind):
    """An upright body over a plan; the outline counter-clockwise, holes clockwise."""
    body = Body(**kind)
    rings = [np.array(ring, dtype=float) for ring in (outline, *holes)]
    low = [np.column_stack([ring, np.full(len(ring), base)]) for ring in rings]
    high = [ring + np.array([0.0, 0.0, height]) for ring in low]
    body.add(*high)
    if floor:
        body.add(*(ring[::-1] for ring in low))
    for bottom, top in zip(low, high, strict=True):
        for i in range(len(bottom)):
            j = (i + 1) % len(bottom)
            body.add([bottom[i], bottom[j], top[j], top[i]])
    return body


def box(x, y, width, depth, height, *, base=0.0, turn_deg=0.0, floor=True, **kind):
    """A box with a corner at (x, y), turned about that corner."""
    plan = np.array([[0, 0], [width, 0], [width, depth], [0, depth]], dtype=float)
    angle = np.radians(turn_deg)
    plan = plan @ np.array([[np.cos(angle), np.sin(angle)], [-np.sin(angle), np.cos(angle)]]) + [x, y]
    return extruded(plan, height, base=base, floor=floor, **kind)


def study_of(*measures, folder=Path(), site=NOWHERE):
    return Study(title="", site=site, models=(), measures=measures, periods=(), folder=folder)


def faces_measure(spacing_m, parts=("*",), roles=(), name="faces"):
    return FacesMeasure(name=name, spacing_m=spacing_m, parts=tuple(parts), roles=tuple(roles))


def ground_measure(spacing_m, polygon=(), *, height_m=0.0, parts=(), name="ground"):
    return GroundMeasure(
        name=name, spacing_m=spacing_m, polygon=tuple(map(tuple, polygon)), height_m=height_m, parts=tuple(parts)
    )


def faces_of(scene, *measures, caster=None, **study) -> Faces:
    return make_faces(scene, study_of(*measures, **study), caster)


class PlainCaster:
    """Every ray against every triangle, in float64.

    References
    ----------
    T. Möller, B. Trumbore: Fast, minimum storage ray/triangle intersection. Journal of Graphics Tools 2
    (1997), 21-28.
    """

    engine = "numpy"

    def __init__(self, scene):
        self.corners = scene.vertices[scene.triangles]
        self.triangle_count = len(self.corners)

    def first(self, origins, directions):
        distances = [self.distances(o, d) for o, d in zip(origins.astype(float), directions.astype(float), strict=True)]
        return np.array([d.argmin() if np.isfinite(d.min()) else -1 for d in distances], dtype=np.int32)

    def distances(self, origin, direction):
        a, b, c = self.corners.transpose(1, 0, 2)
        one, two = b - a, c - a
        across = np.cross(direction, two)
        size = np.einsum("ij,ij->i", one, across)
        flat = np.abs(size) < 1e-12
        size = np.where(flat, 1.0, size)
        away = origin - a
        u = np.einsum("ij,ij->i", away, across) / size
        along = np.cross(away, one)
        v = along @ direction / size
        distance = np.einsum("ij,ij->i", two, along) / size
        met = ~flat & (u >= 0) & (v >= 0) & (u + v <= 1) & (distance > 0)
        return np.where(met, distance, np.inf)

    def blocked(self, origins, direction):
        return self.first(origins, np.broadcast_to(direction, origins.shape)) >= 0

    def blocked_each(self, origins, directions):
        return self.first(origins, directions) >= 0


def assert_sound(faces):
    """What is true of all faces, whatever they were cut from."""
    np.testing.assert_allclose(np.linalg.norm(faces.normals, axis=1), 1.0, rtol=0, atol=1e-12)
    assert (np.diff(faces.outline_face) >= 0).all()
    drawn = drawn_areas(faces)
    np.testing.assert_allclose(drawn, faces.areas, rtol=1e-6, atol=1e-9, err_msg="outlines draw the faces' areas")
    one, two = faces.outlines[:, 1] - faces.outlines[:, 0], faces.outlines[:, 2] - faces.outlines[:, 0]
    facing = np.einsum("ij,ij->i", np.cross(one, two), faces.normals[faces.outline_face])
    assert (facing >= -1e-9).all(), "outlines are wound as the normals point"
    for face in range(len(faces)):
        room, most = rooms_of_point(faces, face)
        assert room > 0.2 * most, f"the point of face {face} is {room} m inside it, where {most} m were to be had"


def drawn_areas(faces):
    one, two = faces.outlines[:, 1] - faces.outlines[:, 0], faces.outlines[:, 2] - faces.outlines[:, 0]
    area = np.linalg.norm(np.cross(one, two), axis=1) / 2.0
    return np.bincount(faces.outline_face, area, minlength=len(faces))


def rooms_of_point(faces, face):
    """How far a face's point lies inside the face [m], and how far one can; below 0 outside or off its plane."""
    normal = faces.normals[face]
    helper = np.eye(3)[np.argmin(np.abs(normal))]
    u = np.cross(normal, helper)
    u /= np.linalg.norm(u)
    axes = np.stack([u, np.cross(normal, u)])
    first, last = np.searchsorted(faces.outline_face, [face, face + 1])
    away = faces.outlines[first:last] - faces.points[face]
    if np.abs(away @ normal).max() > 1e-6:
        return -1.0, 0.0
    shape = shapely.union_all(shapely.polygons(away @ axes.T))
    here = shapely.Point(0.0, 0.0)
    distance = shapely.distance(shapely.boundary(shape), here)
    most = shapely.length(shapely.maximum_inscribed_circle(shape, tolerance=0.1 * shape.area / shape.length))
    return (distance if shapely.contains(shape, here) else -distance), most
