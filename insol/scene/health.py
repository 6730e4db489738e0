"""What may be wrong with a part or with the whole, in plain words with numbers; cheap, always done."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from insol.scene.bodies import edges_of
from insol.scene.model import normals_and_areas
from insol.scene.placing import PLAUSIBLE_HEIGHT_M, PLAUSIBLE_WIDTH_M

FAR_APART_M = 5000.0
"""Models of one study whose boxes lie farther apart than this shade nothing of each other."""


@dataclass(frozen=True)
class PartHealth:
    """Numbers on one part, as it was read."""

    name: str
    triangles: int
    area_m2: float
    low_m: tuple[float, float, float]  # corner of the bounding box, model frame
    high_m: tuple[float, float, float]
    open_edges: int  # sides without a neighbour in the part's whole model
    crowded_edges: int  # shared by more than two sides of the part itself
    doubles: int  # triangles on the same three vertices as another
    flipped: int  # triangles turned over on reading
    sheets: int  # triangles measured on both sides

    @property
    def closed(self) -> bool:
        """Whether every side has exactly one neighbour."""
        return not self.open_edges and not self.crowded_edges

    @property
    def size_m(self) -> tuple[float, float, float]:
        """Along x, y, z [m]."""
        width, depth, height = (high - low for low, high in zip(self.low_m, self.high_m, strict=True))
        return width, depth, height


def health_of(
    vertices: NDArray[np.float64],
    triangles: NDArray[np.int32],
    part: NDArray[np.int32],
    names: tuple[str, ...],
    *,
    flipped: NDArray[np.bool_],
    sheet: NDArray[np.bool_],
) -> tuple[PartHealth, ...]:
    """The health of each part; `vertices` (v, 3) in metres in the model frame."""
    count = len(names)
    apart = triangles.astype(np.int64) + part[:, None].astype(np.int64) * len(vertices)
    alone = edges_of(np.unique(apart, return_inverse=True)[1].reshape(-1, 3))
    # A facade that is a part of its own is closed by the other parts of its block.
    together = edges_of(triangles)
    part_of_alone, part_of_edge = (
        part[np.unique(edges.edge.ravel(), return_index=True)[1] // 3] for edges in (alone, together)
    )
    _, areas = normals_and_areas(vertices[triangles])
    low, high = np.full((count, 3), np.inf), np.full((count, 3), -np.inf)
    for corner in range(3):
        np.minimum.at(low, part, vertices[triangles[:, corner]])
        np.maximum.at(high, part, vertices[triangles[:, corner]])

    def counted(of: NDArray[np.int32], which: NDArray[np.bool_]) -> NDArray[np.int64]:
        return np.bincount(of[which], minlength=count)

    rows = (
        np.bincount(part, minlength=count),
        np.bincount(part, areas, minlength=count),
        counted(part_of_edge, together.uses == 1),
        counted(part_of_alone, alone.uses > 2),
        counted(part, _is_double(apart)),
        counted(part, flipped),
        counted(part, sheet),
    )
    total, area, open_, crowded, doubles, turned, sheets = (row.tolist() for row in rows)
    return tuple(
        PartHealth(
            names[n], int(total[n]), float(area[n]), tuple(low[n].tolist()), tuple(high[n].tolist()),
            int(open_[n]), int(crowded[n]), int(doubles[n]), int(turned[n]), int(sheets[n]),
        )
        for n in range(count)
    )  # fmt: skip


def _is_double(triangles: NDArray[np.int64]) -> NDArray[np.bool_]:
    """Whether a triangle stands on the same three vertices as an earlier one."""
    corners = np.sort(triangles, axis=1)
    order = np.lexsort(corners.T[::-1])
    double = np.zeros(len(triangles), dtype=bool)
    double[order[1:]] = (corners[order[1:]] == corners[order[:-1]]).all(axis=1)
    return double


def doubts_of(health: PartHealth) -> tuple[str, ...]:
    """What a person should know about a part before believing its numbers."""
    doubts = []
    if health.sheets:
        doubts.append(
            f"{health.sheets} of {health.triangles} triangles are sheets that see out on both sides; "
            "they are measured on both: give them a thickness if one side is meant"
        )
    if health.crowded_edges:
        doubts.append(
            f"{health.crowded_edges} edges are shared by more than two triangles; inside and outside were told by rays"
        )
    if health.open_edges and not health.sheets:
        doubts.append(f"{health.open_edges} edges have no neighbour: not closed; sun may enter where it should not")
    if health.doubles:
        doubts.append(f"{health.doubles} triangles lie on others: their area counts twice; --repair leaves them out")
    return tuple(doubts)


def scene_doubts(
    names: tuple[str, ...], lows: NDArray[np.float64], highs: NDArray[np.float64], units: tuple[str, ...]
) -> tuple[str, ...]:
    """What is odd about whole models, from their boxes (n, 3) [m] and the units that the study gives."""
    doubts = []
    for name, low, high, unit in zip(names, lows, highs, units, strict=True):
        width, depth, height = (high - low).tolist()
        size = f"{width:,.3g} × {depth:,.3g} × {height:,.3g} m"
        other = "mm" if height > PLAUSIBLE_HEIGHT_M[1] or max(width, depth) > PLAUSIBLE_WIDTH_M[1] else "m"
        if height > PLAUSIBLE_HEIGHT_M[1] or max(width, depth) > PLAUSIBLE_WIDTH_M[1]:
            doubts.append(f'{name} measures {size} with units = "{unit}": is it in {other}?')
        elif max(width, depth) < PLAUSIBLE_WIDTH_M[0] and height < PLAUSIBLE_HEIGHT_M[0]:
            doubts.append(f'{name} measures only {size} with units = "{unit}": are the units right?')
        if height > 3 * max(width, depth) and height > 30 and min(width, depth) < height / 10:
            doubts.append(f"{name} is {height:,.0f} m high and {min(width, depth):,.1f} m thin: is y up in it?")
    gaps = np.maximum(lows[:, None] - highs[None], lows[None] - highs[:, None])[..., :2].max(axis=2)
    for a, b in np.argwhere(np.triu(gaps > FAR_APART_M)):
        doubts.append(f"{names[a]} and {names[b]} lie {gaps[a, b] / 1000:,.1f} km apart: do they share one origin?")
    return tuple(doubts)
