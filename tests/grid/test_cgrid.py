"""Where the points of the grid are, and what the Coriolis parameter is there."""

from __future__ import annotations

import numpy as np
import pytest

from oceanbox.constants import EARTH_RADIUS_M
from oceanbox.grid import HALO, build_grid, to_degrees
from tests.building import box_config
from tests.grid.places import WALLS


def test_centres_lie_midway_between_faces() -> None:
    assert 0.5 * (WALLS.x_face[1:] + WALLS.x_face[:-1]) == pytest.approx(WALLS.x)
    assert 0.5 * (WALLS.y_face[1:] + WALLS.y_face[:-1]) == pytest.approx(WALLS.y)


def test_walls_are_faces() -> None:
    """x is measured from the western wall, y from the origin of the beta-plane."""
    assert WALLS.x_face[[0, -1]] == pytest.approx([0.0, 5 * 100e3])
    assert WALLS.y_face[[0, -1]] == pytest.approx([-60e3, -60e3 + 4 * 40e3])
    assert (WALLS.x.size, WALLS.x_face.size, WALLS.y.size, WALLS.y_face.size) == (5, 6, 4, 5)


def test_a_degree_is_an_arc_of_the_earth() -> None:
    assert to_degrees(np.array([0.0, np.pi * EARTH_RADIUS_M / 180.0])) == pytest.approx([0.0, 1.0])
    assert WALLS.latitude == pytest.approx(np.degrees(WALLS.y / EARTH_RADIUS_M))
    assert WALLS.longitude == pytest.approx(np.degrees(WALLS.x / EARTH_RADIUS_M))


def test_the_cells_tile_the_basin() -> None:
    assert WALLS.cell_area * WALLS.nx * WALLS.ny == pytest.approx(500e3 * 160e3)


def test_corner_rows_carry_f_of_their_own_latitude() -> None:
    """Corner row j is the southern face of cell row j; ghost rows go on beyond the walls."""
    f = WALLS.coriolis_at_corners()
    assert f.shape == (WALLS.ny + 2 * HALO,)
    assert f[HALO : HALO + WALLS.ny + 1] == pytest.approx(1e-5 + 2e-11 * WALLS.y_face[: WALLS.ny + 1])
    assert np.diff(f) == pytest.approx(2e-11 * 40e3)


def test_a_configuration_gives_its_grid() -> None:
    grid = build_grid(
        box_config(
            {
                "basin.width_km": 900.0,
                "basin.south_km": -200.0,
                "basin.north_km": 400.0,
                "basin.cells_x": 9,
                "basin.cells_y": 30,
                "basin.coriolis_at_origin_per_s": 5e-5,
                "basin.beta_per_m_s": 1.5e-11,
                "basin.side_walls": "no_slip",
                "basin.zonal_boundary": "periodic",
            }
        )
    )
    assert (grid.nx, grid.ny, grid.dx, grid.dy, grid.y_south) == (9, 30, 100e3, 20e3, -200e3)
    assert grid.coriolis(np.array([1e6])) == pytest.approx([5e-5 + 1.5e-5])
    assert grid.no_slip and grid.periodic_x
