"""A result folder of an invented town: forty boxes, hours that are smooth and made up.

The hours are no truth and no test of truth: they are there to be drawn, picked and read back.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from insol.output.colours import colours_of, scale_for
from insol.output.ply import write_ply

OFFSET = np.array([429_157.25, 434_812.5, 31.75])
"""A place in a national grid: where single precision would lose decimetres."""

NORTH_DEG = 17.0
SITE = {
    "latitude": 53.79,
    "longitude": -1.55,
    "time_zone": "Europe/London",
    "elevation_m": 31.75,
    "north_deg": NORTH_DEG,
}
PERIODS = (
    ("equinox", "march-equinox", "2025-03-20", "2025-03-20", 12.0),
    ("winter", "2025-12-21", "2025-12-21", "2025-12-21", 7.45),
    ("year", "year", "2025-01-01", "2025-12-31", 4410.0),
)  # fmt: skip
BLOCKS, MEASURED_BLOCKS = 40, (17, 18, 25, 26)
STREET_M, PLOT_M = 14.0, 30.0
SUNNY_DEG = 168.0


@dataclass(frozen=True)
class Town:
    """Where the result is, and what was written into it."""

    folder: Path
    faces: pd.DataFrame
    triangles: NDArray[np.float64]  # (t, 3, 3), the model's own frame
    face_row: NDArray[np.int32]  # (t,)


def write_town(
    folder: Path, *, spacing_m: float = 2.0, title: str = "Four blocks at Weaver’s Green", part: str = "block-{}"
) -> Town:
    """Write a whole result folder."""
    folder.mkdir(parents=True)
    boxes = town_boxes()
    quads, parts = cut_town(boxes, spacing_m, part)
    faces = pd.concat([faces_of(quads, parts), windows_of(boxes)], ignore_index=True)
    triangles = quads[:, [[0, 1, 2], [0, 2, 3]]].reshape(-1, 3, 3)
    face_row = np.repeat(np.arange(len(quads), dtype=np.int32), 2)
    faces.to_csv(folder / "faces.csv", index=False)
    spells_of(faces).to_csv(folder / "spells.csv", index=False)
    values = faces["equinox_direct_h"].to_numpy()
    colours = colours_of(values, scale_for("direct_h", faces["equinox_possible_h"].to_numpy()))[face_row]
    write_ply(folder / "faces.ply", triangles, colours, scalars={"equinox_direct_h": values[face_row]},
              ints={"face_row": face_row})  # fmt: skip
    standing = np.concatenate([box_quads(boxes[n]) for n in range(BLOCKS) if n not in MEASURED_BLOCKS])
    context = (standing + OFFSET)[:, [[0, 1, 2], [0, 2, 3]]].reshape(-1, 3, 3)
    write_ply(folder / "context.ply", context, np.full((len(context), 3), 196, dtype=np.uint8), scalars={}, ints={})
    (folder / "result.json").write_text(json.dumps(facts_of(title)), encoding="utf-8")
    return Town(folder, faces, triangles, face_row)


def facts_of(title: str) -> dict[str, Any]:
    """What result.json says, as far as it is looked at."""
    keys = ("name", "days", "first_day", "last_day", "sun_up_h")
    periods = [dict(zip(keys, period, strict=True)) for period in PERIODS]
    return {
        "title": title,
        "site": SITE,
        "periods": [{**p, "clock": "local", "from": None, "to": None} for p in periods],
    }


def town_boxes() -> NDArray[np.float64]:
    """Low and high corner (40, 2, 3) of boxes on an 8 by 5 grid of plots, of uneven heights."""
    column, row = np.arange(BLOCKS) % 8, np.arange(BLOCKS) // 8
    low = np.stack([column * (PLOT_M + STREET_M), row * (PLOT_M + STREET_M)], axis=1)
    wide = np.stack([PLOT_M - 7 * (column % 3 == 1), PLOT_M - 9 * (row % 2)], axis=1)
    height = 9 + 3.0 * ((column * 5 + row * 3) % 6) + 14 * (column == 6) * (row == 1)
    zero = np.zeros((BLOCKS, 1))
    return np.stack([np.hstack([low, zero]), np.hstack([low + wide, height[:, None]])], axis=1).astype(float)


def box_quads(box: NDArray[np.float64]) -> NDArray[np.float64]:
    """Four walls and the roof (5, 4, 3), corners anticlockwise from outside."""
    (x0, y0, z0), (x1, y1, z1) = box
    ring = [(x0, y0), (x1, y0), (x1, y1), (x0, y1)]
    walls = [[(*a, z0), (*b, z0), (*b, z1), (*a, z1)] for a, b in zip(ring, ring[1:] + ring[:1], strict=True)]
    return np.array([*walls, [(*corner, z1) for corner in ring]])


def cut(quad: NDArray[np.float64], spacing_m: float) -> NDArray[np.float64]:
    """A rectangle (4, 3) as a grid of rectangles (n, 4, 3) no larger than the spacing."""
    along, up = quad[1] - quad[0], quad[3] - quad[0]
    counts = [max(int(np.ceil(np.linalg.norm(side) / spacing_m)), 1) for side in (along, up)]
    u, v = (np.arange(count) / count for count in counts)
    du, dv = 1 / counts[0], 1 / counts[1]
    low = np.stack(np.meshgrid(u, v), axis=-1).reshape(-1, 1, 2)
    corners = low + np.array([[0, 0], [du, 0], [du, dv], [0, dv]])
    return quad[0] + corners[..., :1] * along + corners[..., 1:] * up


def cut_town(
    boxes: NDArray[np.float64], spacing_m: float, part: str
) -> tuple[NDArray[np.float64], list[tuple[str, str]]]:
    """Faces (n, 4, 3) in the model's own frame, and the measure and part of each."""
    pieces, names = [], []
    for number in MEASURED_BLOCKS:
        quads = np.concatenate([cut(quad, spacing_m) for quad in box_quads(boxes[number])])
        pieces.append(quads)
        names += [("facades", part.replace("{}", str(number)))] * len(quads)
    (x0, y0, _), (x1, _, _) = boxes[17][0], boxes[18][1]
    square = np.array([[x0, y0 + 22, 0], [x1, y0 + 22, 0], [x1, y0 + 42, 0], [x0, y0 + 42, 0]])
    pieces.append(cut(square, spacing_m))
    names += [("square", "")] * len(pieces[-1])
    return np.concatenate(pieces) + OFFSET, names


