"""Named checks of arrays, used once, at the boundary; after them a type means "checked"."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from insol.errors import InputError


def read_only(array: Any, dtype: Any, shape: tuple[int | None, ...], name: str) -> NDArray[Any]:
    """The array as `dtype`, contiguous and read-only; None in `shape` stands for any length.

    A view of the caller's array where nothing had to change: the caller's own handle stays writable.

    Raises
    ------
    InputError
        The shape is another one.
    """
    checked = np.ascontiguousarray(array, dtype=dtype).view()
    fits = checked.ndim == len(shape) and all(
        want is None or have == want for have, want in zip(checked.shape, shape, strict=True)
    )
    if not fits:
        wanted = "(" + ", ".join("n" if want is None else str(want) for want in shape) + ")"
        raise InputError(f"{name} has the shape {checked.shape}, not {wanted}")
    checked.flags.writeable = False
    return checked


def finite(array: NDArray[Any], name: str) -> NDArray[Any]:
    """The array itself, when no value in it is NaN or infinite."""
    bad: Any = np.flatnonzero(~np.isfinite(array).reshape(len(array), -1).all(axis=1)) if len(array) else []
    if len(bad):
        raise InputError(f"{name}: row {int(bad[0]) + 1} is not a finite number")
    return array


def indices_within(array: NDArray[Any], length: int, name: str) -> NDArray[Any]:
    """The array itself, when every index in it lies in [0, length)."""
    if array.size and (array.min() < 0 or array.max() >= length):
        raise InputError(f"{name} points outside 0 to {length - 1}")
    return array
