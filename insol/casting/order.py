"""The order in which points are cast: neighbours together, so that their rays meet the same triangles."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

BITS = 16
"""Of each coordinate in the Morton code: a 65,536th of the scene's width."""


def coherent_order(points: NDArray[np.float64], group: NDArray[np.integer]) -> NDArray[np.int64]:
    """A permutation (n,) that sorts by group and, within it, along a space-filling curve.

    Parameters
    ----------
    points : (n, 3) float64 [m]
    group : (n,) int, what has to stay together: the orientation of the faces
    """
    if not len(points):
        return np.empty(0, dtype=np.int64)
    low = points.min(axis=0)
    width = max(float((points.max(axis=0) - low).max()), 1e-9)
    cells = ((points - low) / width * (2**BITS - 1)).astype(np.uint64)
    code = _spread(cells[:, 0]) | (_spread(cells[:, 1]) << np.uint64(1)) | (_spread(cells[:, 2]) << np.uint64(2))
    return np.lexsort((code, group)).astype(np.int64)


def _spread(values: NDArray[np.uint64]) -> NDArray[np.uint64]:
    """Two zero bits put between the bits of each value (Morton, 1966)."""
    for shift, mask in ((32, 0x1F00000000FFFF), (16, 0x1F0000FF0000FF), (8, 0x100F00F00F00F00F),
                        (4, 0x10C30C30C30C30C3), (2, 0x1249249249249249)):  # fmt: skip
        values = (values | (values << np.uint64(shift))) & np.uint64(mask)
    return values
