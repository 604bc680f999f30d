"""Round levels, degrees, stacks."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from matplotlib.figure import Figure

from oceanbox.figures.axes import label_latitude, north_south, round_levels, split


@given(
    low=st.floats(-1e4, 1e4),
    extent=st.floats(1e-3, 1e4),
)
def test_levels_are_round_evenly_spaced_and_enclose_the_range(low: float, extent: float) -> None:
    levels = round_levels(low, low + extent, 14)
    step = levels[1] - levels[0]
    tolerance = 1e-9 * max(abs(low), extent)  # ticks are multiples of the step, with round-off of their own size
    np.testing.assert_allclose(np.diff(levels), step, rtol=0, atol=tolerance)
    mantissa = step / 10 ** np.floor(np.log10(step) + 1e-6)
    assert min(abs(mantissa - round_one) for round_one in (1, 2, 5, 10)) < 1e-3
    assert levels[0] <= low + tolerance
    assert levels[-1] >= low + extent - tolerance
    assert levels[1] > low - tolerance  # none to spare at either end
    assert levels[-2] < low + extent + tolerance
    # A range of at most 14 steps lies in 15 of them; the next finer step, 2.5 times smaller, was too small.
    assert 14 / 2.5 + 1 <= levels.size <= 15 + 1


def test_levels_of_a_uniform_field_enclose_its_value() -> None:
    for value in (150.0, 0.0, -3.0):
        levels = round_levels(value, value, 14)
        assert levels[0] <= value <= levels[-1]
        assert levels.size >= 2


@pytest.mark.parametrize(("latitude", "text"), [(0.0, "0°"), (30.0, "30°N"), (-15.0, "15°S"), (2.5, "2.5°N")])
def test_latitudes_are_written_with_their_hemisphere(latitude: float, text: str) -> None:
    assert north_south(latitude) == text


def test_a_latitude_axis_has_a_handful_of_round_ticks() -> None:
    figure = Figure()
    ax = figure.add_subplot()
    label_latitude(ax, "y", -45.0, 45.0)
    ticks = [tick for tick in ax.get_yticks() if -45 <= tick <= 45]
    assert ticks == [-45, -30, -15, 0, 15, 30, 45]


def test_a_stack_fills_its_frame_and_shares_one_x_axis() -> None:
    figure = Figure()
    frame = figure.add_subplot()
    stack = split(frame, (2.0, 1.0))
    figure.draw_without_rendering()
    outer = frame.get_position()
    boxes = [ax.get_position() for ax in stack]
    assert boxes[0].y1 == pytest.approx(outer.y1)
    assert boxes[1].y0 == pytest.approx(outer.y0)
    assert boxes[0].y0 > boxes[1].y1
    assert boxes[0].height == pytest.approx(2 * boxes[1].height)
    assert [box.width for box in boxes] == pytest.approx([outer.width] * 2)
    stack[1].set_xlim(3.0, 7.0)
    assert stack[0].get_xlim() == (3.0, 7.0)
