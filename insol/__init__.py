"""Hours of direct sun and shade on building meshes.

The public names, in the order in which the data flows:

load_study   a study file read and checked
run          models, sun, casting, hours, and the result folder
Study, Site, Model, FacesMeasure, GroundMeasure, PointsMeasure, Period   a study made in Python
Results      faces, hours and tables of a run
InsolError   what every error of this program is
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from insol.errors import InputError, InsolError
    from insol.output.results import PeriodResult, Results
    from insol.pipeline import run
    from insol.study.description import FacesMeasure, GroundMeasure, Model, Period, PointsMeasure, Site, Study
    from insol.study.reading import load_study

__version__ = "0.1.0"

_HOMES = {
    "load_study": "insol.study.reading",
    "Study": "insol.study.description",
    "Site": "insol.study.description",
    "Model": "insol.study.description",
    "FacesMeasure": "insol.study.description",
    "GroundMeasure": "insol.study.description",
    "PointsMeasure": "insol.study.description",
    "Period": "insol.study.description",
    "run": "insol.pipeline",
    "Results": "insol.output.results",
    "PeriodResult": "insol.output.results",
    "InsolError": "insol.errors",
    "InputError": "insol.errors",
}

__all__ = [
    "FacesMeasure", "GroundMeasure", "InputError", "InsolError", "Model", "Period", "PeriodResult",
    "PointsMeasure", "Results", "Site", "Study", "load_study", "run",
]  # fmt: skip


def __getattr__(name: str) -> object:
    """Import a public name when it is first used, so that the command line starts at once."""
    if name not in _HOMES:
        raise AttributeError(f"module 'insol' has no attribute '{name}'")
    return getattr(import_module(_HOMES[name]), name)
