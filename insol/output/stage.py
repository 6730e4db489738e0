"""What picture and window have in common: the meshes on the stage, the camera, the greys and the hatching."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from insol.output.colours import NO_VALUE, NO_VALUE_STRIPE, Quantity
from insol.output.view_data import ViewData

View = Literal["bird", "plan"]
VIEWS: tuple[View, ...] = ("bird", "plan")

BACKGROUND = "#fbfaf8"
Edges = tuple[tuple[str, float], tuple[str, float]]
"""Colour and width in pixels of the edges of the faces, and of the surroundings."""

FINE_EDGES: Edges = (("#5b5853", 1.4), ("#b5b1ab", 1.0))
"""Where a pixel is drawn many times over."""

SCREEN_EDGES: Edges = (("#7d786f", 1.0), ("#c3c0ba", 1.0))
"""Where no line is thinner than a pixel: paler instead."""

LIGHT = np.array([0.35, -0.55, 0.76])
"""Where the light on the surroundings comes from: form, not sun."""

GREYS = (176.0, 236.0)
"""From surfaces turned away from the light to those that face it."""

CAMERA_BEARING_DEG = 150.0
"""The bird looks from the sunny side, a little from the east: north of the equator."""

CAMERA_ALTITUDE_DEG = 38.0
FOLD_DEG = 25.0
"""Surfaces that meet at more than this show their edge."""

STRIPES = 110
"""Of the hatching, over the height of the measured faces."""

TEXELS = 32
BLANK = (0.5, 0.0)
"""Where the hatching's pattern is blank, whichever of its ends is taken for the upper one."""


@dataclass(frozen=True)
class Camera:
    """A parallel projection: the same length is as long wherever it lies.

    Attributes
    ----------
    right, up, towards : (3,) float64, unit; along the picture, and from the scene to the eye
    """

    right: NDArray[np.float64]
    up: NDArray[np.float64]
    towards: NDArray[np.float64]

    def flat(self, points: NDArray[np.float64]) -> NDArray[np.float64]:
        """Where points (n, 3) lie in the picture's plane (n, 2) [m]."""
        return np.stack([points @ self.right, points @ self.up], axis=-1)


def camera_of(view: View, data: ViewData) -> Camera:
    """The camera of a view: from above with the model's y up, or a bird's from the sunny side."""
    if view == "plan":
        return Camera(np.array([1.0, 0.0, 0.0]), np.array([0.0, 1.0, 0.0]), np.array([0.0, 0.0, 1.0]))
    bearing = CAMERA_BEARING_DEG if data.northern else 180.0 - CAMERA_BEARING_DEG
    turned, altitude = np.radians(bearing - data.north_deg), np.radians(CAMERA_ALTITUDE_DEG)
    towards = np.array([np.sin(turned) * np.cos(altitude), np.cos(turned) * np.cos(altitude), np.sin(altitude)])
    right = np.array([-np.cos(turned), np.sin(turned), 0.0])
    return Camera(right, np.cross(towards, right), towards)


def soup(triangles: NDArray[np.float64]) -> Any:
    """A pyvista mesh of triangles (t, 3, 3), none sharing a vertex with another."""
    import pyvista

    count = len(triangles)
    faces = np.column_stack([np.full(count, 3), np.arange(3 * count).reshape(-1, 3)])
    return pyvista.PolyData(triangles.reshape(-1, 3), faces.ravel())


@dataclass(frozen=True)
class Stage:
    """What stands on the stage and may be coloured again.

    Attributes
    ----------
    faces : the mesh of the measured faces
    actor : what draws it
    stripes : (3 t, 2) float, where the corners of the faces lie in the hatching's pattern
    """

    faces: Any
    actor: Any
    stripes: NDArray[np.float64]

    def colour(self, data: ViewData, period: str, quantity: Quantity) -> None:
        """Give the faces the colours of a quantity; those without a value are hatched."""
        hatched = np.isnan(data.values(period, quantity))[data.face_row]
        self.faces.cell_data["colour"] = data.colours(period, quantity)
        self.faces.active_texture_coordinates = np.where(np.repeat(hatched, 3)[:, None], self.stripes, BLANK)


def put_on_stage(plotter: Any, data: ViewData, period: str, quantity: Quantity, *, edges: Edges = FINE_EDGES) -> Stage:
    """Add the measured faces in colour and everything else in grey."""
    plotter.set_background(BACKGROUND)
    faces = soup(data.triangles)
    faces.cell_data["colour"] = data.colours(period, quantity)
    actor = plotter.add_mesh(faces, scalars="colour", rgb=True, lighting=False, name="faces", show_scalar_bar=False)
    actor.SetTexture(_hatching())
    stage = Stage(faces, actor, _stripes(data.triangles))
    stage.colour(data, period, quantity)
    _add_folds(plotter, faces, *edges[0])
    if len(data.context):
        context = soup(data.context)
        context.cell_data["grey"] = _greys(data.context)
        plotter.add_mesh(context, scalars="grey", rgb=True, lighting=False)
        _add_folds(plotter, context, *edges[1])
    return stage


