"""Make the sample models anew: `python scripts/make_samples.py [FOLDER]`. Needs numpy; always writes the same.

Ostermarsh is an invented town. Around Lantern Square stand a hall, an arcade, a court, rows of
houses, a malt house; on the cleared yard south of the square a new block is proposed.
The second place is a wall on the equator, whose hours of sun are known by hand.
"""

from __future__ import annotations

import sys
from collections.abc import Sequence
from pathlib import Path

import numpy as np
from solids import (
    Named,
    Shape,
    arc,
    at_height,
    box,
    cap,
    court,
    extruded,
    gabled,
    joined,
    obj_text,
    pointed,
    prism,
    rectangle,
    regular,
    ring,
    turned,
    write,
)

FOLDER = Path(__file__).resolve().parent.parent / "sample_models"
NORTH_DEG = 24.0
"""Bearing of the models' +y axis, as the studies say it."""

GROUND_FLOOR_M, FLOOR_M = 4.2, 3.3

Outline = Sequence[tuple[float, float]]
"""Corners in plan, counter-clockwise [m]."""


def surroundings() -> Named:
    """The neighbours, clockwise from the north of the square."""
    return {**north_side(), **east_side(), **south_side(), **west_side()}


def north_side() -> Named:
    """A court under a mansard, an L with a stair tower, a lane of houses behind a gate."""
    outer, inner = rectangle(-4, 52, 58, 100), rectangle(9, 65, 45, 87)
    ell = [(70, 52), (112, 52), (112, 66), (84, 66), (84, 92), (70, 92)]
    parts: Named = {
        "tilers-court/floors": court(outer, inner, 0, 14.5),
        "tilers-court/mansard": court(outer, inner, 14.5, 18.1, lean=1.6),
        "weighhouse/wings": prism(ell, 0, 12),
        "weighhouse/attic": prism([(72, 54), (110, 54), (110, 64), (82, 64), (82, 90), (72, 90)], 12, 15),
        "weighhouse/stair": prism(regular(8, 3.4, (86, 68)), 0, 18.5),
        "wool-gate": wool_gate(),
    }
    for number, (eaves, ridge) in enumerate([(8.4, 12.6), (9.6, 13.2), (8.0, 12.9), (10.2, 14.4), (7.6, 11.4)], 1):
        y = 43 + 11 * number
        parts[f"corn-street-{number:02}"] = gabled(-44, y, -28, y + 11, eaves, ridge, along="x")
    return parts


def wool_gate() -> Shape:
    """A gate house over the lane that leaves the square to the north-west."""
    profile = [(-26, 0), (-19.6, 0), *arc(-17, 3.2, 2.6, 12), (-14.4, 0), (-8, 0), (-8, 9), (-17, 13), (-26, 9)]
    return extruded(profile, 54, 62, along="y")


def east_side() -> Named:
    """An arcade along the square, houses with hipped roofs, the saw-tooth roofs of the rope works."""
    arches: list[tuple[float, float]] = []
    for number in range(6):
        centre = 3.4 + 6.2 * number
        arches += [(centre - 2.2, 0), *arc(centre, 3.0, 2.2, 10), (centre + 2.2, 0)]
    front = [(0, 0), *arches, (37.8, 0), (37.8, 6.4), (0, 6.4)]
    parts: Named = {
        "arcade-house/arcade": extruded(front, 64, 65, along="x"),
        "arcade-house/shops": box(69, 0, 0, 80, 37.8, 6.4),
        "arcade-house/floors": box(64, 0, 6.4, 80, 37.8, 16),
        "arcade-house/roof": extruded([(64, 16), (80, 16), (76, 19.4), (68, 19.4)], 0, 37.8, along="y"),
        "rope-works": extruded(saw_tooth(96, 6.5, 10.2, 8, 4), -62, -20, along="y"),
    }
    for number, (size, eaves, apex) in enumerate([(11, 6.2, 10.5), (12, 6.8, 11.5), (10, 6, 9.8), (12.5, 7, 12)], 1):
        house = pointed(rectangle(96, 16 * number - 22, 96 + size, 16 * number - 22 + size), 0, eaves, apex)
        parts[f"ferry-street-{number:02}"] = turned(house, 7 * number - 16, (100, 16 * number - 16))
    return parts


