"""What an engine answers: is the sky open from here in this direction, and what is met first.

An engine knows triangles and rays, nothing of dates, parts or rules. Origins have been moved off
their surface already and are relative to the scene's local origin; directions are unit vectors
towards the sun. A ray has no end and begins at its origin.
"""

from __future__ import annotations

from typing import Protocol

import numpy as np
from numpy.typing import NDArray

Origins = NDArray[np.float32]
Answers = NDArray[np.bool_]


class Caster(Protocol):
    """One scene, built once, asked many times, from any number of threads at once."""

    engine: str  # "embree" or "numpy"
    triangle_count: int

    def blocked(self, origins: Origins, direction: NDArray[np.float64]) -> Answers:
        """Whether anything stands in the one `direction` (3,) from each of `origins` (n, 3)."""
        ...

    def blocked_each(self, origins: Origins, directions: NDArray[np.float32]) -> Answers:
        """Whether anything stands in its own direction (n, 3) from each of `origins` (n, 3)."""
        ...

    def first(self, origins: Origins, directions: NDArray[np.float32]) -> NDArray[np.int32]:
        """The triangle (n,) met first by each ray, -1 where the sky is open."""
        ...