def _hatching() -> Any:
    """The pattern that faces are multiplied with: stripes, and blank between them so that colours stay as they are."""
    import pyvista

    place = np.add.outer(np.arange(TEXELS), np.arange(TEXELS)) / TEXELS
    away = np.abs((place + 0.5) % 1.0 - 0.5)  # of a stripe's middle, in periods
    share = np.clip((0.16 - away) * TEXELS / 2, 0.0, 1.0)[..., None]
    tone = np.array(NO_VALUE_STRIPE) / np.array(NO_VALUE)
    pixels = np.round(255 * (1 - share + share * tone)).astype(np.uint8)
    texture: Any = pyvista.Texture(pixels)  # type: ignore[no-untyped-call]
    texture.repeat = True
    texture.mipmap = True
    return texture


def _stripes(triangles: NDArray[np.float64]) -> NDArray[np.float64]:
    """Where corners lie in the pattern, (3 t, 2), so that stripes run on from face to face of one plane."""
    normals = unit_normals(triangles)
    level = np.hypot(normals[:, 0], normals[:, 1]) < 1e-6
    along = np.stack([-normals[:, 1], normals[:, 0], np.zeros(len(normals))], axis=1)
    along[level] = (1.0, 0.0, 0.0)
    along /= np.linalg.norm(along, axis=1, keepdims=True)
    up = np.cross(normals, along)
    height = float(np.linalg.norm(np.ptp(triangles.reshape(-1, 3), axis=0)))
    places = np.stack([(triangles * axis[:, None]).sum(axis=2) for axis in (along, up)], axis=2)
    return places.reshape(-1, 2) * STRIPES / max(height, 1.0)


def unit_normals(triangles: NDArray[np.float64]) -> NDArray[np.float64]:
    """Normals (t, 3) of triangles; zero where one has no area."""
    normals = np.cross(triangles[:, 1] - triangles[:, 0], triangles[:, 2] - triangles[:, 0])
    length = np.linalg.norm(normals, axis=1, keepdims=True)
    return np.divide(normals, length, out=np.zeros_like(normals), where=length > 0)


def aim(plotter: Any, camera: Camera, centre: NDArray[np.float64], half_height_m: float, reach_m: float) -> None:
    """Look at a point, with so much of the scene above and below it."""
    view = plotter.camera
    view.parallel_projection = True
    view.focal_point = tuple(centre)
    view.position = tuple(centre + camera.towards * 3 * reach_m)
    view.up = tuple(camera.up)
    view.parallel_scale = half_height_m
    view.clipping_range = (0.01 * reach_m, 8 * reach_m)


def framed(data: ViewData, camera: Camera, aspect: float, margin: float) -> tuple[NDArray[np.float64], float]:
    """Centre (3,) and half height [m] of a picture that holds all measured faces.

    Parameters
    ----------
    aspect : width over height
    margin : share of the picture left free around them
    """
    points = data.triangles.reshape(-1, 3)
    flat = camera.flat(points)
    low, high = flat.min(axis=0), flat.max(axis=0)
    middle = (low + high) / 2
    depth = float((points @ camera.towards).mean())
    centre = middle[0] * camera.right + middle[1] * camera.up + depth * camera.towards
    half = (high - low) / 2 / (1.0 - 2 * margin)
    return centre, float(max(half[1], half[0] / aspect, 1.0))


def reach(data: ViewData) -> float:
    """Radius [m] around the middle of the faces that holds everything."""
    everything = np.concatenate([data.triangles.reshape(-1, 3), data.context.reshape(-1, 3)])
    return float(np.linalg.norm(everything - data.triangles.reshape(-1, 3).mean(axis=0), axis=1).max()) + 1.0


def _greys(triangles: NDArray[np.float64]) -> NDArray[np.uint8]:
    """A grey for each triangle by how it lies to the light, the same from both sides."""
    share = (unit_normals(triangles) @ (LIGHT / np.linalg.norm(LIGHT)) + 1) / 2
    grey = GREYS[0] + (GREYS[1] - GREYS[0]) * share
    return np.repeat(np.round(grey)[:, None], 3, axis=1).astype(np.uint8)


def _add_folds(plotter: Any, mesh: Any, colour: str, width: float) -> None:
    welded = mesh.clean(point_merging=True, tolerance=1e-4, absolute=True)
    folds = welded.extract_feature_edges(
        feature_angle=FOLD_DEG, boundary_edges=True, non_manifold_edges=False, manifold_edges=False
    )
    if folds.n_cells:
        actor = plotter.add_mesh(folds, color=colour, line_width=width, lighting=False, pickable=False)
        bring_forward(actor)


def bring_forward(actor: Any) -> None:
    """Draw lines a hair before the surfaces that they lie on; else they come out as dots."""
    actor.mapper.SetResolveCoincidentTopologyToPolygonOffset()
    actor.mapper.SetRelativeCoincidentTopologyLineOffsetParameters(-2.0, -8.0)