def saw_tooth(start: float, low: float, high: float, width: float, teeth: int) -> list[tuple[float, float]]:
    """The profile of a shed with glazed teeth: steep faces look one way."""
    end = start + width * teeth
    roof = [(end - width * n - dx, z) for n in range(teeth) for dx, z in ((0, low), (width - 0.8, high))]
    return [(start, 0), (end, 0), *roof, (start, low)]


def south_side() -> Named:
    """A terrace of gabled houses, and an L of workshops that keeps to an older street line."""
    eaves = (6.1, 6.1, 6.6, 6.1, 7.2, 6.1, 6.6, 6.1, 6.6)
    parts: Named = {
        f"coopers-row-{number:02}": gabled(-8 + 7.5 * number, -82, -0.5 + 7.5 * number, -71, z, z + 4.3, along="x")
        for number, z in enumerate(eaves)
    }
    ell = prism([(-58, -88), (-22, -88), (-22, -77), (-46, -77), (-46, -62), (-58, -62)], 0, 7.4)
    attic = prism([(-56, -86), (-24, -86), (-24, -79), (-48, -79), (-48, -64), (-56, -64)], 7.4, 10.2)
    parts["chandlers-yard/workshops"] = turned(ell, 9, (-40, -75))
    parts["chandlers-yard/lofts"] = turned(attic, 9, (-40, -75))
    for number, height in enumerate((16.5, 13.2, 19.8), 1):
        low = rectangle(62 + 14 * (number - 1), -86, 74 + 14 * (number - 1), -70)
        high = rectangle(64 + 14 * (number - 1), -84, 72 + 14 * (number - 1), -72)
        parts[f"ferry-quay-{number:02}/floors"] = prism(low, 0, height)
        parts[f"ferry-quay-{number:02}/attic"] = prism(high, height, height + 3)
    return parts


def west_side() -> Named:
    """The lantern hall with its tower and apse, the malt house with a round kiln and a chimney."""
    parts: Named = {
        "lantern-hall/nave": gabled(-46, 8, -18, 26, 10.5, 18.5, along="x"),
        "lantern-hall/apse": pointed(regular(12, 6.5, (-46, 17)), 0, 7.5, 12),
        "lantern-hall/porch": gabled(-36, 4.5, -30, 8, 4, 6.5, along="y"),
        "lantern-hall/tower": box(-18, 12.5, 0, -9, 21.5, 21),
        "lantern-hall/lantern": pointed(regular(8, 3.6, (-13.5, 17)), 21, 25.5, 36),
        "malt-house/floors": prism([(-48, -44), (-16, -44), (-16, -30), (-34, -26), (-48, -26)], 0, 15.5),
        "malt-house/kiln": pointed(regular(20, 6, (-24, -20)), 0, 11, 19.5),
        "malt-house/chimney": prism(regular(10, 1.3, (-40, -20)), 0, 27),
    }
    for number, height in enumerate((9.8, 12.4, 11.1, 9.2), 1):
        low, high = -52.0 + 26 * number - 26, -52.0 + 26 * number - 2
        outline = [(-76, low), (-62, low + 1.5), (-61, high), (-74.5, high - 2)]
        parts[f"glaziers-lane-{number:02}"] = prism(outline, 0, height)
    return parts


def proposed() -> Named:
    """The new block: façades by floor and side, as sheets that close to a body with roofs and undersides."""
    return {**block_a(), **block_b(), **pergola()}


U_OUTLINE = [(0, -56), (13, -56), (13, -30), (39, -30), (39, -56), (52, -56), (52, -14), (0, -14)]
U_SIDES = ("south", "yard-west", "yard-north", "yard-east", "south", "east", "north", "west")
U_SET_BACK = [(2.2, -53), (11, -53), (11, -27.5), (41, -27.5), (41, -53), (49.8, -53), (49.8, -16.2), (2.2, -16.2)]


