"""What a study asks: frozen, checked on reading, the same whether it came from a file or from Python."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

Units = Literal["mm", "cm", "m", "in", "ft"]
Up = Literal["z", "y"]
Role = Literal["surroundings", "existing", "proposed", "ground"]
Clock = Literal["local", "standard", "solar"]
Sampling = Literal["auto", "days", "rows", "steps"]

UNITS: tuple[Units, ...] = ("mm", "cm", "m", "in", "ft")
UPS: tuple[Up, ...] = ("z", "y")
ROLES: tuple[Role, ...] = ("surroundings", "existing", "proposed", "ground")
SAMPLINGS: tuple[Sampling, ...] = ("auto", "days", "rows", "steps")
CLOCKS: tuple[Clock, ...] = ("local", "standard", "solar")


@dataclass(frozen=True, kw_only=True)
class Site:
    """A place on earth and how the model lies on it."""

    latitude: float  # [deg] north positive
    longitude: float  # [deg] east positive
    time_zone: str  # IANA name, or an offset such as "+05:30"
    elevation_m: float = 0.0
    north_deg: float = 0.0  # bearing of the model's +y axis, clockwise from true north [deg]


@dataclass(frozen=True, kw_only=True)
class Model:
    """One mesh file and how to take it."""

    file: Path  # as written; relative to the study's folder
    units: Units
    up: Up = "z"
    role: Role = "surroundings"


@dataclass(frozen=True, kw_only=True)
class FacesMeasure:
    """The faces of parts, cut to the spacing. Chosen by name patterns, by roles, or by both."""

    name: str
    spacing_m: float
    parts: tuple[str, ...] = ()  # shell patterns on part names
    roles: tuple[Role, ...] = ()
    kind: Literal["faces"] = "faces"


@dataclass(frozen=True, kw_only=True)
class GroundMeasure:
    """A level grid inside a polygon, or a grid over the upward faces of parts."""

    name: str
    spacing_m: float
    polygon: tuple[tuple[float, float], ...] = ()  # [m], model frame
    height_m: float = 0.0  # level of the polygon's grid; above the parts' faces where parts are given
    parts: tuple[str, ...] = ()
    kind: Literal["ground"] = "ground"


@dataclass(frozen=True, kw_only=True)
class PointsMeasure:
    """Named points from a table: name, x_m, y_m, z_m, azimuth_deg, tilt_deg."""

    name: str
    file: Path
    kind: Literal["points"] = "points"


Measure = FacesMeasure | GroundMeasure | PointsMeasure


@dataclass(frozen=True, kw_only=True)
class Period:
    """Days, a window of the day, the clock they are read by, and the step they are sampled at."""

    name: str
    days: str  # "03-21", "10-01/03-31", "year", "march-equinox", "june-solstice" ...
    year: int
    start: str | None = None  # "09:00" (the key `from`)
    end: str | None = None  # "15:00" (the key `to`)
    clock: Clock = "local"
    step_min: int = 5
    lowest_altitude_deg: float = 0.0  # the sun counts from this altitude up [deg]
    sampling: Sampling = "auto"  # how the sky is asked: see DEVELOPERS.md


@dataclass(frozen=True, kw_only=True)
class Study:
    """Everything a run needs to know, and the folder its paths are relative to."""

    title: str
    site: Site
    models: tuple[Model, ...]
    measures: tuple[Measure, ...]
    periods: tuple[Period, ...]
    hours_per_day: tuple[float, ...] = (1.0, 2.0, 3.0, 4.0)  # the part table tells the share of area above each
    folder: Path = field(default_factory=Path)
    file: Path | None = None  # the study file, when there is one

    def path_of(self, relative: Path) -> Path:
        """Where a file named in the study lies."""
        return self.folder / relative
