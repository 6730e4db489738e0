"""The colour scale against its published table, and the legend's round numbers."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from insol.output.colours import MOST_TICKS, NO_VALUE, NO_VALUE_STRIPE, OVER, Scale, colours_of, scale_for
from insol.output.stage import GREYS

TABLE_STEPS = 2  # of 255: straight lines between seventeen rows stand for a table of 256


def hours_scale(most: float) -> Scale:
    return scale_for("direct_h", np.array([0.0, most]))


def lightness(colours: np.ndarray) -> np.ndarray:
    """CIE 1976 L* of sRGB colours (n, 3) uint8. IEC 61966-2-1 and CIE 15, formulas from memory."""
    share = colours / 255
    linear = np.where(share <= 0.04045, share / 12.92, ((share + 0.055) / 1.055) ** 2.4)
    light = linear @ np.array([0.2126, 0.7152, 0.0722])
    return np.where(light > (6 / 29) ** 3, 116 * np.cbrt(light) - 16, light * (29 / 3) ** 3)


def test_the_scale_is_cividis() -> None:
    """Nuñez, Anderton and Renslow (2018), as matplotlib ships it."""
    matplotlib = pytest.importorskip("matplotlib")
    shares = np.linspace(0, 1, 256)
    published = matplotlib.colormaps["cividis"](shares)[:, :3] * 255
    np.testing.assert_allclose(colours_of(shares * 12, hours_scale(12)), published, rtol=0, atol=TABLE_STEPS)


def test_it_prints_in_grey() -> None:
    """Lightness grows evenly: no hour looks lighter than a later one, none stands out."""
    steps = np.diff(lightness(colours_of(np.linspace(0, 12, 25), hours_scale(12))))
    assert steps.min() > 1.5 and steps.max() < 2 * steps.min()


def test_shade_is_dark_in_both_quantities() -> None:
    fraction = scale_for("shaded_fraction", np.array([]))
    hours = hours_scale(12)
    assert np.array_equal(
        colours_of(np.array([0.0, 0.25, 1.0]), fraction), colours_of(np.array([12.0, 9.0, 0.0]), hours)
    )


def test_faces_without_a_value_are_told_apart() -> None:
    scale = hours_scale(12)
    assert np.array_equal(colours_of(np.array([np.nan]), scale), [NO_VALUE])
    held = colours_of(np.linspace(0, 12, 500), scale).astype(int)
    greys = np.repeat(np.arange(GREYS[0], GREYS[1] + 1)[:, None], 3, axis=1)
    for other in (held, greys):
        assert np.linalg.norm(other - np.array(NO_VALUE), axis=1).min() > 10
    # And without colour: stripes that differ in lightness by more than two neighbouring hours do.
    light, dark = lightness(np.array([NO_VALUE, NO_VALUE_STRIPE], dtype=np.uint8))
    assert light - dark > 20


def test_values_beyond_the_limits_take_the_last_colour() -> None:
    scale = hours_scale(12)
    assert np.array_equal(colours_of(np.array([-1.0, 13.0]), scale), colours_of(np.array([0.0, 12.0]), scale))


@pytest.mark.parametrize(
    ("most", "last", "step"),
    [(12.06, 12, 2), (7.44, 8, 2), (2390, 2400, 400), (4406.8, 5000, 1000), (16.8, 20, 4), (24, 24, 4), (0.0, 1, 0.2)],
)
def test_round_numbers(most: float, last: float, step: float) -> None:
    scale = hours_scale(most)
    assert scale.low == 0 and scale.high == last
    np.testing.assert_allclose(np.diff(scale.ticks), step, rtol=0, atol=1e-9)


@given(most=st.floats(1.0, 20_000.0))
def test_ticks_are_few_and_round_and_hold_all_values(most: float) -> None:
    scale = hours_scale(most)
    steps = np.diff(scale.ticks)
    mantissa = steps[0] / 10.0 ** np.floor(np.log10(steps[0]) + 1e-9)
    assert np.isclose(mantissa, [1, 2, 4, 5], rtol=0, atol=1e-9).any()
    assert np.ptp(steps) < 1e-9 * most and len(scale.ticks) <= MOST_TICKS
    assert scale.high + OVER * steps[0] >= most * (1 - 1e-12)
    assert scale.high - most < steps[0]  # no tick more than needed


def test_nan_does_not_move_the_limits() -> None:
    assert scale_for("direct_h", np.array([np.nan, 11.0])) == hours_scale(11.0)
    assert scale_for("direct_h", np.array([np.nan])) == hours_scale(0.0)