def block_a() -> Named:
    """A U around a yard that opens to the south: passage, five floors, a floor set back, balconies."""
    parts = {**ground_floor(), **floors("block-a", U_OUTLINE, U_SIDES, 5)}
    top = GROUND_FLOOR_M + 5 * FLOOR_M
    outline, inset = at_height(U_OUTLINE, top), at_height(U_SET_BACK, top)
    parts["block-a/terrace"] = ring(outline, inset)
    parts |= sides("block-a/floor-06", U_SET_BACK, U_SIDES, top, top + FLOOR_M)
    parts["block-a/roof"] = cap(at_height(U_SET_BACK, top + FLOOR_M), facing_up=True)
    parts["block-a/plant"] = box(20, -25, top + FLOOR_M, 32, -19, top + FLOOR_M + 2.4)
    for floor in range(1, 6):
        z = GROUND_FLOOR_M + (floor - 1) * FLOOR_M
        slabs = [box(x, -31.6, z - 0.2, x + 4, -30, z) for x in (14.5, 20.8, 27.2, 33.5)]
        parts[f"block-a/balconies/floor-{floor:02}"] = joined(*slabs)
    return parts


def ground_floor() -> Named:
    """The ground floor of block A, with a vaulted passage from the square to the yard."""
    arch = [(23.1, 0.0), *arc(26, 0.9, 2.9, 14), (28.9, 0.0)]
    parts = sides("block-a/floor-00", U_OUTLINE, U_SIDES, 0, GROUND_FLOOR_M)
    for side, y, ends in (("north", -14.0, (0.0, 52.0)), ("yard-north", -30.0, (13.0, 39.0))):
        profile = [(ends[0], 0.0), *arch, (ends[1], 0.0), (ends[1], GROUND_FLOOR_M), (ends[0], GROUND_FLOOR_M)]
        wall = np.array([(x, y, z) for x, z in profile])
        parts[f"block-a/floor-00/{side}"] = Shape(wall, (tuple(range(len(wall)))[:: -1 if side == "north" else 1],))
    strips = ring(*([(x, y, z) for x, z in arch] for y in (-14.0, -30.0)))
    parts["block-a/passage"] = Shape(strips.vertices, strips.polygons[:-1])  # the last would close it underfoot
    west = [(0, -56), (13, -56), (13, -30), (23.1, -30), (23.1, -14), (0, -14)]
    east = [(28.9, -30), (39, -30), (39, -56), (52, -56), (52, -14), (28.9, -14)]
    parts["block-a/underside"] = joined(*(cap(at_height(half, 0), facing_up=False) for half in (west, east)))
    return parts


def block_b() -> Named:
    """A tower of ten floors with cut corners beside the yard."""
    x0, y0, x1, y1, cut = 62.0, -52.0, 80.0, -34.0, 3.0
    outline = [
        (x0 + cut, y0), (x1 - cut, y0), (x1, y0 + cut), (x1, y1 - cut),
        (x1 - cut, y1), (x0 + cut, y1), (x0, y1 - cut), (x0, y0 + cut),
    ]  # fmt: skip
    names = ("south", "south-east", "east", "north-east", "north", "north-west", "west", "south-west")
    parts = {**sides("block-b/floor-00", outline, names, 0, GROUND_FLOOR_M), **floors("block-b", outline, names, 9)}
    top = GROUND_FLOOR_M + 9 * FLOOR_M
    parts["block-b/roof"] = cap(at_height(outline, top), facing_up=True)
    parts["block-b/underside"] = cap(at_height(outline, 0), facing_up=False)
    return parts


def pergola() -> Named:
    """Slats on posts along the south edge of the square."""
    parts: Named = {"pergola/posts": joined(*(box(x, y, 0, x + 0.2, y + 0.2, 3) for x in (4, 14, 24) for y in (2, 5)))}
    slats = [box(3.5 + 0.75 * n, 1.6, 3, 3.65 + 0.75 * n, 5.6, 3.25) for n in range(29)]
    parts["pergola/slats"] = joined(*slats)
    return parts