def faces_of(quads: NDArray[np.float64], names: list[tuple[str, str]]) -> pd.DataFrame:
    """The table of the faces."""
    normals = np.cross(quads[:, 1] - quads[:, 0], quads[:, 3] - quads[:, 0])
    areas = np.linalg.norm(normals, axis=1)
    normals = normals / areas[:, None]
    level = np.hypot(normals[:, 0], normals[:, 1]) < 1e-9
    azimuth = np.where(level, np.nan, (np.degrees(np.arctan2(normals[:, 0], normals[:, 1])) + NORTH_DEG) % 360)
    frame = pd.DataFrame(names, columns=["measure", "part"])
    frame["face"] = frame.groupby(["measure", "part"]).cumcount() + 1
    frame["name"] = ""
    centre = quads.mean(axis=1)
    frame[["x_m", "y_m", "z_m"]] = centre
    frame["azimuth_deg"], frame["tilt_deg"] = azimuth, np.degrees(np.arccos(np.clip(normals[:, 2], -1, 1)))
    frame["area_m2"] = areas
    local = centre - OFFSET
    # A strip along the foot of one block stands for what lies against a neighbour.
    covered = (frame["part"] == names[0][1]) & (local[:, 2] < 4.0) & (normals[:, 0] > 0.9)
    frame["status"] = np.where(covered, "covered", "measured")
    for name, *_, longest in PERIODS:
        facing = np.where(level, 1.0, 0.5 + 0.5 * np.cos(np.radians(np.nan_to_num(azimuth) - SUNNY_DEG)))
        possible = longest * np.where(facing < 0.12, 0.0, np.clip(facing, 0, 1) ** 0.6)
        waves = np.sin(local[:, 0] / 17 + 0.6) * np.cos(local[:, 1] / 23)
        open_share = np.clip(0.35 + local[:, 2] / 30 + 0.3 * waves, 0, 1)
        direct = np.where(covered, np.nan, possible * open_share)
        possible = np.where(covered, np.nan, possible)
        frame[f"{name}_direct_h"], frame[f"{name}_possible_h"] = direct, possible
        with np.errstate(invalid="ignore"):
            frame[f"{name}_shaded_fraction"] = np.where(possible > 0, 1 - direct / possible, np.nan)
        frame[f"{name}_error_h"] = np.where(covered, np.nan, longest / 144)
    return frame


def windows_of(boxes: NDArray[np.float64]) -> pd.DataFrame:
    """Three named points on the wall of one block that looks along the model's -y, with the same hours each."""
    (x0, y0, _), (x1, _, _) = boxes[MEASURED_BLOCKS[0]]
    frame = pd.DataFrame({"measure": "windows", "part": "", "face": [1, 2, 3], "name": ["hall", "stair", "attic"]})
    places = np.array([[x0 + share * (x1 - x0), y0, height] for share, height in ((0.2, 2), (0.5, 5), (0.8, 8))])
    frame[["x_m", "y_m", "z_m"]] = places + OFFSET
    frame["azimuth_deg"], frame["tilt_deg"] = (180.0 + NORTH_DEG) % 360, 90.0
    frame["area_m2"], frame["status"] = 0.0, "measured"
    for name, *_, longest in PERIODS:
        frame[f"{name}_direct_h"], frame[f"{name}_possible_h"] = 0.25 * longest, 0.5 * longest
        frame[f"{name}_shaded_fraction"], frame[f"{name}_error_h"] = 0.5, longest / 144
    return frame


def spells_of(faces: pd.DataFrame) -> pd.DataFrame:
    """Two spells of the equinox for every face that has sun."""
    sunny = faces[faces["equinox_direct_h"] > 0]
    tables = []
    for begin, share in ((8.0, 0.25), (12.0, 0.75)):
        end = begin + sunny["equinox_direct_h"] * share * 0.9
        table = sunny[["measure", "part", "face", "name"]].copy()
        table["period"], table["date"] = "equinox", "2025-03-20"
        table["begin"], table["end"] = clock(np.full(len(sunny), begin)), clock(end.to_numpy())
        table["minutes"] = (end - begin) * 60
        tables.append(table)
    return pd.concat(tables, ignore_index=True)


def clock(hours: NDArray[np.float64]) -> list[str]:
    """Hours as a clock shows them."""
    seconds = np.round(hours * 3600).astype(int)
    return [f"{s // 3600:02d}:{s // 60 % 60:02d}:{s % 60:02d}" for s in seconds]
