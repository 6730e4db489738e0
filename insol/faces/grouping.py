"""Small tools of grouping: nearly equal rows, connected things, runs of equal numbers."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Flags = NDArray[np.bool_]


def connected_labels(count: int, first: Ints, second: Ints) -> Ints:
    """A number (count,) for each thing, equal for things that a chain of pairs connects."""
    links = coo_array((np.ones(len(first), dtype=np.int8), (first, second)), shape=(count, count))
    labels: Ints = connected_components(links, directed=False)[1].astype(np.int64)
    return labels


def near_labels(rows: Floats, tolerance: float) -> Ints:
    """A number (n,) for each row (n, k), equal for rows that agree within the tolerance in every column.

    Rows in a chain of small steps get one number, so nothing is parted by where a rounding step falls.
    """
    labels = np.zeros(len(rows), dtype=np.int64)
    for column in (*rows.T, *rows.T):  # twice: a column may part a chain that an earlier one left whole
        order = np.lexsort((column, labels))
        parted = (np.diff(labels[order]) != 0) | (np.diff(column[order]) > tolerance)
        labels[order[1:]] = np.cumsum(parted)
        labels[order[:1]] = 0
    return labels


def run_starts(sorted_numbers: Ints) -> Ints:
    """Where each run of equal numbers begins."""
    return np.flatnonzero(np.diff(sorted_numbers, prepend=sorted_numbers[:1] - 1))


def spread_out(first: Ints, count: Ints) -> tuple[Ints, Ints]:
    """The numbers first, first + 1, ... of each range, and the range that each belongs to.

    >>> spread_out(np.array([4, 9]), np.array([2, 1]))
    (array([4, 5, 9]), array([0, 0, 1]))
    """
    owner = np.repeat(np.arange(len(first)), count)
    begins = np.cumsum(count) - count
    return first[owner] + np.arange(len(owner)) - begins[owner], owner


def largest_of_each(labels: Ints, sizes: Floats) -> tuple[Ints, Ints]:
    """The labels that occur, ascending, and the index of the largest thing under each; ties: the first."""
    order = np.lexsort((np.arange(len(labels)), -sizes, labels))
    starts = run_starts(labels[order])
    return labels[order][starts], order[starts]
