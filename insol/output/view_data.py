"""A result folder read again for looking at: coloured faces, what stands around them, what to say of them."""

from __future__ import annotations

import json
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from insol.conventions import normals_from
from insol.errors import ResultError, did_you_mean, listed, printable
from insol.output.colours import Quantity, Scale, colours_of, scale_for
from insol.output.ply import ColouredMesh, read_ply

if TYPE_CHECKING:
    import pandas as pd

COLUMNS = "measure part face name x_m y_m z_m azimuth_deg tilt_deg area_m2 status".split()
CLOCKS = {"local": "local time", "standard": "standard time", "solar": "true solar time"}
DISC_CORNERS = 12
DISC_SHARE, DISC_M = 0.004, (0.25, 1.0)
"""A measured point is drawn as a disc: its radius over the size of what is measured, and its limits [m]."""

DISC_LIFT_M = 0.05
"""How far the disc stands before the point, so that a wall which the point lies on does not swallow it."""

MONTHS = "January February March April May June July August September October November December".split()


@dataclass(frozen=True)
class ViewData:
    """What pictures and the window show.

    Attributes
    ----------
    folder : the result's
    facts : the content of result.json
    faces : faces.csv
    triangles : (t, 3, 3) float64 [m], of the measured faces, relative to `offset`; a measured point is a disc
    face_row : (t,) int32, row of faces.csv
    context : (c, 3, 3) float64 [m], of everything else, relative to `offset`
    offset : (3,) float64 [m], to be added for the model's own coordinates
    """

    folder: Path
    facts: dict[str, Any]
    faces: pd.DataFrame
    triangles: NDArray[np.float64]
    face_row: NDArray[np.int32]
    context: NDArray[np.float64]
    offset: NDArray[np.float64]

    @cached_property
    def spells(self) -> pd.DataFrame:
        """The table of the spells of sun."""
        return _table(self.folder / "spells.csv")

    @property
    def title(self) -> str:
        return printable(str(self.facts.get("title") or self.folder.name))

    @property
    def north_deg(self) -> float:
        return float(self._site.get("north_deg") or 0.0)

    @property
    def northern(self) -> bool:
        """Whether the sun stands in the south at noon."""
        return float(self._site.get("latitude") or 0.0) >= 0

    @property
    def place(self) -> str:
        """Where it is: "52.35° N, 1.05° E"; empty where the result does not say."""
        latitude, longitude = self._site.get("latitude"), self._site.get("longitude")
        if latitude is None or longitude is None:
            return ""
        return f"{abs(latitude):.2f}° {'SN'[latitude >= 0]}, {abs(longitude):.2f}° {'WE'[longitude >= 0]}"

    @property
    def _site(self) -> dict[str, Any]:
        return dict(self.facts.get("site") or {})

    @property
    def period_names(self) -> list[str]:
        return [period["name"] for period in self.facts["periods"]]

    def period(self, name: str | None) -> dict[str, Any]:
        """What result.json says of a period; the first one for None.

        Raises
        ------
        ResultError
            The result has no such period.
        """
        if name is None:
            return dict(self.facts["periods"][0])
        for period in self.facts["periods"]:
            if period["name"] == name:
                return dict(period)
        raise ResultError(
            f'the result has no period "{name}"; it has {listed(self.period_names)}',
            where=str(self.folder), hint=did_you_mean(name, self.period_names),
        )  # fmt: skip

    def values(self, period: str, quantity: Quantity) -> NDArray[np.float64]:
        """A quantity of every face, NaN where there is none."""
        return self.faces[f"{period}_{quantity}"].to_numpy(dtype=np.float64)

    def scale(self, period: str, quantity: Quantity) -> Scale:
        """The colour scale of a period: the same whatever faces are in sight."""
        return scale_for(quantity, self.faces[f"{period}_possible_h"].to_numpy(dtype=np.float64))

    def colours(self, period: str, quantity: Quantity) -> NDArray[np.uint8]:
        """Colour (t, 3) of each triangle."""
        return colours_of(self.values(period, quantity), self.scale(period, quantity))[self.face_row]


def load_view(folder: Path) -> ViewData:
    """Read a result folder.

    Raises
    ------
    ResultError
        It is none, or holds no face that can be drawn.
    """
    try:
        facts = _facts(folder / "result.json")
        mesh, context = read_ply(folder / "faces.ply"), read_ply(folder / "context.ply")
        faces = _table(folder / "faces.csv")
    except FileNotFoundError as missing:
        raise ResultError(
            f"this is not a result folder: {Path(missing.filename).name} is not there", where=str(folder),
            hint="insol run STUDY --out DIR makes one",
        ) from None  # fmt: skip
    except (OSError, ValueError) as damage:
        raise ResultError(f"the result cannot be read: {damage}", where=str(folder), hint="run again") from damage
    _check(faces, mesh, facts, folder)
    north_deg = float((facts.get("site") or {}).get("north_deg") or 0.0)
    discs, disc_row = point_discs(faces, mesh.values["face_row"], north_deg)
    triangles = np.concatenate([mesh.triangles, discs])
    face_row = np.concatenate([mesh.values["face_row"], disc_row])
    offset = np.round(triangles.reshape(-1, 3).mean(axis=0))
    return ViewData(folder, facts, faces, triangles - offset, face_row, context.triangles - offset, offset)


