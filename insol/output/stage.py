"""What picture and window have in common: the meshes on the stage, the camera, the greys."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from insol.output.colours import Quantity
from insol.output.view_data import ViewData

View = Literal["bird", "plan"]
VIEWS: tuple[View, ...] = ("bird", "plan")

BACKGROUND = "#fbfaf8"
LINE = "#5b5853"
QUIET_LINE = "#b5b1ab"
LIGHT = np.array([0.35, -0.55, 0.76])
"""Where the light on the surroundings comes from: form, not sun."""

GREYS = (176.0, 236.0)
"""From surfaces turned away from the light to those that face it."""

CAMERA_BEARING_DEG = 150.0
"""The bird looks from the sunny side, a little from the east: north of the equator."""

CAMERA_ALTITUDE_DEG = 38.0
FOLD_DEG = 25.0
"""Surfaces that meet at more than this show their edge."""


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
    towards = np.array(
        [np.sin(turned) * np.cos(altitude), np.cos(turned) * np.cos(altitude), np.sin(altitude)]
    )
    right = np.array([-np.cos(turned), np.sin(turned), 0.0])
    return Camera(right, np.cross(towards, right), towards)


def soup(triangles: NDArray[np.float64]) -> Any:
    """A pyvista mesh of triangles (t, 3, 3), none sharing a vertex with another."""
    import pyvista

    count = len(triangles)
    faces = np.column_stack([np.full(count, 3), np.arange(3 * count).reshape(-1, 3)])
    return pyvista.PolyData(triangles.reshape(-1, 3), faces.ravel())


def put_on_stage(plotter: Any, data: ViewData, period: str, quantity: Quantity) -> Any:
    """Add the measured faces in colour and everything else in grey; returns the faces' mesh."""
    plotter.set_background(BACKGROUND)
    faces = soup(data.triangles)
    faces.cell_data["colour"] = data.colours(period, quantity)
    plotter.add_mesh(faces, scalars="colour", rgb=True, lighting=False, name="faces")
    _add_folds(plotter, faces, LINE, 1.4)
    if len(data.context):
        context = soup(data.context)
        context.cell_data["grey"] = _greys(data.context)
        plotter.add_mesh(context, scalars="grey", rgb=True, lighting=False, pickable=False)
        _add_folds(plotter, context, QUIET_LINE, 1.0)
    return faces


def aim(plotter: Any, camera: Camera, centre: NDArray[np.float64], half_height_m: float, reach_m: float) -> None:
    """Look at a point, with so much of the scene above and below it."""
    view = plotter.camera
    view.parallel_projection = True
    view.focal_point = tuple(centre)
    view.position = tuple(centre + camera.towards * 3 * reach_m)
    view.up = tuple(camera.up)
    view.parallel_scale = half_height_m
    view.clipping_range = (0.01 * reach_m, 8 * reach_m)


def framed(
    data: ViewData, camera: Camera, aspect: float, margin: float, *, also: NDArray[np.float64] | None = None
) -> tuple[NDArray[np.float64], float]:
    """Centre (3,) and half height [m] of a picture that holds all measured faces.

    Parameters
    ----------
    aspect : width over height
    margin : share of the picture left free around them
    also : (p, 3) further points to be held
    """
    points = data.triangles.reshape(-1, 3)
    if also is not None:
        points = np.concatenate([points, also])
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
    normals = np.cross(triangles[:, 1] - triangles[:, 0], triangles[:, 2] - triangles[:, 0])
    length = np.linalg.norm(normals, axis=1, keepdims=True)
    normals = np.divide(normals, length, out=np.zeros_like(normals), where=length > 0)
    share = (normals @ (LIGHT / np.linalg.norm(LIGHT)) + 1) / 2
    grey = GREYS[0] + (GREYS[1] - GREYS[0]) * share
    return np.repeat(np.round(grey)[:, None], 3, axis=1).astype(np.uint8)


def _add_folds(plotter: Any, mesh: Any, colour: str, width: float) -> None:
    welded = mesh.clean(point_merging=True, tolerance=1e-4, absolute=True)
    folds = welded.extract_feature_edges(
        feature_angle=FOLD_DEG, boundary_edges=True, non_manifold_edges=False, manifold_edges=False
    )
    if folds.n_cells:
        plotter.add_mesh(folds, color=colour, line_width=width, lighting=False, pickable=False)
