"""The choice of an engine."""

from __future__ import annotations

from importlib.util import find_spec
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from insol.casting.contract import Caster
from insol.errors import MissingPackage

EngineChoice = Literal["auto", "embree", "numpy"]


def build(vertices: NDArray[np.float64], triangles: NDArray[np.int32], engine: EngineChoice = "auto") -> Caster:
    """A caster over a scene: (v, 3) float64 local [m], (t, 3) int32.

    Raises
    ------
    MissingPackage
        Embree was asked for by name and is not installed.
    """
    if engine == "embree" and not has_embree():
        raise MissingPackage("the engine embree is not installed", hint="pip install embreex, or --engine numpy")
    if engine == "numpy" or not has_embree():
        from insol.casting.plain import NumpyCaster

        return NumpyCaster(vertices, triangles)
    from insol.casting.embree import EmbreeCaster

    return EmbreeCaster(vertices, triangles)


def has_embree() -> bool:
    """Whether embreex can be imported here."""
    return find_spec("embreex") is not None