def point_discs(
    faces: pd.DataFrame, face_row: NDArray[np.int32], north_deg: float
) -> tuple[NDArray[np.float64], NDArray[np.int32]]:
    """Discs for the rows that no triangle draws: the measured points.

    Returns
    -------
    triangles : (d, 3, 3) float64 [m]
    row : (d,) int32
    """
    undrawn = faces["area_m2"].to_numpy() == 0
    undrawn[face_row] = False
    rows = np.flatnonzero(undrawn).astype(np.int32)
    places = faces[["x_m", "y_m", "z_m"]].to_numpy(dtype=np.float64)
    size = float(np.linalg.norm(np.ptp(places, axis=0)))
    azimuth, tilt = (faces[name].to_numpy(dtype=np.float64)[rows] for name in ("azimuth_deg", "tilt_deg"))
    normals = normals_from(np.nan_to_num(azimuth), tilt, north_deg)
    across = normals_from(np.nan_to_num(azimuth) + 90.0, np.full(len(rows), 90.0), north_deg)
    turn = np.linspace(0.0, 2 * np.pi, DISC_CORNERS + 1)[:, None, None]
    rim = (np.cos(turn) * across + np.sin(turn) * np.cross(normals, across)) * np.clip(DISC_SHARE * size, *DISC_M)
    centre = places[rows] + DISC_LIFT_M * normals
    wedges = [np.stack([centre, centre + one, centre + other], axis=1) for one, other in pairwise(rim)]
    return np.stack(wedges, axis=1).reshape(-1, 3, 3), np.repeat(rows, DISC_CORNERS)


def _facts(path: Path) -> dict[str, Any]:
    """The content of result.json.

    Raises
    ------
    ValueError
        It is not what a run writes.
    """
    facts = json.loads(path.read_text(encoding="utf-8"))
    periods = facts.get("periods") if isinstance(facts, dict) else None
    if not (isinstance(periods, list) and periods and all(isinstance(p, dict) and "name" in p for p in periods)):
        raise ValueError(f"{path.name} names no period")
    return dict(facts)


def _table(path: Path) -> pd.DataFrame:
    import pandas as pd

    # A part may be called "NA" or "null": only what is empty is no value.
    return pd.read_csv(
        path, dtype={"part": str, "name": str, "measure": str}, keep_default_na=False, na_values=[""], encoding="utf-8"
    )


def _check(faces: pd.DataFrame, mesh: ColouredMesh, facts: dict[str, Any], folder: Path) -> None:
    """Say no to files that do not belong together.

    Raises
    ------
    ResultError
        A column is missing, or the mesh names faces that the table does not hold.
    """
    needed = [*COLUMNS, *(f"{period['name']}_{column}" for period in facts["periods"]
              for column in ("direct_h", "possible_h", "shaded_fraction", "error_h"))]  # fmt: skip
    missing = [name for name in needed if name not in faces.columns]
    if missing:
        raise ResultError(f"faces.csv has no column {listed(missing, most=3)}", where=str(folder), hint="run again")
    rows = mesh.values.get("face_row")
    if rows is None or (len(rows) and not 0 <= rows.min() <= rows.max() < len(faces)):
        raise ResultError("faces.ply and faces.csv do not belong together", where=str(folder), hint="run again")
    if not len(faces):
        raise ResultError("the result holds no faces", where=str(folder))


def said(period: dict[str, Any]) -> str:
    """A period in a line: "21 March 2025, 09:00 to 15:00, local time"."""
    days = _days(*(str(period.get(key) or "") for key in ("first_day", "last_day"))) or str(period.get("days") or "")
    clock = CLOCKS.get(str(period.get("clock")), "")
    if period.get("from") or period.get("to"):
        return f"{days}, {period.get('from') or '00:00'} to {period.get('to') or '24:00'} {clock}".rstrip()
    return f"{days}, sunrise to sunset"


def _days(first: str, last: str) -> str:
    if not first or not last:
        return ""
    if (first[4:], last[4:]) == ("-01-01", "-12-31") and first[:4] == last[:4]:
        return f"all of {first[:4]}"
    return _day(first) if first == last else f"{_day(first)} to {_day(last)}"


def _day(text: str) -> str:
    try:
        year, month, day = text.split("-")
        return f"{int(day)} {MONTHS[int(month) - 1]} {year}"
    except (ValueError, IndexError):
        return text


def shortened(text: str, most: int) -> str:
    """A text of so many letters at most.

    >>> shortened("Lantern Square", 8)
    'Lantern…'
    """
    return text if len(text) <= most else text[: most - 1].rstrip() + "…"
