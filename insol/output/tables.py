"""The tables: every face, every part, every spell."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from insol.conventions import azimuth_tilt
from insol.faces.model import MEASURED, STATUS_NAMES, Faces
from insol.measures.by_days import Spells
from insol.measures.sun_hours import SunHours
from insol.scene.model import Scene

if TYPE_CHECKING:
    import pandas as pd

DECIMALS = {"_m": 4, "_m2": 4, "_deg": 3, "_h": 4, "_fraction": 4, "_share": 4, "minutes": 3}
"""Digits written: a tenth of a millimetre, a third of a second."""

FORMULA_BEGINS = ("=", "+", "-", "@", "\t", "\r")


def faces_table(scene: Scene, faces: Faces, hours: Mapping[str, SunHours], north_deg: float) -> pd.DataFrame:
    """One row a face: where it lies, which way it faces, and the hours of each period."""
    import pandas as pd

    points = faces.points + scene.origin
    azimuth, tilt = azimuth_tilt(faces.normals, north_deg)
    columns: dict[str, object] = {
        "measure": named(faces.measure, faces.measure_names),
        "part": part_names(scene, faces.part),
        "face": faces.number,
        "name": np.array(faces.names, dtype=object),
        "x_m": points[:, 0],
        "y_m": points[:, 1],
        "z_m": points[:, 2],
        "azimuth_deg": azimuth,
        "tilt_deg": tilt,
        "area_m2": faces.areas,
        "status": named(faces.status.astype(np.int32), STATUS_NAMES),
    }
    for name, period in hours.items():
        columns[f"{name}_direct_h"] = period.direct_h
        columns[f"{name}_possible_h"] = period.possible_h
        columns[f"{name}_shaded_fraction"] = period.shaded_fraction
        columns[f"{name}_error_h"] = period.error_h
    return pd.DataFrame(columns)


def parts_table(
    scene: Scene,
    faces: Faces,
    hours: Mapping[str, SunHours],
    days: Mapping[str, int],
    hours_per_day: Sequence[float],
) -> pd.DataFrame:
    """One row a measure, part and period: area-weighted means, extremes, share of area above hours a day."""
    import pandas as pd

    measured = np.flatnonzero(faces.status == MEASURED)
    keys = faces.measure[measured].astype(np.int64) * (len(scene.parts) + 1) + faces.part[measured] + 1
    present, group = np.unique(keys, return_inverse=True)
    first = measured[np.unique(group, return_index=True)[1]] if len(measured) else measured
    # Points have no area; each counts as much as another.
    weight = np.where(faces.areas[measured] > 0, faces.areas[measured], 1.0)
    frames = []
    for name, period in hours.items():
        direct, possible = period.direct_h[measured], period.possible_h[measured]
        frame = pd.DataFrame({
            "measure": named(faces.measure[first], faces.measure_names),
            "part": part_names(scene, faces.part[first]),
            "period": name,
            "faces": np.bincount(group, minlength=len(present)),
            "area_m2": np.bincount(group, faces.areas[measured], minlength=len(present)),
            "mean_direct_h": weighted_mean(direct, weight, group, len(present)),
            "min_direct_h": least(direct, group, len(present)),
            "max_direct_h": -least(-direct, group, len(present)),
            "mean_possible_h": weighted_mean(possible, weight, group, len(present)),
            "max_error_h": -least(-period.error_h[measured], group, len(present)),
        })  # fmt: skip
        frame["shaded_fraction"] = 1 - _ratio(frame["mean_direct_h"], frame["mean_possible_h"])
        for threshold in hours_per_day:
            enough = (direct >= threshold * days[name]).astype(float)
            frame[f"from_{threshold:g}h_a_day_share"] = weighted_mean(enough, weight, group, len(present))
        frames.append(frame)
    return pd.concat(frames, ignore_index=True)


def spells_table(
    scene: Scene,
    faces: Faces,
    period: str,
    spells: Spells,
    begin: Sequence[str],
    end: Sequence[str],
    date: Sequence[str],
) -> pd.DataFrame:
    """One row a spell of sun of a one-day period; `begin`, `end` and `date` are read off the period's clock."""
    import pandas as pd

    face = spells.receptor
    return pd.DataFrame({
        "measure": named(faces.measure[face], faces.measure_names),
        "part": part_names(scene, faces.part[face]),
        "face": faces.number[face],
        "name": np.array(faces.names, dtype=object)[face] if len(face) else np.array([], dtype=object),
        "period": period,
        "date": date,
        "begin": begin,
        "end": end,
        "minutes": (spells.end - spells.begin) / 60,
    })  # fmt: skip


def write_csv(table: pd.DataFrame, path: Path) -> None:
    """Write a table as UTF-8 CSV with a dot for the decimal mark; nothing where there is no value."""
    import pandas as pd

    rounded = table.round({name: digits for name in table.columns if (digits := decimals_of(name)) is not None})
    for name in rounded.columns:
        if not pd.api.types.is_numeric_dtype(rounded[name]):
            rounded[name] = _harmless(rounded[name])
    rounded.to_csv(path, index=False, encoding="utf-8", lineterminator="\n")


def decimals_of(column: str) -> int | None:
    """How many digits a column is written with, by the unit its name ends in."""
    return next((digits for ending, digits in DECIMALS.items() if column.endswith(ending)), None)


def named(index: NDArray[np.int32], names: Sequence[str]) -> NDArray[np.object_]:
    """The names that indices stand for."""
    return np.array([*names, ""], dtype=object)[index]


def part_names(scene: Scene, part: NDArray[np.int32]) -> NDArray[np.object_]:
    """Names of parts, "" for -1: the face belongs to none."""
    return named(part, [part.name for part in scene.parts])


def weighted_mean(
    values: NDArray[np.float64], weight: NDArray[np.float64], group: NDArray[np.int64], count: int
) -> NDArray[np.float64]:
    """Mean of values by group, weighted."""
    return np.bincount(group, values * weight, minlength=count) / np.bincount(group, weight, minlength=count)


def least(values: NDArray[np.float64], group: NDArray[np.int64], count: int) -> NDArray[np.float64]:
    """Smallest value by group."""
    found = np.full(count, np.inf)
    np.minimum.at(found, group, values)
    return found


def _ratio(part: pd.Series, whole: pd.Series) -> pd.Series:
    return (part / whole.where(whole > 0)).clip(0, 1)


def _harmless(texts: pd.Series) -> pd.Series:
    """Names as they are, but none that a spreadsheet would take for a formula."""
    risky = {text: f"'{text}" for text in texts.unique() if str(text)[:1] in FORMULA_BEGINS}
    return texts.replace(risky) if risky else texts
