"""What the ghost cells hold: walls all round, or a channel that is periodic in x.

All arrays are 2-D compute arrays, ``(ny + 4, nx + 4)``, changed in place.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel

__all__ = ["fill_centre_edges", "fill_x_face_edges", "fill_y_face_edges"]

Array = NDArray[np.float64]


@kernel
def fill_centre_edges(field: Array, periodic_x: bool) -> None:
    """No gradient across a wall; wrapped where the channel is periodic."""
    rows, columns = field.shape
    nx = columns - 4
    ny = rows - 4
    for j in range(2, ny + 2):
        if periodic_x:
            field[j, 0] = field[j, nx]
            field[j, 1] = field[j, nx + 1]
            field[j, nx + 2] = field[j, 2]
            field[j, nx + 3] = field[j, 3]
        else:
            field[j, 0] = field[j, 2]
            field[j, 1] = field[j, 2]
            field[j, nx + 2] = field[j, nx + 1]
            field[j, nx + 3] = field[j, nx + 1]
    for i in range(columns):
        field[0, i] = field[2, i]
        field[1, i] = field[2, i]
        field[ny + 2, i] = field[ny + 1, i]
        field[ny + 3, i] = field[ny + 1, i]


@kernel
def fill_x_face_edges(field: Array, periodic_x: bool, tangential_sign: float) -> None:
    """u = 0 on meridional walls; beyond zonal walls u repeats (+1, free slip) or changes sign (-1, no slip)."""
    rows, columns = field.shape
    nx = columns - 4
    ny = rows - 4
    for j in range(2, ny + 2):
        if periodic_x:
            field[j, 0] = field[j, nx]
            field[j, 1] = field[j, nx + 1]
            field[j, nx + 2] = field[j, 2]
            field[j, nx + 3] = field[j, 3]
        else:
            field[j, 0] = 0.0
            field[j, 1] = 0.0
            field[j, 2] = 0.0
            field[j, nx + 2] = 0.0
            field[j, nx + 3] = 0.0
    for i in range(columns):
        field[1, i] = tangential_sign * field[2, i]
        field[0, i] = tangential_sign * field[2, i]
        field[ny + 2, i] = tangential_sign * field[ny + 1, i]
        field[ny + 3, i] = tangential_sign * field[ny + 1, i]


@kernel
def fill_y_face_edges(field: Array, periodic_x: bool, tangential_sign: float) -> None:
    """v = 0 on zonal walls; beyond meridional walls v repeats (+1, free slip) or changes sign (-1, no slip)."""
    rows, columns = field.shape
    nx = columns - 4
    ny = rows - 4
    for i in range(columns):
        field[0, i] = 0.0
        field[1, i] = 0.0
        field[2, i] = 0.0
        field[ny + 2, i] = 0.0
        field[ny + 3, i] = 0.0
    for j in range(3, ny + 2):
        if periodic_x:
            field[j, 0] = field[j, nx]
            field[j, 1] = field[j, nx + 1]
            field[j, nx + 2] = field[j, 2]
            field[j, nx + 3] = field[j, 3]
        else:
            field[j, 1] = tangential_sign * field[j, 2]
            field[j, 0] = tangential_sign * field[j, 2]
            field[j, nx + 2] = tangential_sign * field[j, nx + 1]
            field[j, nx + 3] = tangential_sign * field[j, nx + 1]
