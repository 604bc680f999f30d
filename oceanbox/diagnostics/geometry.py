"""Where the cells of a file lie: faces, areas, and the share of a row or column inside a band.

A band rarely ends on a cell face. Means and integrals over a band therefore count a crossed cell by the
share of it that lies inside, so that neighbouring bands add up exactly and nothing jumps when the
resolution changes.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from oceanbox.constants import EARTH_RADIUS_M
from oceanbox.errors import UnreadableResult

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["Geometry", "equator_of"]

Array = NDArray[np.float64]

# Smallest |f0/beta|, in rows, that is a displaced equator and not round-off in f = f0 + beta y.
_ROUND_OFF_ROWS = 1e-6


@dataclass(frozen=True)
class Geometry:
    """Faces of a rectangular grid, and its equator.

    x_face   west and east faces, (nx+1,), m, from the western wall eastward
    y_face   south and north faces, (ny+1,), m, from the origin of the beta-plane northward
    equator  y where the Coriolis parameter is zero, m; NaN on an f-plane, which has none

    Latitude labels are y/a. They are latitudes in truth only where `equator` is 0: quantities *on the
    equator* use `equator`, regions named by latitude use the labels.
    """

    x_face: Array
    y_face: Array
    equator: float = 0.0

    def __post_init__(self) -> None:
        for name, face in (("x_face", self.x_face), ("y_face", self.y_face)):
            if face.ndim != 1 or face.size < 2 or not np.all(np.diff(face) > 0):
                raise ValueError(
                    f"{name}: got shape {face.shape}; faces must be at least two "
                    "rising numbers, m; give them in order, wall to wall"
                )

    @classmethod
    def of(cls, data: xr.Dataset | xr.DataArray) -> Geometry:
        """The geometry of a dataset or array that carries `x` and `y` (or `x_face` and `y_face`) in metres.

        A dataset that holds `coriolis` (y,) also gives the equator; without it the equator is y = 0. Raises
        UnreadableResult where the faces are neither there nor to be had from evenly spaced centres.
        """
        coriolis = data["coriolis"] if "coriolis" in getattr(data, "data_vars", ()) else None
        y_face = _faces(data, "y")
        equator = 0.0
        if coriolis is not None:
            equator = equator_of(np.asarray(coriolis, dtype=float), 0.5 * (y_face[:-1] + y_face[1:]))
        return cls(_faces(data, "x"), y_face, equator)

    @property
    def x(self) -> Array:
        """Cell centres, (nx,), m."""
        return 0.5 * (self.x_face[:-1] + self.x_face[1:])

    @property
    def y(self) -> Array:
        """Cell centres, (ny,), m."""
        return 0.5 * (self.y_face[:-1] + self.y_face[1:])

    @property
    def dx(self) -> Array:
        """Cell widths, (nx,), m."""
        return np.diff(self.x_face)

    @property
    def dy(self) -> Array:
        """Cell heights, (ny,), m."""
        return np.diff(self.y_face)

    @property
    def cell_area(self) -> Array:
        """Cell areas, (ny, nx), m2."""
        return self.dy[:, None] * self.dx[None, :]

    @property
    def width(self) -> float:
        """Width of the basin, m."""
        return float(self.x_face[-1] - self.x_face[0])

    def rows_between(self, south_deg: float, north_deg: float) -> Array:
        """Share of each row between two latitude labels, (ny,), 0 to 1."""
        return _share(self.y_face, _metres(south_deg), _metres(north_deg))

    def rows_near_equator(self, within_deg: float) -> Array:
        """Share of each row within a distance of the equator, (ny,), 0 to 1; zero without an equator."""
        if np.isnan(self.equator):
            return np.zeros(self.y_face.size - 1)
        reach = _metres(within_deg)
        return _share(self.y_face, self.equator - reach, self.equator + reach)

    def rows_centred_near_equator(self, within_deg: float) -> NDArray[np.bool_]:
        """Whether each row's centre is within a distance of the equator, (ny,); never without one."""
        near: NDArray[np.bool_] = np.abs(self.y - self.equator) <= _metres(within_deg)
        return near

    def western_columns(self, fraction: float) -> Array:
        """Share of each column in the westernmost `fraction` of the basin's width, (nx,), 0 to 1."""
        return _share(self.x_face, self.x_face[0], self.x_face[0] + fraction * self.width)

    def eastern_columns(self, fraction: float) -> Array:
        """Share of each column in the easternmost `fraction` of the basin's width, (nx,), 0 to 1."""
        return _share(self.x_face, self.x_face[-1] - fraction * self.width, self.x_face[-1])


def equator_of(coriolis: Array, y: Array) -> float:
    """y where f = f0 + beta y is zero, m; NaN where f is constant and not zero, 0 where f is zero throughout.

    coriolis  f at cell centres, (ny,), s-1
    y         cell centres, (ny,), m
    """
    if not np.any(coriolis):
        return 0.0
    if y.size < 2 or coriolis[-1] == coriolis[0]:
        return float("nan")
    beta = (coriolis[-1] - coriolis[0]) / (y[-1] - y[0])
    equator = float(y[0] - coriolis[0] / beta)
    return 0.0 if abs(equator) < _ROUND_OFF_ROWS * (y[1] - y[0]) else equator


def _metres(degrees: float) -> float:
    return float(np.radians(degrees)) * EARTH_RADIUS_M


def _share(face: Array, lower: float, upper: float) -> Array:
    inside = np.minimum(face[1:], upper) - np.maximum(face[:-1], lower)
    share: Array = np.maximum(inside, 0.0) / np.diff(face)
    return share


def _faces(data: xr.Dataset | xr.DataArray, axis: str) -> Array:
    if f"{axis}_face" in data.coords:
        return np.asarray(data.coords[f"{axis}_face"], dtype=float)
    if axis not in data.coords:
        raise UnreadableResult(
            f"{axis}: got no such coordinate; it must hold cell centres in m; add it, or {axis}_face with the faces"
        )
    centre = np.asarray(data.coords[axis], dtype=float)
    spacing = np.diff(centre)
    # Each coordinate carries the round-off of its own size, and a spacing that of two of them.
    tolerance = 8 * np.finfo(float).eps * np.abs(centre).max(initial=0.0)
    if spacing.size == 0 or np.ptp(spacing) > tolerance:
        raise UnreadableResult(
            f"{axis}: got {centre.size} centres, unevenly spaced or too few to tell their spacing; "
            f"evenly spaced centres or faces are needed; add the coordinate {axis}_face"
        )
    step = (centre[-1] - centre[0]) / (centre.size - 1)
    return np.append(centre - 0.5 * step, centre[-1] + 0.5 * step)
