"""Crossing sides, against shapely's own verdict."""

from __future__ import annotations

import pytest
import shapely
from hypothesis import example, given
from hypothesis import strategies as st

from insol.study.polygons import MOST_CORNERS, fault_of, first_crossing

# Few coordinates, so that corners, sides and lines meet often.
grid = st.tuples(st.integers(0, 4), st.integers(0, 4)).map(lambda corner: (float(corner[0]), float(corner[1])))


@given(st.lists(grid, min_size=3, max_size=8))
@example([(0.0, 0.0), (4.0, 0.0), (2.0, 0.0), (2.0, 3.0)])  # a side folded back on the one before
@example([(0.0, 0.0), (4.0, 0.0), (4.0, 4.0), (2.0, 0.0), (0.0, 4.0)])  # a corner on a side
def test_faults_are_those_that_shapely_finds(corners: list[tuple[float, float]]) -> None:
    """shapely (GEOS) follows the OGC's Simple Features: a valid ring is simple and bounds an area."""
    repeated = any(corner == corners[index - 1] for index, corner in enumerate(corners))
    assert (fault_of(corners) == "") == (shapely.Polygon(corners).is_valid and not repeated)


def test_a_national_grid_costs_no_digits() -> None:
    east, north = 4_468_298.25, 5_333_102.75
    square = [(east, north), (east + 0.01, north), (east + 0.01, north + 0.01), (east, north + 0.01)]
    assert first_crossing(square) is None
    assert first_crossing([square[0], square[2], square[1], square[3]]) is not None


def test_the_crossing_sides_are_named() -> None:
    assert fault_of([(0, 0), (2, 2), (2, 0), (0, 2)]) == (
        "crosses or touches itself: side 1 from [0, 0] to [2, 2] and side 3 from [2, 0] to [0, 2]"
    )


def test_thousands_of_corners_are_checked_in_time() -> None:
    from math import cos, pi, sin

    turns = [2 * pi * index / MOST_CORNERS for index in range(MOST_CORNERS)]
    assert fault_of([(cos(turn), sin(turn)) for turn in turns]) == ""
    assert "the most that are taken are" in fault_of([(cos(turn), sin(turn)) for turn in [*turns, 0.1]])


@pytest.mark.parametrize("corners", [[], [(0.0, 0.0)], [(0.0, 0.0), (1.0, 1.0)]])
def test_three_corners_are_needed(corners: list[tuple[float, float]]) -> None:
    assert "a polygon needs three" in fault_of(corners)
