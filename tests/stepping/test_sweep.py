"""A step sweeps the basin in bands of rows; what it does to a row does not depend on how the rows are cut into bands."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from oceanbox.experiment.model import Model
from oceanbox.stepping.memory import FEWEST_BELT_ROWS, MOST_BELT_ROWS, belt_rows, empty_workspace
from tests.physics.layered import fill, layered_box, random_fields, roughly
from tests.stepping.test_compiled_equals_plain import CASES, stirred

STEPS = 5
SWEPT = [case for case in CASES if "Runge" not in case]
# Belts shorter than the basin, of all sizes that make bands of other heights; the last holds every row.
ROWS = [4, 8, 16]
ALL_ROWS = 64


def swept(model: Model, rows: int) -> dict[str, Any]:
    """Every array of the model after some steps with belts of ``rows`` places, the last with cells running empty if they can."""
    model._work = empty_workspace(model.grid, model.state.thickness.shape[0], rows)
    model.advance(STEPS)
    if model.constants.linear_depth == 0.0:
        model.state.velocity_x[...] *= 100.0
        model.state.velocity_y[...] *= 100.0
        model.advance(2)
    return model.arrays()


def two_layers() -> Model:
    model = layered_box(2, {"basin.cells_x": 5, "basin.cells_y": 13})
    fill(model, random_fields(model.grid, 2, roughly(np.random.default_rng(5))))
    return model


@pytest.mark.parametrize("rows", ROWS)
@pytest.mark.parametrize("case", SWEPT)
def test_bands_of_any_height_give_the_same_bits(case: str, rows: int) -> None:
    """State, memory and books, to the last bit, with every closure, in a channel, in linear dynamics, beyond the limiter."""
    found, expected = swept(stirred(CASES[case]), rows), swept(stirred(CASES[case]), ALL_ROWS)
    for name, array in expected.items():
        assert np.isfinite(array).all(), name
        assert np.array_equal(found[name], array), name


@pytest.mark.parametrize("rows", ROWS)
def test_bands_of_any_height_give_the_same_bits_in_two_layers(rows: int) -> None:
    """As above, where each layer presses on the other."""
    found, expected = swept(two_layers(), rows), swept(two_layers(), ALL_ROWS)
    assert all(np.array_equal(found[name], array) for name, array in expected.items())


@pytest.mark.parametrize("columns", [8, 44, 124, 964, 4004])
def test_the_places_of_a_belt_are_a_power_of_two_within_bounds(columns: int) -> None:
    """Rows lie at their number modulo the places, found with a mask."""
    rows = belt_rows(columns, layers=1)
    assert FEWEST_BELT_ROWS <= rows <= MOST_BELT_ROWS
    assert rows & (rows - 1) == 0
