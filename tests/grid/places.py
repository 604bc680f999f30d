"""Grids for the tests of the grid: few cells, nx != ny and dx != dy, so that swapped axes show."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from oceanbox.grid import Grid

Array = NDArray[np.float64]

WALLS = Grid(
    nx=5, ny=4, dx=100e3, dy=40e3, y_south=-60e3, coriolis_origin=1e-5, beta=2e-11, periodic_x=False, no_slip=False
)
CHANNEL = replace(WALLS, periodic_x=True)
GRIDS = {"walls": WALLS, "channel": CHANNEL}


def any_centres(grid: Grid) -> Array:
    """Two layers of numbers at centres, all different, (2, ny, nx)."""
    return 1.0 + np.arange(2.0 * grid.ny * grid.nx).reshape(2, grid.ny, grid.nx)


def any_x_faces(grid: Grid) -> Array:
    """Two layers of numbers on x faces, all different but for the seam of a channel, which is one face; zero on walls."""
    field = 1.0 + np.arange(2.0 * grid.ny * (grid.nx + 1)).reshape(2, grid.ny, grid.nx + 1)
    if grid.periodic_x:
        field[..., -1] = field[..., 0]
    else:
        field[..., [0, -1]] = 0.0
    return field


def any_y_faces(grid: Grid) -> Array:
    """Two layers of numbers on y faces, all different, zero on the zonal walls, (2, ny+1, nx)."""
    field = 1.0 + np.arange(2.0 * (grid.ny + 1) * grid.nx).reshape(2, grid.ny + 1, grid.nx)
    field[:, [0, -1]] = 0.0
    return field
