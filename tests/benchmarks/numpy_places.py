"""Views of compute arrays at the places of the grid, shifted by whole cells, and their ghost cells between walls."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

__all__ = ["cells", "corners", "fill_centres", "fill_x_faces", "fill_y_faces", "x_faces", "y_faces"]

Array = NDArray[np.float64]


def cells(field: Array, north: int = 0, east: int = 0) -> Array:
    """Interior cells, or their west or south faces, (ny, nx)."""
    rows, columns = field.shape
    return field[2 + north : rows - 2 + north, 2 + east : columns - 2 + east]


def x_faces(field: Array, north: int = 0, east: int = 0) -> Array:
    """West and east faces of interior cells, (ny, nx+1)."""
    rows, columns = field.shape
    return field[2 + north : rows - 2 + north, 2 + east : columns - 1 + east]


def y_faces(field: Array, north: int = 0, east: int = 0) -> Array:
    """South and north faces of interior cells, (ny+1, nx)."""
    rows, columns = field.shape
    return field[2 + north : rows - 1 + north, 2 + east : columns - 2 + east]


def corners(field: Array, north: int = 0, east: int = 0) -> Array:
    """Corners of interior cells, (ny+1, nx+1)."""
    rows, columns = field.shape
    return field[2 + north : rows - 1 + north, 2 + east : columns - 1 + east]


def fill_centres(field: Array) -> None:
    """No gradient across a wall."""
    field[2:-2, :2] = field[2:-2, 2:3]
    field[2:-2, -2:] = field[2:-2, -3:-2]
    field[:2] = field[2]
    field[-2:] = field[-3]


def fill_x_faces(u: Array, sign: float) -> None:
    """u = 0 on meridional walls, repeated (+1) or mirrored (-1) beyond zonal ones."""
    u[2:-2, :3] = 0.0
    u[2:-2, -2:] = 0.0
    u[:2] = sign * u[2]
    u[-2:] = sign * u[-3]


def fill_y_faces(v: Array, sign: float) -> None:
    """v = 0 on zonal walls, repeated (+1) or mirrored (-1) beyond meridional ones."""
    v[:3] = 0.0
    v[-2:] = 0.0
    v[3:-2, :2] = sign * v[3:-2, 2:3]
    v[3:-2, -2:] = sign * v[3:-2, -3:-2]