def floors(block: str, outline: Outline, names: Sequence[str], count: int) -> Named:
    """The upper floors of a block, each side of each floor a part."""
    parts: Named = {}
    for floor in range(1, count + 1):
        low = GROUND_FLOOR_M + (floor - 1) * FLOOR_M
        parts |= sides(f"{block}/floor-{floor:02}", outline, names, low, low + FLOOR_M)
    return parts


def sides(storey: str, outline: Outline, names: Sequence[str], low: float, high: float) -> Named:
    """One storey's façades; sides of one name are one part."""
    strip = ring(at_height(outline, low), at_height(outline, high))
    found: dict[str, list[Shape]] = {}
    for name, polygon in zip(names, strip.polygons, strict=True):
        found.setdefault(f"{storey}/{name}", []).append(Shape(strip.vertices[list(polygon)], ((0, 1, 2, 3),)))
    return {name: joined(*shapes) for name, shapes in found.items()}


WINDOWS = (
    # name, x, y, z, bearing of the outward normal in the model
    ("block-a flat 1.1, living", 6.5, -14, 6.0, 0),
    ("block-a flat 1.4, living", 26, -30, 6.0, 180),
    ("block-a flat 3.4, living", 26, -30, 12.6, 180),
    ("block-a flat 5.4, living", 26, -30, 19.2, 180),
    ("block-a flat 2.2, kitchen", 13, -43, 9.3, 90),
    ("block-a flat 2.7, kitchen", 39, -43, 9.3, 270),
    ("block-b flat 1.2, living", 71, -52, 6.0, 180),
    ("block-b flat 8.2, living", 71, -52, 29.1, 180),
    ("arcade-house, first floor", 64, 19, 8.5, 270),
    ("tilers-court, ground floor", 27, 52, 1.7, 180),
    ("tilers-court, third floor", 27, 52, 11.0, 180),
    ("coopers-row-04, kitchen", 25.8, -71, 1.6, 0),
    ("lantern-hall, east light", -9, 17, 17.5, 90),
)


def windows_csv() -> str:
    """A dozen named windows, their bearings turned to true azimuths."""
    rows = [f'"{name}",{x:g},{y:g},{z:g},{(bearing + NORTH_DEG) % 360:g},90' for name, x, y, z, bearing in WINDOWS]
    return "\n".join(["name,x_m,y_m,z_m,azimuth_deg,tilt_deg", *rows]) + "\n"


WALL_HEIGHT_M = 10.0
"""Of the wall on the equator. It runs north and south; the ground east of it is measured."""


def wall_points_csv() -> str:
    """Level points that lose the sun one, two, ... five hours after noon, on every day of the year.

    On the equator the sun's height in the vertical plane from east to west is 90 degrees less its
    hour angle, whatever its declination. So a wall of height H hides it from the ground at a
    distance D once tan(hour angle) = D / H.
    """
    rows = []
    for hours in range(1, 6):
        away = WALL_HEIGHT_M * np.tan(np.radians(15.0 * hours))
        rows.append(f"until {12 + hours}:00 solar,{away:.6f},0,0,0,0")
    return "\n".join(["name,x_m,y_m,z_m,azimuth_deg,tilt_deg", *rows]) + "\n"


def make(folder: Path) -> None:
    """Write every model and table."""
    invented = "An invented place, made by scripts/make_samples.py."
    new = proposed()
    write(folder / "surroundings.obj", obj_text(surroundings(), [invented, "Metres, z up."]))
    write(folder / "proposed.obj", obj_text(new, [invented, "Metres, z up."]))
    write(folder / "proposed-mm-yup.obj", obj_text(new, [invented, "Millimetres, y up."], mm_y_up=True))
    write(folder / "windows.csv", windows_csv())
    wall = {"wall": box(-0.3, -400, 0, 0, 400, WALL_HEIGHT_M)}
    write(folder / "known-by-hand" / "wall.obj", obj_text(wall, [invented, "Metres, z up."]))
    write(folder / "known-by-hand" / "points.csv", wall_points_csv())


if __name__ == "__main__":
    make(Path(sys.argv[1]) if len(sys.argv) > 1 else FOLDER)
