"""Means of neighbours, from centres to faces."""

from __future__ import annotations

import numpy as np
import pytest

from oceanbox.grid import Grid
from tests.grid.places import CHANNEL, GRIDS, WALLS, any_centres

on_both = pytest.mark.parametrize("grid", GRIDS.values(), ids=GRIDS.keys())


@on_both
def test_a_face_between_two_cells_has_their_arithmetic_mean(grid: Grid) -> None:
    field = any_centres(grid)
    on_x, on_y = grid.average_centres_to_x_faces(field), grid.average_centres_to_y_faces(field)
    assert on_x.shape == (2, grid.ny, grid.nx + 1) and on_y.shape == (2, grid.ny + 1, grid.nx)
    assert on_x[..., 1:-1] == pytest.approx(0.5 * (field[..., 1:] + field[..., :-1]))
    assert on_y[:, 1:-1] == pytest.approx(0.5 * (field[:, 1:] + field[:, :-1]))


def test_a_wall_has_the_value_of_its_one_neighbour() -> None:
    field = any_centres(WALLS)
    on_x, on_y = WALLS.average_centres_to_x_faces(field), WALLS.average_centres_to_y_faces(field)
    assert np.array_equal(on_x[..., [0, -1]], field[..., [0, -1]])
    assert np.array_equal(on_y[:, [0, -1]], field[:, [0, -1]])


def test_the_seam_of_a_channel_lies_between_its_last_and_its_first_cell() -> None:
    field = any_centres(CHANNEL)
    on_x = CHANNEL.average_centres_to_x_faces(field)
    assert on_x[..., 0] == pytest.approx(0.5 * (field[..., -1] + field[..., 0]))
    assert np.array_equal(on_x[..., -1], on_x[..., 0])


@on_both
def test_a_uniform_field_stays_uniform(grid: Grid) -> None:
    uniform = np.full((grid.ny, grid.nx), 0.1)
    assert np.array_equal(grid.average_centres_to_x_faces(uniform), np.full((grid.ny, grid.nx + 1), 0.1))
    assert np.array_equal(grid.average_centres_to_y_faces(uniform), np.full((grid.ny + 1, grid.nx), 0.1))


def test_a_linear_field_is_exact_between_cells() -> None:
    """The mean is of second order: a slope is seen at the face itself."""
    slope = 2.0 + 3e-6 * WALLS.x[None, :] - 5e-6 * WALLS.y[:, None]
    on_x, on_y = WALLS.average_centres_to_x_faces(slope), WALLS.average_centres_to_y_faces(slope)
    assert on_x[:, 1:-1] == pytest.approx(2.0 + 3e-6 * WALLS.x_face[None, 1:-1] - 5e-6 * WALLS.y[:, None])
    assert on_y[1:-1] == pytest.approx(2.0 + 3e-6 * WALLS.x[None, :] - 5e-6 * WALLS.y_face[1:-1, None])
