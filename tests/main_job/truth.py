"""The truth that the main job is held against: every triangle, every minute, float64, nothing of `insol` in it.

The test of a ray against a triangle is that of Moeller and Trumbore (1997, Journal of Graphics Tools 2(1),
21-28, from memory). Its products are turned about so that, for one origin, all directions are
three matrix products. The sun comes straight from pvlib's SPA, minute by minute, without refraction.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date, datetime, timedelta
from zoneinfo import ZoneInfo

import numpy as np
import pandas as pd
import shapely
from builders import Solid
from numpy.typing import NDArray
from pvlib.solarposition import spa_python

STAND_OFF_M = 1e-3
"""How far before its face a ray begins: said in README.md, under Method."""


@dataclass(frozen=True)
class Minutes:
    """One-minute steps with the sun up: their middles [unix s] and unit vectors to the sun in the model's frame."""

    middle: NDArray[np.float64]  # (m,)
    directions: NDArray[np.float64]  # (m, 3)


@dataclass(frozen=True)
class TrueHours:
    """Hours of one point, and how many times the sun comes or goes for it."""

    direct_h: float
    possible_h: float
    edges: int


def triangles_of(solids: list[Solid]) -> NDArray[np.float64]:
    """Corners (t, 3, 3) of all polygons, cut by constrained Delaunay triangulation, running as their polygon does."""
    return np.concatenate([_cut(vertices[list(polygon)]) for vertices, polygons in solids for polygon in polygons])


def _cut(corners: NDArray[np.float64]) -> NDArray[np.float64]:
    if len(corners) == 3:
        return corners[None]
    normal = newell(corners)
    keep = np.argsort(np.abs(normal))[:2]  # the plane that shows the polygon largest
    pieces = shapely.constrained_delaunay_triangles(shapely.Polygon(corners[:, keep]))
    plan = np.array([np.array(piece.exterior.coords)[:3] for piece in pieces.geoms])
    dropped = 3 - keep.sum()
    height = corners[0] @ normal - np.einsum("tck,k->tc", plan, normal[keep])
    found = np.empty((*plan.shape[:2], 3))
    found[..., keep], found[..., dropped] = plan, height / normal[dropped]
    backward = np.cross(found[:, 1] - found[:, 0], found[:, 2] - found[:, 0]) @ normal < 0
    found[backward] = found[backward, ::-1]
    return found


def newell(corners: NDArray[np.float64]) -> NDArray[np.float64]:
    """Unit normal (3,) of a plane polygon (Newell's method)."""
    following = np.roll(corners, -1, axis=0)
    normal = np.sum(np.cross(corners - corners[0], following - corners[0]), axis=0)
    return normal / np.linalg.norm(normal)


AT_ONCE = 4_000_000
"""Pairs of a ray and a triangle held at a time: some hundred MB."""


def blocked(
    triangles: NDArray[np.float64], origin: NDArray[np.float64], directions: NDArray[np.float64]
) -> NDArray[np.bool_]:
    """Whether any triangle (t, 3, 3) stands in each direction (m, 3) from one origin (3,): (m,) bool."""
    one, other = triangles[:, 1] - triangles[:, 0], triangles[:, 2] - triangles[:, 0]
    away = origin - triangles[:, 0]
    # (d x e2).e1 = -d.(e1 x e2); (d x e2).s = d.(e2 x s); (s x e1).d = d.(s x e1); t = e2.(s x e1) / det
    for_det, for_u, for_v = -np.cross(one, other).T, np.cross(other, away).T, np.cross(away, one).T
    reach = np.einsum("tk,kt->t", other, for_v)
    found = np.zeros(len(directions), dtype=bool)
    rows = max(AT_ONCE // len(triangles), 1)
    for first in range(0, len(directions), rows):
        part = directions[first : first + rows]
        det = part @ for_det
        with np.errstate(divide="ignore", invalid="ignore"):
            u, v, t = part @ for_u / det, part @ for_v / det, reach / det
        found[first : first + rows] = ((det != 0) & (u >= 0) & (v >= 0) & (u + v <= 1) & (t > 0)).any(axis=1)
    return found


def sun_minutes(
    latitude: float,
    longitude: float,
    *,
    zone: str,
    first: date,
    last: date,
    elevation_m: float = 0.0,
    north_deg: float = 0.0,
    window: tuple[int, int] = (0, 24),
) -> Minutes:
    """Every minute from `first` to `last`, both included, with the sun up, in a window of whole local hours."""
    starts: list[NDArray[np.float64]] = []
    for n in range((last - first).days + 1):
        day = first + timedelta(days=n)
        begin, end = (_local(day, hour, zone) for hour in window)
        starts.append(np.arange(begin, end, 60.0))
    middle = np.concatenate(starts) + 30.0
    times = pd.DatetimeIndex(pd.to_datetime(middle.astype(np.int64), unit="s", utc=True))
    sun = spa_python(times, latitude, longitude, altitude=elevation_m, delta_t=None)
    altitude = np.radians(sun["elevation"].to_numpy())
    azimuth = np.radians(sun["azimuth"].to_numpy() - north_deg)
    directions = np.column_stack(
        [np.cos(altitude) * np.sin(azimuth), np.cos(altitude) * np.cos(azimuth), np.sin(altitude)]
    )
    up = altitude > 0
    return Minutes(middle[up], directions[up])


def _local(day: date, hour: int, zone: str) -> float:
    if hour == 24:
        day, hour = day + timedelta(days=1), 0
    return datetime(day.year, day.month, day.day, hour, tzinfo=ZoneInfo(zone)).timestamp()


def true_hours(
    triangles: NDArray[np.float64], point: NDArray[np.float64], normal: NDArray[np.float64], minutes: Minutes
) -> TrueHours:
    """Hours of sun on one point (3,) of a surface with an outward normal (3,)."""
    facing = minutes.directions @ normal > 0
    lit = np.zeros(len(facing), dtype=bool)
    lit[facing] = ~blocked(triangles, point + STAND_OFF_M * normal, minutes.directions[facing])
    unbroken = np.diff(minutes.middle) < 61
    edges = int(((lit[1:] != lit[:-1]) & unbroken).sum() + lit[0] + lit[-1])
    edges += int((lit[1:] & ~unbroken).sum() + (lit[:-1] & ~unbroken).sum())  # cut by the night or the window
    return TrueHours(lit.sum() / 60.0, facing.sum() / 60.0, edges)


def on_surface(triangles: NDArray[np.float64], point: NDArray[np.float64], normal: NDArray[np.float64]) -> bool:
    """Whether a point lies in a triangle that faces the normal: found by a ray that begins a metre before it."""
    cross = np.cross(triangles[:, 1] - triangles[:, 0], triangles[:, 2] - triangles[:, 0])
    unit = cross / np.linalg.norm(cross, axis=1)[:, None]
    same = np.abs(unit - normal).max(axis=1) < 1e-6
    flat = np.abs(np.einsum("tk,tk->t", unit, point - triangles[:, 0])) < 1e-6
    return bool(blocked(triangles[same & flat], point + normal, -normal[None])[0]) if (same & flat).any() else False
