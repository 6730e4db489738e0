"""A result folder read again for looking at: coloured faces, what stands around them, what to say of them."""

from __future__ import annotations

import json
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from insol.errors import ResultError, did_you_mean, listed
from insol.output.colours import Quantity, Scale, colours_of, scale_for
from insol.output.ply import read_ply

if TYPE_CHECKING:
    import pandas as pd

MONTHS = "January February March April May June July August September October November December".split()


@dataclass(frozen=True)
class ViewData:
    """What pictures and the window show.

    Attributes
    ----------
    folder : the result's
    facts : the content of result.json
    triangles : (t, 3, 3) float64 [m], of the measured faces, relative to `offset`
    face_row : (t,) int32, row of faces.csv
    context : (c, 3, 3) float64 [m], of everything else, relative to `offset`
    offset : (3,) float64 [m], to be added for the model's own coordinates
    """

    folder: Path
    facts: dict[str, Any]
    triangles: NDArray[np.float64]
    face_row: NDArray[np.int32]
    context: NDArray[np.float64]
    offset: NDArray[np.float64]

    @cached_property
    def faces(self) -> pd.DataFrame:
        """The table of the faces."""
        import pandas as pd

        return pd.read_csv(self.folder / "faces.csv", dtype={"part": str, "name": str, "measure": str}, na_filter=True)

    @cached_property
    def spells(self) -> pd.DataFrame:
        """The table of the spells of sun."""
        import pandas as pd

        return pd.read_csv(self.folder / "spells.csv", dtype={"part": str, "name": str, "measure": str})

    @property
    def title(self) -> str:
        return str(self.facts.get("title") or "")

    @property
    def north_deg(self) -> float:
        return float(self.facts["site"]["north_deg"])

    @property
    def northern(self) -> bool:
        """Whether the sun stands in the south at noon."""
        return float(self.facts["site"]["latitude"]) >= 0

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
        facts = json.loads((folder / "result.json").read_text(encoding="utf-8"))
        faces, context = read_ply(folder / "faces.ply"), read_ply(folder / "context.ply")
    except FileNotFoundError as missing:
        raise ResultError(
            f"this is not a result folder: {Path(missing.filename).name} is not there", where=str(folder),
            hint="insol run STUDY --out DIR makes one",
        ) from None  # fmt: skip
    except (OSError, ValueError) as damage:
        raise ResultError(f"the result cannot be read: {damage}", where=str(folder), hint="run again") from damage
    if not len(faces.triangles):
        raise ResultError("the result holds points only, nothing to draw", where=str(folder))
    offset = np.round(faces.triangles.reshape(-1, 3).mean(axis=0))
    return ViewData(
        folder, facts, faces.triangles - offset, faces.values["face_row"], context.triangles - offset, offset
    )


def said(period: dict[str, Any]) -> str:
    """A period in a line: "21 March 2025, 09:00 to 15:00, local time"."""
    first, last = _day(period["first_day"]), _day(period["last_day"])
    days = first if first == last else f"{first} to {last}"
    clock = {"local": "local time", "standard": "standard time", "solar": "true solar time"}[period["clock"]]
    if period.get("from") or period.get("to"):
        return f"{days}, {period.get('from') or '00:00'} to {period.get('to') or '24:00'} {clock}"
    return f"{days}, sunrise to sunset"


def _day(text: str) -> str:
    year, month, day = text.split("-")
    return f"{int(day)} {MONTHS[int(month) - 1]} {year}"
