"""What the ghost cells hold: walls all round, or a channel that is periodic in x.

All arrays are 2-D compute arrays, ``(ny + 4, nx + 4)``, changed in place.  Rows ``first`` to ``end`` - 1 are filled, those of
interior cells; the rows beyond a zonal wall come with the row next to it.
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel

__all__ = ["fill_centre_edges", "fill_x_face_edges", "fill_y_face_edges"]

Array = NDArray[np.float64]


@kernel
def wrap_row(field: Array, j: int) -> None:
    """Ghost cells of one row of a periodic channel."""
    nx = field.shape[1] - 4
    field[j, 0] = field[j, nx]
    field[j, 1] = field[j, nx + 1]
    field[j, nx + 2] = field[j, 2]
    field[j, nx + 3] = field[j, 3]


@kernel
def fill_beyond_zonal_walls(first: int, end: int, field: Array, factor: float) -> None:
    """The two rows beyond a zonal wall are ``factor`` times the row next to it, if that is among the rows given."""
    rows, columns = field.shape
    if first <= 2 < end:
        for i in range(columns):
            field[0, i] = factor * field[2, i]
            field[1, i] = factor * field[2, i]
    last = rows - 3
    if first <= last < end:
        for i in range(columns):
            field[last + 1, i] = factor * field[last, i]
            field[last + 2, i] = factor * field[last, i]


@kernel
def fill_centre_edges(first: int, end: int, field: Array, periodic_x: bool) -> None:
    """No gradient across a wall; wrapped where the channel is periodic."""
    nx = field.shape[1] - 4
    for j in range(first, end):
        if periodic_x:
            wrap_row(field, j)
        else:
            field[j, 0] = field[j, 2]
            field[j, 1] = field[j, 2]
            field[j, nx + 2] = field[j, nx + 1]
            field[j, nx + 3] = field[j, nx + 1]
    fill_beyond_zonal_walls(first, end, field, 1.0)


@kernel
def fill_x_face_edges(first: int, end: int, field: Array, periodic_x: bool, tangential_sign: float) -> None:
    """u = 0 on meridional walls; beyond zonal walls u repeats (+1, free slip) or changes sign (-1, no slip)."""
    nx = field.shape[1] - 4
    for j in range(first, end):
        if periodic_x:
            wrap_row(field, j)
        else:
            field[j, 0] = 0.0
            field[j, 1] = 0.0
            field[j, 2] = 0.0
            field[j, nx + 2] = 0.0
            field[j, nx + 3] = 0.0
    fill_beyond_zonal_walls(first, end, field, tangential_sign)


@kernel
def fill_y_face_edges(first: int, end: int, field: Array, periodic_x: bool, tangential_sign: float) -> None:
    """v = 0 on zonal walls; beyond meridional walls v repeats (+1, free slip) or changes sign (-1, no slip)."""
    rows, columns = field.shape
    nx = columns - 4
    ny = rows - 4
    if first <= 2 < end:
        for i in range(columns):
            field[0, i] = 0.0
            field[1, i] = 0.0
            field[2, i] = 0.0
    if first <= ny + 1 < end:
        for i in range(columns):
            field[ny + 2, i] = 0.0
            field[ny + 3, i] = 0.0
    for j in range(max(first, 3), end):
        if periodic_x:
            wrap_row(field, j)
        else:
            field[j, 1] = tangential_sign * field[j, 2]
            field[j, 0] = tangential_sign * field[j, 2]
            field[j, nx + 2] = tangential_sign * field[j, nx + 1]
            field[j, nx + 3] = tangential_sign * field[j, nx + 1]
